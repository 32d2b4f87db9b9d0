/** summary.h - the few lines for people at the end of a program. */
#ifndef APPS_COMMON_SUMMARY_H
#define APPS_COMMON_SUMMARY_H

#include <stdio.h>

#include "program.h"

/**
 * Where they go: NULL with --quiet or --json (none are wanted), standard error when --to or the second output
 * (NULL = none) takes standard output, else standard output.
 */
FILE *app_summary_stream(const app_common *common, const char *second_output);

/** Refuses --json beside a second output that is a pipe. Returns APP_CONTINUE or APP_USAGE. */
int app_json_check(const app_program *program, const app_common *common, const char *option,
                   const char *path);

#endif
