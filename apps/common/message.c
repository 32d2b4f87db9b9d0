/* What is said to the user: one sentence a line, the program's name before it. */
#include "program.h"

#include <stdio.h>

#include "signals.h"

static void say(const app_program *program, const char *format, va_list arguments)
{
    (void)fprintf(stderr, "%s: ", program->name);
    (void)vfprintf(stderr, format, arguments);
    (void)fputc('\n', stderr);
}

void app_error(const app_program *program, const char *format, ...)
{
    va_list arguments;

    va_start(arguments, format);
    say(program, format, arguments);
    va_end(arguments);
}

void app_note(const app_program *program, const app_common *common, const char *format, ...)
{
    va_list arguments;

    if (!common->quiet) {
        va_start(arguments, format);
        say(program, format, arguments);
        va_end(arguments);
    }
}

static struct {
    const app_program *program;
    const app_common *common;
} speaker;

static void say_warning(void *user, mb_log_level level, const char *line)
{
    (void)user;
    if (level == MB_LOG_WARNING) {
        app_note(speaker.program, speaker.common, "%s", line);
    }
}

void app_log_begin(const app_program *program, const app_common *common)
{
    speaker.program = program;
    speaker.common = common;
    mb_log_set(say_warning, NULL);
}

void app_log_end(void)
{
    mb_log_set(NULL, NULL);
}

int app_usage_error(const app_program *program, const char *format, ...)
{
    va_list arguments;

    va_start(arguments, format);
    say(program, format, arguments);
    va_end(arguments);
    (void)fprintf(stderr, "%s: %s --help lists all options\n", program->name, program->name);
    return APP_USAGE;
}

int app_fail(const app_program *program, mb_status status)
{
    if (status == MB_ERROR_INTERRUPTED) {
        int signal_number = app_interrupted();
        app_error(program, "interrupted; what was written so far is valid");
        return signal_number > 0 ? 128 + signal_number : APP_FAILURE;
    }
    const char *text = mb_last_fault()->text;
    app_error(program, "%s",
              mb_last_fault()->status == status && text[0] != '\0' ? text : mb_status_text(status));
    switch (status) {
    case MB_OK:
        return APP_OK;
    case MB_ERROR_CONFIG:
        return APP_USAGE;
    case MB_ERROR_NO_SIGNAL:
        return APP_NO_SIGNAL;
    default:
        return APP_FAILURE;
    }
}
