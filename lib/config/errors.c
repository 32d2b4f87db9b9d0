#include "errors.h"

#include <stdio.h>
#include <string.h>

enum { ERROR_TEXT_MAX = 1400 };

static void keep(config_errors *errors, const char *text)
{
    size_t length = strlen(text) + 1;
    char *copy = mb_allocate(length, 1);

    if (copy == NULL) {
        errors->memory_out = true;
        return;
    }
    memcpy(copy, text, length);
    errors->text[errors->kept++] = copy;
}

void config_errors_add(config_errors *errors, config_place place, const char *format, ...)
{
    char text[ERROR_TEXT_MAX], sentence[1000], position[64] = "";
    va_list arguments;

    errors->found++;
    if (errors->kept == CONFIG_ERRORS_MAX) {
        keep(errors, "more errors follow; these are the first");
    }
    if (errors->kept > CONFIG_ERRORS_MAX) {
        return;
    }
    va_start(arguments, format);
    (void)vsnprintf(sentence, sizeof sentence, format, arguments);
    va_end(arguments);
    if (place.line > 0) {
        (void)snprintf(position, sizeof position, ":%zu:%zu", place.line, place.column);
    }
    (void)snprintf(text, sizeof text, "%.300s%s: %s", place.source, position, sentence);
    keep(errors, text);
}

void config_errors_release(config_errors *errors)
{
    for (size_t i = 0; i < errors->kept; i++) {
        mb_release(errors->text[i]);
    }
    errors->kept = errors->found = 0;
}
