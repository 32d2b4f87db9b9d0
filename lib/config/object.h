/* object.h - the config as it is in memory. Internal to the config room. */
#ifndef MIRRORBAND_CONFIG_OBJECT_H
#define MIRRORBAND_CONFIG_OBJECT_H

#include "mirrorband/config.h"

#include "errors.h"
#include "value.h"

struct mb_config {
    config_value *values; /* one for each entry of config_keys */
    config_errors errors;
};

/*
 * Sets "section.key" to text. place: of the key; value_column: of the value. Errors are kept.
 */
void config_assign(mb_config *config, config_place place, size_t value_column, const char *name,
                   const char *text);

/* What a call returns that has found errors since `found_before`. */
mb_status config_outcome(const mb_config *config, size_t found_before);

/* Text without blanks at both ends: moves *text and shortens *length. */
void config_trim(const char **text, size_t *length);

/* Text without blanks at both ends and without a pair of double quotes around the rest. */
void config_trim_value(const char **text, size_t *length);

#endif
