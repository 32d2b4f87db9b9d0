#include "json_fields.h"

#include "path.h"

#include <stdio.h>

mb_status mb_json_wrong(const mb_json_place *at, const char *key, const char *what)
{
    if (at->index == SIZE_MAX) {
        return mb_fail(MB_ERROR_FORMAT, at->name, "%s: %s %s %s; correct the file or record again", at->name,
                       at->list, key, what);
    }
    return mb_fail(MB_ERROR_FORMAT, at->name, "%s: %s[%zu] %s %s; correct the file or record again", at->name,
                   at->list, at->index, key, what);
}

mb_status mb_json_number(const json_t *object, const mb_json_place *at, const char *key, double low,
                         double high, double *value, bool *there)
{
    const json_t *item = json_object_get(object, key);

    *there = item != NULL;
    if (item == NULL) {
        return MB_OK;
    }
    if (!json_is_number(item)) {
        return mb_json_wrong(at, key, "must be a number");
    }
    double found = json_number_value(item);
    if (!(found >= low && found <= high)) {
        char what[64];
        (void)snprintf(what, sizeof what, "must be %g to %g", low, high);
        return mb_json_wrong(at, key, what);
    }
    *value = found;
    return MB_OK;
}

mb_status mb_json_whole(const json_t *object, const mb_json_place *at, const char *key, uint64_t *value,
                        bool *there)
{
    const json_t *item = json_object_get(object, key);

    *there = item != NULL;
    if (item == NULL) {
        return MB_OK;
    }
    if (!json_is_integer(item) || json_integer_value(item) < 0) {
        return mb_json_wrong(at, key, "must be a whole number, 0 or more");
    }
    *value = (uint64_t)json_integer_value(item);
    return MB_OK;
}

mb_status mb_json_text(const json_t *object, const mb_json_place *at, const char *key, char *out, size_t size)
{
    const json_t *item = json_object_get(object, key);

    out[0] = '\0';
    if (item == NULL) {
        return MB_OK;
    }
    if (!json_is_string(item)) {
        return mb_json_wrong(at, key, "must be a text");
    }
    mb_text_copy(out, size, json_string_value(item));
    return MB_OK;
}
