/* Files and --set: from text to assignments, every mistake with its place. */
#include "object.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { FILE_BYTES_MAX = 1 << 20 };

/* A text being read, line by line. */
typedef struct reader {
    mb_config *config;
    config_place place;            /* of the line at hand */
    const char *line;              /* its first byte */
    char section[CONFIG_NAME_MAX]; /* "" before the first section line */
    bool skipping;                 /* in a section that is wrong: its keys say nothing more */
    size_t *set_in_line;           /* for each key the line that set it, 0 = none */
} reader;

/* Bytes of the UTF-8 character at text (RFC 3629), 0 if it is none. */
static size_t utf8_length(const unsigned char *text, size_t left)
{
    static const unsigned char least_second[] = {0x80, 0xa0, 0x90};
    size_t length = text[0] < 0x80 ? 1 : text[0] < 0xc2 ? 0 : text[0] < 0xe0 ? 2 : text[0] < 0xf0 ? 3 : 4;

    if (length < 2) {
        return length;
    }
    if (length > left || text[0] > 0xf4) {
        return 0;
    }
    for (size_t i = 1; i < length; i++) {
        if (text[i] < 0x80 || text[i] > 0xbf) {
            return 0;
        }
    }
    bool overlong =
        (text[0] == 0xe0 && text[1] < least_second[1]) || (text[0] == 0xf0 && text[1] < least_second[2]);
    bool surrogate = text[0] == 0xed && text[1] > 0x9f;
    bool beyond = text[0] == 0xf4 && text[1] > 0x8f;
    return overlong || surrogate || beyond ? 0 : length;
}

/* Column of a byte of the line, in characters from 1. */
static size_t column_of(const reader *r, const char *at)
{
    size_t column = 1;

    for (const char *byte = r->line; byte < at; byte++) {
        column += ((unsigned char)*byte & 0xc0) != 0x80 ? 1 : 0;
    }
    return column;
}

static config_place place_of(const reader *r, const char *at)
{
    config_place place = r->place;

    place.column = column_of(r, at);
    return place;
}

/* Whether the line is plain text; the first byte that is not is an error. */
static bool check_bytes(reader *r, size_t length)
{
    for (size_t i = 0; i < length;) {
        const unsigned char *at = (const unsigned char *)r->line + i;
        size_t bytes = utf8_length(at, length - i);
        if (bytes == 0) {
            config_errors_add(&r->config->errors, place_of(r, r->line + i),
                              "byte 0x%02x is not UTF-8 text; save the file as UTF-8", *at);
            return false;
        }
        if ((*at < 0x20 && *at != '\t') || *at == 0x7f) {
            config_errors_add(&r->config->errors, place_of(r, r->line + i),
                              "control character 0x%02x; a config file is plain text", *at);
            return false;
        }
        i += bytes;
    }
    return true;
}

static void wrong_section(reader *r, const char *name)
{
    char all[256] = "";
    const char *nearest = config_section_nearest(name);

    for (size_t i = 0; i < config_section_total; i++) {
        config_append(all, sizeof all, "%s%s", i > 0 ? ", " : "", config_sections[i].name);
    }
    config_errors_add(&r->config->errors, r->place, "[%.100s]: there is no such section; allowed: %s%s%s",
                      name, all, nearest != NULL ? "; nearest: " : "", nearest != NULL ? nearest : "");
}

/* A line that begins with '[': text is the line without comment and outer blanks. */
static void read_section(reader *r, const char *text, size_t length)
{
    char name[CONFIG_NAME_MAX] = "";

    r->place.column = column_of(r, text);
    r->section[0] = '\0';
    r->skipping = true;
    if (text[length - 1] != ']') {
        config_errors_add(&r->config->errors, r->place, "a section line must be [section] and nothing else");
        return;
    }
    text++;
    length -= 2;
    config_trim(&text, &length);
    if (length >= sizeof name) {
        length = sizeof name - 1;
    }
    memcpy(name, text, length);
    if (!config_section_known(name)) {
        wrong_section(r, name);
        return;
    }
    memcpy(r->section, name, sizeof name);
    r->skipping = false;
}

/* Whether the bytes are a name of letters, digits and '_'. */
static bool is_name(const char *text, size_t length)
{
    for (size_t i = 0; i < length; i++) {
        char c = text[i];
        bool letter = (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z');
        if (!letter && !(c >= '0' && c <= '9') && c != '_') {
            return false;
        }
    }
    return length > 0 && length < CONFIG_NAME_MAX / 2;
}

/* Whether the key may be set in this line; a second time in one file is an error. */
static bool first_time(reader *r, config_place place, const char *name)
{
    int index = config_key_find(name);

    if (index < 0 || r->set_in_line[index] == 0) {
        if (index >= 0) {
            r->set_in_line[index] = place.line;
        }
        return true;
    }
    config_errors_add(&r->config->errors, place, "%s: set a second time, first in line %zu; keep one of them",
                      name, r->set_in_line[index]);
    return false;
}

static void assign_line(reader *r, const char *key, size_t key_length, const char *text, size_t length)
{
    char name[CONFIG_NAME_MAX], value[CONFIG_VALUE_MAX + 1] = "";
    config_place place = place_of(r, key);

    (void)snprintf(name, sizeof name, "%.31s.%.*s", r->section, (int)key_length, key);
    config_trim_value(&text, &length);
    memcpy(value, text, length < sizeof value ? length : sizeof value - 1);
    if (first_time(r, place, name)) {
        config_assign(r->config, place, column_of(r, text), name, value);
    }
}

/* Any other line: "key = value"; text is the line without comment and outer blanks. */
static void read_key(reader *r, const char *text, size_t length)
{
    config_errors *errors = &r->config->errors;
    config_place place = place_of(r, text);
    const char *equals = memchr(text, '=', length);

    if (equals == NULL) {
        config_errors_add(errors, place, "\"%.*s\" is neither [section] nor key = value",
                          (int)(length < 60 ? length : 60), text);
        return;
    }
    size_t key_length = (size_t)(equals - text);
    const char *key = text;
    config_trim(&key, &key_length);
    if (!is_name(key, key_length)) {
        config_errors_add(errors, place,
                          "\"%.*s\" is not a key: letters, digits and _ only, its section in a line before",
                          (int)(key_length < 60 ? key_length : 60), key);
    } else if (r->skipping) {
        return;
    } else if (r->section[0] == '\0') {
        config_errors_add(errors, place,
                          "%.*s: a key before any section; put a line such as [channel] before it",
                          (int)key_length, key);
    } else {
        assign_line(r, key, key_length, equals + 1, length - (size_t)(equals + 1 - text));
    }
}

static void read_line(reader *r, size_t length)
{
    const char *text = r->line;

    if (length > 0 && text[length - 1] == '\r') {
        length--;
    }
    if (!check_bytes(r, length)) {
        return;
    }
    const char *comment = memchr(text, '#', length);
    length = comment == NULL ? length : (size_t)(comment - text);
    config_trim(&text, &length);
    if (length == 0) {
        return;
    }
    if (text[0] == '[') {
        read_section(r, text, length);
    } else {
        read_key(r, text, length);
    }
}

mb_status mb_config_read_text(mb_config *config, const char *source, const char *text, size_t length)
{
    size_t found_before = config->errors.found;
    size_t *set_in_line = mb_allocate(config_key_total, sizeof *set_in_line);
    reader r = {.config = config, .place = {.source = source}, .set_in_line = set_in_line};

    if (set_in_line == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory to read the config");
    }
    if (length >= 3 && memcmp(text, "\xef\xbb\xbf", 3) == 0) { /* byte order mark */
        text += 3;
        length -= 3;
    }
    while (length > 0) {
        const char *end = memchr(text, '\n', length);
        size_t line_length = end == NULL ? length : (size_t)(end - text);
        r.line = text;
        r.place.line++;
        r.place.column = 1;
        read_line(&r, line_length);
        size_t taken = end == NULL ? length : line_length + 1;
        text += taken;
        length -= taken;
    }
    mb_release(set_in_line);
    return config_outcome(config, found_before);
}

static mb_status cannot_read(const char *path)
{
    return mb_fail(MB_ERROR_FILE, path, "config file %s cannot be read: %s", path, strerror(errno));
}

static mb_status read_whole(const char *path, FILE *file, char *text, size_t *length)
{
    errno = 0;
    *length = fread(text, 1, FILE_BYTES_MAX + 1, file);
    if (ferror(file)) {
        return cannot_read(path);
    }
    if (*length > FILE_BYTES_MAX) {
        return mb_fail(MB_ERROR_FILE, path,
                       "config file %s is larger than 1 MiB; is it really a config file?", path);
    }
    return MB_OK;
}

mb_status mb_config_read_file(mb_config *config, const char *path)
{
    size_t length = 0;
    FILE *file = fopen(path, "rb");

    if (file == NULL) {
        return cannot_read(path);
    }
    char *text = mb_allocate(FILE_BYTES_MAX + 1, 1);
    mb_status status = text == NULL ? mb_fail(MB_ERROR_MEMORY, "", "no memory to read config file %s", path)
                                    : read_whole(path, file, text, &length);
    (void)fclose(file);
    if (status == MB_OK) {
        status = mb_config_read_text(config, path, text, length);
    }
    mb_release(text);
    return status;
}
