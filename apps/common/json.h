/** json.h - results as JSON on standard output (jansson). */
#ifndef APPS_COMMON_JSON_H
#define APPS_COMMON_JSON_H

#include <stdio.h>

#include <jansson.h>

#include "program.h"

/** A number rounded to so many decimals (0 to 12); NaN and infinities become null. The caller's. */
json_t *app_json_number(double value, int decimals);

/** object[name] = the number rounded to so many decimals; NaN and infinities become null. */
void app_json_set(json_t *object, const char *name, double value, int decimals);

/** object[name] = text; NULL becomes null. */
void app_json_set_text(json_t *object, const char *name, const char *text);

/** object[name] = whole number. */
void app_json_set_whole(json_t *object, const char *name, uint64_t value);

/** object[name] = true or false. */
void app_json_set_flag(json_t *object, const char *name, bool value);

/** Adds {"program", "version"} at the head of a new result object; NULL if memory is out. */
json_t *app_json_begin(const app_program *program);

/**
 * Writes the object, indented, in the order of setting, with a line end, and frees it. Returns APP_OK, or
 * APP_FAILURE with the sentence written (memory out while setting, disk full, pipe closed).
 */
int app_json_print(const app_program *program, json_t *object, FILE *stream);

/** Flushes stdout at the end of a program; APP_OK, or APP_FAILURE with the sentence written. */
int app_flush(const app_program *program);

#endif
