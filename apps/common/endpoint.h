/** endpoint.h - checks on --from, --to and other files before any work begins. */
#ifndef APPS_COMMON_ENDPOINT_H
#define APPS_COMMON_ENDPOINT_H

#include "program.h"

/**
 * Refuses sound devices and radios, which come with a later version, and an empty text. option: "--from".
 * text may be NULL (not given). Returns APP_CONTINUE or APP_USAGE, the sentence written.
 */
int app_endpoint_check(const app_program *program, const char *option, const char *text);

/** One file named on the command line. */
typedef struct app_file {
    const char *option; /* "--track" */
    const char *path;   /* NULL = not given */
    bool output;
} app_file;

/**
 * Refuses an output that is also an input or another output, and standard input or output asked for twice.
 * Returns APP_CONTINUE or APP_USAGE, the sentence written.
 */
int app_files_check(const app_program *program, const app_file *files, size_t count);

#endif
