/* Which name was meant: edit distance after Damerau (Communications of the ACM 7, 1964), swaps of neighbours.
 */
#include "keys.h"

#include <ctype.h>
#include <string.h>

enum { LENGTH_MAX = CONFIG_NAME_MAX - 1, NEVER = 1000 };

static size_t smaller(size_t a, size_t b)
{
    return a < b ? a : b;
}

static bool same_letter(char a, char b)
{
    return tolower((unsigned char)a) == tolower((unsigned char)b);
}

size_t config_distance(const char *a, const char *b)
{
    size_t rows[3][LENGTH_MAX + 1]; /* edits for the first i of a (three rows kept) and the first j of b */
    size_t length_a = strnlen(a, LENGTH_MAX), length_b = strnlen(b, LENGTH_MAX);

    for (size_t i = 0; i <= length_a; i++) {
        size_t *now = rows[i % 3], *before = rows[(i + 2) % 3], *earlier = rows[(i + 1) % 3];
        now[0] = i;
        for (size_t j = 1; j <= length_b; j++) {
            if (i == 0) {
                now[j] = j;
                continue;
            }
            size_t replace = before[j - 1] + (same_letter(a[i - 1], b[j - 1]) ? 0 : 1);
            now[j] = smaller(replace, smaller(before[j], now[j - 1]) + 1);
            if (i > 1 && j > 1 && same_letter(a[i - 1], b[j - 2]) && same_letter(a[i - 2], b[j - 1])) {
                now[j] = smaller(now[j], earlier[j - 2] + 1);
            }
        }
    }
    return rows[length_a % 3][length_b];
}

/* Distance with two allowances: a piece of the name counts as one edit, and what is farther than a third of
 * the length is not near at all. */
static size_t cost_of(const char *meant, const char *written)
{
    size_t edits = config_distance(meant, written);
    size_t length = strlen(written);

    if (edits > 1 && length >= 4 && (strstr(meant, written) != NULL || strstr(written, meant) != NULL)) {
        return 1;
    }
    return edits <= smaller(length / 3 + 1, 5) && edits < strlen(meant) ? edits : NEVER;
}

const char *config_word_nearest(const char *const *words, const char *text)
{
    const char *nearest = NULL;
    size_t least = NEVER;

    for (; words != NULL && *words != NULL; words++) {
        size_t cost = cost_of(*words, text);
        if (cost < least) {
            least = cost;
            nearest = *words;
        }
    }
    return nearest;
}

const char *config_section_nearest(const char *name)
{
    const char *nearest = NULL;
    size_t least = NEVER;

    for (size_t i = 0; i < config_section_total; i++) {
        size_t cost = cost_of(config_sections[i].name, name);
        if (cost < least) {
            least = cost;
            nearest = config_sections[i].name;
        }
    }
    return nearest;
}

/* Splits "section.key"; without a dot the section is "". The key is a pointer into name. */
static const char *split_name(const char *name, char section[CONFIG_NAME_MAX])
{
    const char *dot = strchr(name, '.');
    size_t length = dot == NULL ? 0 : smaller((size_t)(dot - name), LENGTH_MAX);

    memcpy(section, name, length);
    section[length] = '\0';
    return dot == NULL ? name : dot + 1;
}

/* A key in the section written counts less than the same key in another section. */
const char *config_key_nearest(const char *name)
{
    const char *nearest = NULL;
    char section[CONFIG_NAME_MAX], other_section[CONFIG_NAME_MAX];
    size_t least = NEVER;

    const char *key = split_name(name, section);
    for (size_t i = 0; i < config_key_total; i++) {
        const char *other_key = split_name(config_keys[i].name, other_section);
        size_t cost = 2 * cost_of(other_key, key) + smaller(config_distance(section, other_section), 3);
        if (cost < least) {
            least = cost;
            nearest = config_keys[i].name;
        }
    }
    return nearest;
}
