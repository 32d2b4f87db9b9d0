/* The object: values, errors, getters. */
#include "object.h"

#include <ctype.h>
#include <math.h>
#include <string.h>

mb_status mb_config_create(mb_config **out)
{
    char wrong[512];

    *out = NULL;
    mb_config *config = mb_allocate(1, sizeof *config);
    config_value *values = mb_allocate(config_key_total, sizeof *values);
    if (config == NULL || values == NULL) {
        mb_release(config);
        mb_release(values);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the config");
    }
    config->values = values;
    for (size_t i = 0; i < config_key_total; i++) {
        if (!config_value_read(&config_keys[i], config_keys[i].initial, &values[i], wrong, sizeof wrong)) {
            mb_config_destroy(config);
            return mb_fail(MB_ERROR_CONFIG, config_keys[i].name, "default of %s: %s", config_keys[i].name,
                           wrong);
        }
    }
    *out = config;
    return MB_OK;
}

void mb_config_destroy(mb_config *config)
{
    if (config != NULL) {
        config_errors_release(&config->errors);
        mb_release(config->values);
        mb_release(config);
    }
}

void config_trim(const char **text, size_t *length)
{
    while (*length > 0 && isspace((unsigned char)**text)) {
        *text += 1;
        *length -= 1;
    }
    while (*length > 0 && isspace((unsigned char)(*text)[*length - 1])) {
        *length -= 1;
    }
}

void config_trim_value(const char **text, size_t *length)
{
    config_trim(text, length);
    if (*length >= 2 && (*text)[0] == '"' && (*text)[*length - 1] == '"') {
        *text += 1;
        *length -= 2;
        config_trim(text, length);
    }
}

static void unknown_key(mb_config *config, config_place place, const char *name)
{
    char section[CONFIG_NAME_MAX] = "";
    const char *dot = strchr(name, '.');
    const char *nearest = config_key_nearest(name);

    if (dot != NULL) {
        memcpy(section, name, (size_t)(dot - name));
    }
    if (config_section_known(section) && !config_section_has_keys(section)) {
        config_errors_add(&config->errors, place,
                          "%s: section %s has no keys in this version; take the key out", name, section);
        return;
    }
    config_errors_add(&config->errors, place, "%s: %s; %s%s", name,
                      dot == NULL ? "the section is missing before the key" : "there is no such key",
                      nearest != NULL ? "nearest key: " : "--set help lists all keys",
                      nearest != NULL ? nearest : "");
}

void config_assign(mb_config *config, config_place place, size_t value_column, const char *name,
                   const char *text)
{
    char wrong[900];
    int index = config_key_find(name);

    if (index < 0) {
        unknown_key(config, place, name);
        return;
    }
    config_value *value = &config->values[index];
    if (!config_value_read(&config_keys[index], text, value, wrong, sizeof wrong)) {
        place.column = value_column;
        config_errors_add(&config->errors, place, "%s: %s", name, wrong);
        return;
    }
    value->set = true;
}

mb_status config_outcome(const mb_config *config, size_t found_before)
{
    const config_errors *errors = &config->errors;

    if (errors->memory_out) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the errors of the config");
    }
    if (errors->found == found_before) {
        return MB_OK;
    }
    const char *first = mb_config_error(config, found_before);
    return mb_fail(MB_ERROR_CONFIG, "", "%s", first != NULL ? first : "too many errors in the config");
}

size_t mb_config_error_count(const mb_config *config)
{
    return config->errors.kept;
}

const char *mb_config_error(const mb_config *config, size_t index)
{
    return index < config->errors.kept ? config->errors.text[index] : NULL;
}

static const config_value *value_of(const mb_config *config, const char *key)
{
    int index = config_key_find(key);

    return index < 0 ? NULL : &config->values[index];
}

double mb_config_number(const mb_config *config, const char *key)
{
    return mb_config_number_or(config, key, NAN);
}

double mb_config_number_or(const mb_config *config, const char *key, double when_word)
{
    const config_value *value = value_of(config, key);

    return value == NULL ? NAN : value->word != NULL ? when_word : value->number;
}

const char *mb_config_word(const mb_config *config, const char *key)
{
    const config_value *value = value_of(config, key);

    return value == NULL ? NULL : value->word;
}

bool mb_config_is(const mb_config *config, const char *key, const char *word)
{
    const char *now = mb_config_word(config, key);

    return now != NULL && strcmp(now, word) == 0;
}

bool mb_config_switch(const mb_config *config, const char *key)
{
    return mb_config_is(config, key, "on");
}

const char *mb_config_text(const mb_config *config, const char *key)
{
    const config_value *value = value_of(config, key);

    return value == NULL ? NULL : value->text;
}

bool mb_config_is_set(const mb_config *config, const char *key)
{
    const config_value *value = value_of(config, key);

    return value != NULL && value->set;
}

const char *mb_config_unit(const char *key)
{
    int index = config_key_find(key);

    return index < 0 || config_keys[index].kind != CONFIG_QUANTITY ? ""
                                                                   : mb_unit_text(config_keys[index].unit);
}

size_t mb_config_key_count(void)
{
    return config_key_total;
}

const char *mb_config_key_name(size_t index)
{
    return index < config_key_total ? config_keys[index].name : NULL;
}
