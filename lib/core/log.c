#include "mirrorband/core.h"

#include <stdio.h>

static mb_log_callback log_callback;
static void *log_user;

void mb_log_set(mb_log_callback callback, void *user)
{
    log_callback = callback;
    log_user = user;
}

void mb_log(mb_log_level level, const char *format, ...)
{
    char line[512];
    va_list arguments;

    if (log_callback == NULL) {
        return;
    }
    va_start(arguments, format);
    (void)vsnprintf(line, sizeof line, format, arguments);
    va_end(arguments);
    log_callback(log_user, level, line);
}
