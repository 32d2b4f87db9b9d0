/** json_fields.h - values out of JSON objects, each checked, with the place of what is wrong. Room-internal.
 */
#ifndef MIRRORBAND_FILES_JSON_FIELDS_H
#define MIRRORBAND_FILES_JSON_FIELDS_H

#include "mirrorband/files.h"

#include <jansson.h>

/* Where a value stands, for messages: "air.sigmf-meta: captures[2]". */
typedef struct mb_json_place {
    const char *name;
    const char *list; /* "global", "captures", "annotations" */
    size_t index;     /* SIZE_MAX for global */
} mb_json_place;

/** Records that the value of a key is wrong; what: "must be ...". Returns MB_ERROR_FORMAT. */
mb_status mb_json_wrong(const mb_json_place *at, const char *key, const char *what);

/** Number of a key within low..high; *there tells whether it is stated. */
mb_status mb_json_number(const json_t *object, const mb_json_place *at, const char *key, double low,
                         double high, double *value, bool *there);

/** Whole number of a key, 0 or more; *there tells whether it is stated. */
mb_status mb_json_whole(const json_t *object, const mb_json_place *at, const char *key, uint64_t *value,
                        bool *there);

/** Text of a key, cut to fit; "" when not stated. */
mb_status mb_json_text(const json_t *object, const mb_json_place *at, const char *key, char *out,
                       size_t size);

#endif
