/* One assignment from the command line, and the last check over all values. */
#include "object.h"

#include <stdio.h>
#include <string.h>

mb_status mb_config_set(mb_config *config, const char *assignment)
{
    char name[CONFIG_NAME_MAX] = "", value[CONFIG_VALUE_MAX + 1] = "";
    size_t found_before = config->errors.found;
    config_place place = {.source = "--set"};
    const char *equals = strchr(assignment, '=');

    if (equals == NULL || equals == assignment) {
        config_errors_add(&config->errors, place,
                          "\"%.100s\" must be section.key=value, such as channel.offset=137Hz", assignment);
        return config_outcome(config, found_before);
    }
    const char *key = assignment, *text = equals + 1;
    size_t key_length = (size_t)(equals - assignment), length = strlen(text);
    config_trim(&key, &key_length);
    config_trim_value(&text, &length);
    memcpy(name, key, key_length < sizeof name ? key_length : sizeof name - 1);
    memcpy(value, text, length < sizeof value ? length : sizeof value - 1);
    config_assign(config, place, 0, name, value);
    return config_outcome(config, found_before);
}

static void check_relation(mb_config *config, const config_relation *relation)
{
    int key = config_key_find(relation->key), other = config_key_find(relation->other);
    double value = mb_config_number(config, relation->key);
    double least = relation->factor * mb_config_number(config, relation->other) + relation->offset;
    char least_text[CONFIG_VALUE_MAX];

    if (key < 0 || other < 0 || !(value < least)) {
        return;
    }
    mb_quantity_print(least, config_keys[key].unit, least_text, sizeof least_text);
    config_errors_add(&config->errors, (config_place){.source = "config"},
                      "%s: \"%s\" is too low with %s = %s; it must be at least %s", relation->key,
                      config->values[key].text, relation->other, config->values[other].text, least_text);
}

mb_status mb_config_check(mb_config *config)
{
    if (config->errors.found == 0) {
        for (size_t i = 0; i < config_relation_total; i++) {
            check_relation(config, &config_relations[i]);
        }
    }
    return config_outcome(config, 0);
}
