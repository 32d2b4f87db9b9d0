/* The table as text: the config in force, the help, the manual page. */
#include "object.h"

#include <ctype.h>
#include <errno.h>
#include <string.h>

static const char *key_part(const config_key *key)
{
    return strchr(key->name, '.') + 1;
}

static mb_status written(FILE *stream)
{
    if (fflush(stream) != 0 || ferror(stream)) {
        return mb_fail(MB_ERROR_FILE, "", "the config cannot be written: %s", strerror(errno));
    }
    return MB_OK;
}

mb_status mb_config_print(const mb_config *config, FILE *stream)
{
    for (size_t s = 0; s < config_section_total; s++) {
        if (!config_section_has_keys(config_sections[s].name)) {
            continue;
        }
        (void)fprintf(stream, "%s[%s]\n", s > 0 ? "\n" : "", config_sections[s].name);
        for (size_t i = 0; i < config_key_total; i++) {
            if (config_key_in(&config_keys[i], config_sections[s].name)) {
                (void)fprintf(stream, "%s%s = %s\n", config->values[i].set ? "" : "# ",
                              key_part(&config_keys[i]), config->values[i].text);
            }
        }
    }
    return written(stream);
}

static void help_key(const config_key *key, FILE *stream)
{
    char allowed[512];

    config_value_allowed(key, allowed, sizeof allowed);
    (void)fprintf(stream, "  %-32s %-10s (%s)\n      %s\n", key->name, key->initial, allowed, key->meaning);
}

mb_status mb_config_help(FILE *stream)
{
    (void)fprintf(stream,
                  "Keys for --set section.key=value and for config files; default (allowed), meaning.\n"
                  "Quantities carry their unit: 137Hz, \"2.7 kHz\", \"-40 dBc\", 60ms.\n");
    for (size_t s = 0; s < config_section_total; s++) {
        if (!config_section_has_keys(config_sections[s].name)) {
            continue;
        }
        (void)fprintf(stream, "\n[%s] %s\n", config_sections[s].name, config_sections[s].meaning);
        for (size_t i = 0; i < config_key_total; i++) {
            if (config_key_in(&config_keys[i], config_sections[s].name)) {
                help_key(&config_keys[i], stream);
            }
        }
    }
    return written(stream);
}

/* Text for the manual page: '-' as a minus that can be copied. */
static void man_text(const char *text, FILE *stream)
{
    for (; *text != '\0'; text++) {
        if (*text == '-') {
            (void)fputs("\\-", stream);
        } else {
            (void)fputc(*text, stream);
        }
    }
}

/* The same as a sentence: capital letter first, full stop. */
static void man_sentence(const char *text, FILE *stream)
{
    (void)fputc(toupper((unsigned char)text[0]), stream);
    man_text(text + 1, stream);
    (void)fputs(".\n", stream);
}

static void man_key(const config_key *key, FILE *stream)
{
    char allowed[512];

    config_value_allowed(key, allowed, sizeof allowed);
    (void)fprintf(stream, ".TP\n.B %s\n", key_part(key));
    man_sentence(key->meaning, stream);
    (void)fputs("Default: ", stream);
    man_text(key->initial, stream);
    (void)fputs(". Allowed: ", stream);
    man_text(allowed, stream);
    (void)fputs(".\n", stream);
}

static void man_section(const config_section *section, FILE *stream)
{
    (void)fprintf(stream, ".SH [%s]\n", section->name);
    man_sentence(section->meaning, stream);
    for (size_t i = 0; i < config_key_total; i++) {
        if (config_key_in(&config_keys[i], section->name)) {
            man_key(&config_keys[i], stream);
        }
    }
}

static const char man_head[] =
    ".\\\" Made from the table of keys in lib/config/keys.c; see DEVELOPERS.md.\n"
    ".TH MIRRORBAND 5 \"\" Mirrorband \"File formats\"\n"
    ".SH NAME\n"
    "mirrorband \\- config file of the Mirrorband programs\n"
    ".SH DESCRIPTION\n"
    "All programs read the same config file, given by\n"
    ".BR \\-\\-config .\n"
    "It is UTF\\-8 text of three kinds of line:\n"
    ".PP\n"
    ".EX\n"
    "[channel]              # a section\n"
    "offset = 137 Hz        # a key and its value\n"
    "# a comment, up to the end of the line\n"
    ".EE\n"
    ".PP\n"
    "A value is a quantity with its unit, a word of a list, or a switch (on, off).\n"
    "Units are Hz, kHz, MHz, GHz; s, ms, us, min, h; dB, dBc (over the power of both sidebands), dBFS (over "
    "full\n"
    "scale); Hz/s; deg; %; W, mW, kW. A blank between number and unit is allowed; the decimal sign is a "
    "point.\n"
    "A key left out has its default. A key may stand once in a file.\n"
    ".PP\n"
    ".BI \\-\\-set \" section.key=value\"\n"
    "on the command line sets one key over the file, and may be repeated:\n"
    ".PP\n"
    ".EX\n"
    "mb\\-channel \\-\\-config ridge.conf \\-\\-set channel.noise=\"15 dB\" ...\n"
    ".EE\n"
    ".PP\n"
    "All errors are told at once, each with file, line, column, key, what is allowed, and the nearest key "
    "for one\n"
    "that does not exist; the exit status is then 2.\n"
    ".B \\-\\-set help\n"
    "lists the keys of this page.\n";

static const char man_foot[] = ".SH SEE ALSO\n"
                               ".BR mb\\-transmit (1),\n"
                               ".BR mb\\-channel (1),\n"
                               ".BR mb\\-receive (1),\n"
                               ".BR mb\\-measure (1)\n";

mb_status mb_config_man_page(FILE *stream)
{
    (void)fputs(man_head, stream);
    for (size_t s = 0; s < config_section_total; s++) {
        if (config_section_has_keys(config_sections[s].name)) {
            man_section(&config_sections[s], stream);
        }
    }
    (void)fputs(
        ".SH OTHER SECTIONS\nThese names are kept for programs of later versions and have no keys yet:\n",
        stream);
    for (size_t s = 0, named = 0; s < config_section_total; s++) {
        if (!config_section_has_keys(config_sections[s].name)) {
            (void)fprintf(stream, "%s%s", named++ > 0 ? ", " : "", config_sections[s].name);
        }
    }
    (void)fputs(".\n", stream);
    (void)fputs(man_foot, stream);
    return written(stream);
}
