/**
 * config.h - one config file for all programs: read, check, print, explain.
 *
 * A file is UTF-8 text of lines "[section]", "key = value" and "# comment". A value is one of
 *   quantity  a number with its unit, "7.285 MHz", "137Hz", "-40 dBc"; plain numbers only where no unit
 * exists switch    on or off word      one of a list or either a quantity or a word ("off", "60 ms") One
 * table (lib/config/keys.c) holds every key with its kind, unit, range, default and meaning; the reader, the
 * help text and the manual page mirrorband(5) are made from it. Keys are named "section.key" in all calls.
 *
 * Nothing stops at the first mistake: all errors of all sources are kept, in the order in which they were
 * found, each as "SOURCE:LINE:COLUMN: section.key: what is wrong; allowed: range; nearest key: section.key".
 */
#ifndef MIRRORBAND_CONFIG_H
#define MIRRORBAND_CONFIG_H

#include <stdio.h>

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/** The values of all keys, where they came from, and the errors found so far. */
typedef struct mb_config mb_config;

/** Starts with every key at its default. *out is the caller's, to be destroyed. Errors: MEMORY. Thread:
 * control. */
MB_API mb_status mb_config_create(mb_config **out);

/** Accepts NULL. Thread: control. */
MB_API void mb_config_destroy(mb_config *config);

/**
 * Reads a file over what is there. Correct lines take effect, wrong ones are kept as errors, so a caller may
 * go on to other sources and ask mb_config_check once at the end. Files may have at most 1 MiB.
 * Errors: FILE (missing, unreadable), CONFIG (wrong lines; see mb_config_error), MEMORY. Thread: control.
 */
MB_API mb_status mb_config_read_file(mb_config *config, const char *path);

/** The same for length bytes of text already in memory; source names it in errors. Errors: CONFIG, MEMORY.
 * Thread: control. */
MB_API mb_status mb_config_read_text(mb_config *config, const char *source, const char *text, size_t length);

/**
 * Sets one key: "section.key=value", blanks around the parts allowed. The last setting of a key counts.
 * Errors: CONFIG (kept too, see mb_config_error), MEMORY. Thread: control.
 */
MB_API mb_status mb_config_set(mb_config *config, const char *assignment);

/**
 * MB_OK when no error was found and the values fit each other; to be asked once after the last source. Else
 * CONFIG, with the first error in mb_last_fault() and all in mb_config_error. Errors: CONFIG, MEMORY. Thread:
 * control.
 */
MB_API mb_status mb_config_check(mb_config *config);

/** Number of errors kept. Thread: control. */
MB_API size_t mb_config_error_count(const mb_config *config);

/** The index-th error in the order found, without line end; NULL beyond the last. Valid until destroyed.
 * Thread: control. */
MB_API const char *mb_config_error(const mb_config *config, size_t index);

/**
 * Value of a quantity in its base unit (Hz, s, dB, dBc, dBFS, Hz/s, deg, %, W, or none). NaN when a word
 * stands there ("off"), or when there is no such key. Thread: control.
 */
MB_API double mb_config_number(const mb_config *config, const char *key);

/** The same with a value of the caller's choice where a word stands. Thread: control. */
MB_API double mb_config_number_or(const mb_config *config, const char *key, double when_word);

/** Whether a switch is on; false if there is no such key. Thread: control. */
MB_API bool mb_config_switch(const mb_config *config, const char *key);

/**
 * The word that stands there ("on", "off" for a switch); NULL when a quantity stands there or there is no
 * such key. Static text. Thread: control.
 */
MB_API const char *mb_config_word(const mb_config *config, const char *key);

/** Whether the word stands there: mb_config_is(config, "channel.noise", "off"). Thread: control. */
MB_API bool mb_config_is(const mb_config *config, const char *key, const char *word);

/** The value as the user or the table wrote it; NULL if there is no such key. Valid until the key is set
 * again. Thread: control. */
MB_API const char *mb_config_text(const mb_config *config, const char *key);

/** Whether the user gave this key (in a file or by mb_config_set). Thread: control. */
MB_API bool mb_config_is_set(const mb_config *config, const char *key);

/** Base unit of a key such as "Hz"; "" without unit or without such a key. Static text. Thread: any. */
MB_API const char *mb_config_unit(const char *key);

/** Number of keys, and the name of the index-th in the order of the table; NULL beyond the last. Thread: any.
 */
MB_API size_t mb_config_key_count(void);
MB_API const char *mb_config_key_name(size_t index);

/** Writes the whole config as a file that reads back to the same values; defaults as comments. Errors: FILE.
 * Thread: control. */
MB_API mb_status mb_config_print(const mb_config *config, FILE *stream);

/** Writes every key with default, range and meaning. Errors: FILE. Thread: control. */
MB_API mb_status mb_config_help(FILE *stream);

/** Writes the manual page mirrorband(5), man macros. Errors: FILE. Thread: control. */
MB_API mb_status mb_config_man_page(FILE *stream);

#ifdef __cplusplus
}
#endif

#endif
