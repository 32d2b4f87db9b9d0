/* errors.h - the list of all errors found. Internal to the config room. */
#ifndef MIRRORBAND_CONFIG_ERRORS_H
#define MIRRORBAND_CONFIG_ERRORS_H

#include "mirrorband/core.h"

enum { CONFIG_ERRORS_MAX = 200 };

/* The first CONFIG_ERRORS_MAX errors as texts of their own; `found` counts on. */
typedef struct config_errors {
    char *text[CONFIG_ERRORS_MAX + 1];
    size_t kept, found;
    bool memory_out;
} config_errors;

/* Where an error stands; line and column count from 1, 0 = none. */
typedef struct config_place {
    const char *source;
    size_t line, column;
} config_place;

/* Keeps "SOURCE:LINE:COLUMN: text"; when the list is full one last entry says so. */
void config_errors_add(config_errors *errors, config_place place, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

void config_errors_release(config_errors *errors);

#endif
