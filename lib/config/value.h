/* value.h - one value: what was written, and what it means. Internal to the config room. */
#ifndef MIRRORBAND_CONFIG_VALUE_H
#define MIRRORBAND_CONFIG_VALUE_H

#include "keys.h"

typedef struct config_value {
    double number;               /* base unit; NaN while a word stands there */
    const char *word;            /* from the list of the key; NULL while a quantity stands there */
    char text[CONFIG_VALUE_MAX]; /* as written */
    bool set;                    /* given by the user */
} config_value;

/*
 * Reads text (without outer blanks) as a value of the key. On failure value is left alone and `wrong` holds
 * what is wrong with it, without name and place.
 */
bool config_value_read(const config_key *key, const char *text, config_value *value, char *wrong,
                       size_t size);

/* What may stand as a value of the key: "50 Hz to 1 kHz", "off, or -20 dB to 100 dB", "on, off". */
void config_value_allowed(const config_key *key, char *out, size_t size);

/* Appends printf-like text to the text in out, cut to fit. */
void config_append(char *out, size_t size, const char *format, ...) __attribute__((format(printf, 3, 4)));

#endif
