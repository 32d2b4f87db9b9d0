/* options.h - the table of all options of a program, its own and the common ones. Internal to common. */
#ifndef APPS_COMMON_OPTIONS_H
#define APPS_COMMON_OPTIONS_H

#include "program.h"

enum { OPTIONS_MAX = 64 };

/* What a common option does, beyond filling a target. */
typedef enum option_role {
    ROLE_OWN,
    ROLE_FILL,
    ROLE_CONFIG,
    ROLE_SET,
    ROLE_HELP,
    ROLE_VERSION,
    ROLE_SEED
} option_role;

typedef struct option_entry {
    app_option option;
    option_role role;
    bool given;
    const char *text; /* the argument when given */
} option_entry;

typedef struct option_table {
    option_entry entry[OPTIONS_MAX];
    size_t count;
} option_table;

/* The program's own options first, then the common ones it takes; targets point into common. */
void options_collect(const app_program *program, app_common *common, option_table *table);

/* Writes --help to stdout. */
void options_help(const app_program *program, const option_table *table);

/*
 * Reads the argument of one of the program's own options (or a common one with a target) into its target.
 * APP_KEY is left to the caller. Returns APP_CONTINUE, or APP_USAGE with the sentence written.
 */
int option_fill(const app_program *program, const app_option *option, const char *text);

/* Text of a bare number with the base unit of the key behind it, else the text itself; cut to fit. */
void option_key_text(const char *key, const char *text, char *out, size_t size);

#endif
