#include "path.h"
#include "source.h"

#include <ctype.h>
#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { LINE_BYTES = 8192, NAME_BYTES = 64 };

struct mb_table_reader {
    mb_source *source;
    uint64_t line_number;           /* of the line in `line`, from 1 */
    size_t columns;                 /* in the file */
    size_t wanted;                  /* handed out */
    int slot[MB_TABLE_COLUMNS_MAX]; /* for each column of the file: where its value goes, or -1 */
    locale_t plain;                 /* decimal point whatever the locale of the program */
    char names[MB_TABLE_COLUMNS_MAX][NAME_BYTES];
    char line[LINE_BYTES];
};

static mb_status bad_line(const mb_table_reader *reader, const char *what)
{
    const char *name = mb_source_name(reader->source);

    return mb_fail(MB_ERROR_FORMAT, name, "%s:%llu: %s; correct the line or make the table again", name,
                   (unsigned long long)reader->line_number, what);
}

/* One line without its end; *more is false at the end of the file. */
static mb_status take_line(mb_table_reader *reader, bool *more)
{
    size_t length = 0;
    mb_status status = MB_OK;
    int byte = 0;

    reader->line_number++;
    while ((byte = mb_source_byte(reader->source, &status)) >= 0 && byte != '\n') {
        if (length + 1 == LINE_BYTES) {
            return bad_line(reader, "the line is longer than 8191 bytes");
        }
        if (byte == '\0') {
            return bad_line(reader, "a zero byte stands in the line: this is no text");
        }
        reader->line[length++] = (char)byte;
    }
    while (length > 0 && isspace((unsigned char)reader->line[length - 1])) {
        length--;
    }
    reader->line[length] = '\0';
    *more = byte >= 0 || length > 0;
    return status;
}

/* The next line that is neither empty nor a remark. */
static mb_status take_content(mb_table_reader *reader, bool *more)
{
    mb_status status = MB_OK;

    do {
        status = take_line(reader, more);
    } while (status == MB_OK && *more && (reader->line[0] == '\0' || reader->line[0] == '#'));
    return status;
}

/* Cuts the next field out of *at, without spaces around it; *at becomes NULL behind the last one. */
static char *next_field(char **at)
{
    char *field = *at, *comma = strchr(*at, ',');

    *at = comma != NULL ? comma + 1 : NULL;
    if (comma != NULL) {
        *comma = '\0';
    }
    while (isspace((unsigned char)*field)) {
        field++;
    }
    size_t length = strlen(field);
    while (length > 0 && isspace((unsigned char)field[length - 1])) {
        field[--length] = '\0';
    }
    return field;
}

static mb_status add_name(mb_table_reader *reader, const char *field)
{
    char what[160];

    if (reader->columns == MB_TABLE_COLUMNS_MAX) {
        (void)snprintf(what, sizeof what, "there are more than %d columns", MB_TABLE_COLUMNS_MAX);
        return bad_line(reader, what);
    }
    if (!isalpha((unsigned char)field[0]) || strlen(field) >= NAME_BYTES) {
        (void)snprintf(what, sizeof what,
                       "\"%.40s\" is no name of a column; the first line must name the columns", field);
        return bad_line(reader, what);
    }
    if (mb_table_reader_has(reader, field)) {
        (void)snprintf(what, sizeof what, "two columns are named \"%s\"", field);
        return bad_line(reader, what);
    }
    mb_text_copy(reader->names[reader->columns++], NAME_BYTES, field);
    return MB_OK;
}

static mb_status read_names(mb_table_reader *reader)
{
    static const char mark[] = "\xef\xbb\xbf"; /* some spreadsheets begin UTF-8 like this */
    bool more = false;
    mb_status status = take_content(reader, &more);

    if (status != MB_OK) {
        return status;
    }
    if (!more) {
        const char *name = mb_source_name(reader->source);
        return mb_fail(MB_ERROR_FORMAT, name, "%s has no line that names columns; make the table again",
                       name);
    }
    char *at = strncmp(reader->line, mark, 3) == 0 ? reader->line + 3 : reader->line;
    while (at != NULL && status == MB_OK) {
        status = add_name(reader, next_field(&at));
    }
    return status;
}

static int find(const mb_table_reader *reader, const char *name)
{
    for (size_t i = 0; i < reader->columns; i++) {
        if (strcmp(reader->names[i], name) == 0) {
            return (int)i;
        }
    }
    return -1;
}

static mb_status missing_column(const mb_table_reader *reader, const char *wanted)
{
    const char *name = mb_source_name(reader->source);
    char there[512];
    size_t used = 0;

    there[0] = '\0';
    for (size_t i = 0; i < reader->columns && used < sizeof there; i++) {
        int made = snprintf(there + used, sizeof there - used, " %s", reader->names[i]);
        used += made > 0 ? (size_t)made : 0;
    }
    return mb_fail(MB_ERROR_FORMAT, name, "%s has no column %s; give a table that has it, this one has%s",
                   name, wanted, there);
}

static mb_status choose_columns(mb_table_reader *reader, const char *const *columns, size_t count)
{
    reader->wanted = columns != NULL ? count : reader->columns;
    for (size_t i = 0; i < reader->columns; i++) {
        reader->slot[i] = columns != NULL ? -1 : (int)i;
    }
    for (size_t i = 0; columns != NULL && i < count; i++) {
        int index = find(reader, columns[i]);
        if (index < 0) {
            return missing_column(reader, columns[i]);
        }
        if (reader->slot[index] >= 0) {
            return mb_fail(MB_ERROR_ARGUMENT, "columns", "column %s is asked for twice", columns[i]);
        }
        reader->slot[index] = (int)i;
    }
    return MB_OK;
}

mb_status mb_table_reader_open(const char *path, const char *const *columns, size_t column_count,
                               mb_table_reader **out)
{
    mb_status status = mb_path_check(path);

    *out = NULL;
    if (status != MB_OK) {
        return status;
    }
    mb_table_reader *reader = mb_allocate(1, sizeof *reader);
    if (reader == NULL) {
        return mb_fail_memory("a table");
    }
    reader->plain = newlocale(LC_NUMERIC_MASK, "C", (locale_t)0);
    status = reader->plain != (locale_t)0 ? mb_source_open(path, false, &reader->source)
                                          : mb_fail_memory("a table");
    if (status == MB_OK) {
        status = read_names(reader);
    }
    if (status == MB_OK) {
        status = choose_columns(reader, columns, column_count);
    }
    if (status != MB_OK) {
        mb_table_reader_close(reader);
        return status;
    }
    *out = reader;
    return MB_OK;
}

size_t mb_table_reader_column_count(const mb_table_reader *reader)
{
    return reader->columns;
}

const char *mb_table_reader_column(const mb_table_reader *reader, size_t index)
{
    return index < reader->columns ? reader->names[index] : NULL;
}

bool mb_table_reader_has(const mb_table_reader *reader, const char *name)
{
    return find(reader, name) >= 0;
}

static mb_status read_number(const mb_table_reader *reader, const char *field, size_t column, double *value)
{
    char *end = NULL;
    bool hexadecimal = strpbrk(field, "xX") != NULL;

    *value = NAN;
    if (field[0] == '\0') {
        return MB_OK;
    }
    *value = strtod(field, &end);
    if (end == field || *end != '\0' || hexadecimal) {
        char what[200];
        (void)snprintf(what, sizeof what, "\"%.40s\" in column %s is no number", field,
                       reader->names[column]);
        return bad_line(reader, what);
    }
    return MB_OK;
}

static mb_status parse_row(mb_table_reader *reader, double *values)
{
    char *at = reader->line;
    size_t column = 0;
    mb_status status = MB_OK;

    for (; at != NULL && status == MB_OK; column++) {
        const char *field = next_field(&at);
        if (column < reader->columns && reader->slot[column] >= 0) {
            status = read_number(reader, field, column, &values[reader->slot[column]]);
        }
    }
    if (status == MB_OK && column != reader->columns) {
        char what[120];
        (void)snprintf(what, sizeof what, "%zu field%s stand%s where %zu columns are named", column,
                       column == 1 ? "" : "s", column == 1 ? "s" : "", reader->columns);
        return bad_line(reader, what);
    }
    return status;
}

mb_status mb_table_reader_row(mb_table_reader *reader, double *values, bool *more)
{
    mb_status status = take_content(reader, more);

    if (status != MB_OK || !*more) {
        return status;
    }
    locale_t before = uselocale(reader->plain);
    status = parse_row(reader, values);
    (void)uselocale(before);
    return status;
}

void mb_table_reader_close(mb_table_reader *reader)
{
    if (reader == NULL) {
        return;
    }
    mb_source_close(reader->source);
    if (reader->plain != (locale_t)0) {
        freelocale(reader->plain);
    }
    mb_release(reader);
}
