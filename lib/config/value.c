#include "value.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

void config_append(char *out, size_t size, const char *format, ...)
{
    size_t used = strlen(out);
    va_list arguments;

    va_start(arguments, format);
    (void)vsnprintf(out + used, size - used, format, arguments);
    va_end(arguments);
}

void config_value_allowed(const config_key *key, char *out, size_t size)
{
    out[0] = '\0';
    for (const char *const *word = key->words; word != NULL && *word != NULL; word++) {
        config_append(out, size, "%s%s", word == key->words ? "" : ", ", *word);
    }
    if (key->kind == CONFIG_QUANTITY) {
        char low[CONFIG_VALUE_MAX], high[CONFIG_VALUE_MAX];
        const char *zero = key->unit == MB_UNIT_NUMBER ? "" : mb_unit_text(key->unit);
        mb_quantity_print(key->low, key->unit, low, sizeof low);
        mb_quantity_print(key->high, key->unit, high, sizeof high);
        if (key->low == 0.0 && zero[0] != '\0') {
            (void)snprintf(low, sizeof low, "0 %s", zero);
        }
        config_append(out, size, "%s%s to %s%s", key->words != NULL ? ", or " : "", low, high,
                      key->whole ? ", whole" : "");
    }
}

static const char *word_of(const config_key *key, const char *text)
{
    for (const char *const *word = key->words; word != NULL && *word != NULL; word++) {
        if (strcmp(*word, text) == 0) {
            return *word;
        }
    }
    return NULL;
}

/* Always false: says what is wrong, then what is allowed. */
static bool not_allowed(const config_key *key, const char *what, char *wrong, size_t size)
{
    char allowed[512];

    config_value_allowed(key, allowed, sizeof allowed);
    (void)snprintf(wrong, size, "%s; allowed: %s", what, allowed);
    return false;
}

static bool wrong_word(const config_key *key, const char *text, char *wrong, size_t size)
{
    char what[CONFIG_VALUE_MAX + 64];
    const char *nearest = config_word_nearest(key->words, text);

    (void)snprintf(what, sizeof what, "\"%s\" is not a value of this key", text);
    (void)not_allowed(key, what, wrong, size);
    if (nearest != NULL) {
        config_append(wrong, size, "; nearest: %s", nearest);
    }
    return false;
}

static bool read_quantity(const config_key *key, const char *text, double *number, char *wrong, size_t size)
{
    char what[CONFIG_VALUE_MAX + 64];

    if (mb_quantity_parse(text, key->unit, number) != MB_OK) {
        return not_allowed(key, mb_last_fault()->text, wrong, size);
    }
    if (!(*number >= key->low && *number <= key->high)) {
        (void)snprintf(what, sizeof what, "\"%s\" is out of range", text);
        return not_allowed(key, what, wrong, size);
    }
    if (key->whole && *number != floor(*number)) {
        (void)snprintf(what, sizeof what, "\"%s\" is not a whole number", text);
        return not_allowed(key, what, wrong, size);
    }
    return true;
}

bool config_value_read(const config_key *key, const char *text, config_value *value, char *wrong, size_t size)
{
    double number = NAN;
    const char *word = word_of(key, text);

    if (text[0] == '\0') {
        return not_allowed(key, "no value is given", wrong, size);
    }
    if (strlen(text) >= CONFIG_VALUE_MAX) {
        (void)snprintf(wrong, size, "the value is longer than %d characters", CONFIG_VALUE_MAX - 1);
        return false;
    }
    if (word == NULL &&
        (key->kind == CONFIG_WORD || (key->words != NULL && isalpha((unsigned char)text[0])))) {
        return wrong_word(key, text, wrong, size);
    }
    if (word == NULL && !read_quantity(key, text, &number, wrong, size)) {
        return false;
    }
    value->number = number;
    value->word = word;
    memcpy(value->text, text, strlen(text) + 1);
    return true;
}
