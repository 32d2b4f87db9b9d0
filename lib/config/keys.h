/* keys.h - the table of keys and the look-ups in it. Internal to the config room. */
#ifndef MIRRORBAND_CONFIG_KEYS_H
#define MIRRORBAND_CONFIG_KEYS_H

#include "mirrorband/core.h"

enum { CONFIG_NAME_MAX = 64, CONFIG_VALUE_MAX = 64 }; /* bytes with the closing zero */

/* What may stand as a value. */
typedef enum config_kind {
    CONFIG_QUANTITY, /* a quantity, or one of the words if there are any */
    CONFIG_WORD      /* one of the words; a switch is a word of "on", "off" */
} config_kind;

typedef struct config_key {
    const char *name; /* "section.key" */
    config_kind kind;
    mb_unit unit;             /* quantities */
    bool whole;               /* quantities: whole numbers only */
    double low, high;         /* quantities: range, ends included */
    const char *const *words; /* ended by NULL; NULL = none */
    const char *initial;      /* default, as it would be written */
    const char *meaning;      /* one line */
} config_key;

/* A section; those without keys are kept for later programs. */
typedef struct config_section {
    const char *name;
    const char *meaning;
} config_section;

/* One key must not be below factor * another + offset (base units). */
typedef struct config_relation {
    const char *key, *other;
    double factor, offset;
} config_relation;

extern const config_key config_keys[];
extern const size_t config_key_total;
extern const config_section config_sections[];
extern const size_t config_section_total;
extern const config_relation config_relations[];
extern const size_t config_relation_total;
extern const char *const config_switch_words[];

/* Index of "section.key" in the table; -1 if there is no such key. */
int config_key_find(const char *name);

/* Whether the name is one of config_sections. */
bool config_section_known(const char *name);

/* Whether the key belongs to the section. */
bool config_key_in(const config_key *key, const char *section);

/* Whether the section has keys in this version. */
bool config_section_has_keys(const char *section);

/* Name of the key that was most likely meant by "section.key" (or a bare "key"); NULL if none is near. */
const char *config_key_nearest(const char *name);

/* Name of the section that was most likely meant; NULL if none is near. */
const char *config_section_nearest(const char *name);

/* Word of a list (ended by NULL) that was most likely meant; NULL if none is near. */
const char *config_word_nearest(const char *const *words, const char *text);

/* Edits (insert, delete, replace, swap neighbours) that turn one text into the other, case apart; texts are
 * cut at 63 bytes. */
size_t config_distance(const char *a, const char *b);

#endif
