#include "path.h"
#include "sink.h"

#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

struct mb_table_writer {
    mb_sink *sink;
    size_t columns;
    locale_t plain; /* decimal point whatever the locale of the program */
};

static bool good_name(const char *name)
{
    static const char allowed[] = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789_";

    return name != NULL && name[0] != '\0' && name[strspn(name, allowed)] == '\0' && strlen(name) < 64;
}

static mb_status check_columns(const char *const *columns, size_t count)
{
    mb_status status = mb_check_range("column_count", (double)count, 1.0, MB_TABLE_COLUMNS_MAX, "");

    for (size_t i = 0; i < count && status == MB_OK; i++) {
        if (!good_name(columns[i])) {
            return mb_fail(MB_ERROR_ARGUMENT, "columns",
                           "column %zu must have a name of 1 to 63 letters, digits and _", i + 1);
        }
        for (size_t k = 0; k < i; k++) {
            if (strcmp(columns[i], columns[k]) == 0) {
                return mb_fail(MB_ERROR_ARGUMENT, "columns", "two columns are named %s; rename one",
                               columns[i]);
            }
        }
    }
    return status;
}

static mb_status write_remark(mb_sink *sink, const char *remark)
{
    mb_status status = MB_OK;

    while (remark != NULL && remark[0] != '\0' && status == MB_OK) {
        size_t length = strcspn(remark, "\n");
        status = mb_sink_write(sink, "# ", 2);
        status = status == MB_OK ? mb_sink_write(sink, remark, length) : status;
        status = status == MB_OK ? mb_sink_write(sink, "\n", 1) : status;
        remark += length + (remark[length] == '\n' ? 1 : 0);
    }
    return status;
}

static mb_status write_head(mb_table_writer *writer, const char *const *columns, const char *remark)
{
    mb_status status = write_remark(writer->sink, remark);

    for (size_t i = 0; i < writer->columns && status == MB_OK; i++) {
        status = mb_sink_print(writer->sink, "%s%s", columns[i], i + 1 < writer->columns ? "," : "\n");
    }
    return status;
}

mb_status mb_table_writer_create(const char *path, const char *const *columns, size_t column_count,
                                 const char *remark, mb_table_writer **out)
{
    mb_status status = mb_path_check(path);

    *out = NULL;
    if (status == MB_OK) {
        status = check_columns(columns, column_count);
    }
    if (status != MB_OK) {
        return status;
    }
    mb_table_writer *writer = mb_allocate(1, sizeof *writer);
    if (writer == NULL) {
        return mb_fail_memory("a table");
    }
    writer->columns = column_count;
    writer->plain = newlocale(LC_NUMERIC_MASK, "C", (locale_t)0);
    status = writer->plain != (locale_t)0 ? mb_sink_open(path, &writer->sink) : mb_fail_memory("a table");
    if (status == MB_OK) {
        status = write_head(writer, columns, remark);
    }
    if (status != MB_OK) {
        mb_table_writer_destroy(writer);
        return status;
    }
    *out = writer;
    return MB_OK;
}

/* Fewest digits that read back as the same double. */
static int print_number(double value, char *out, size_t size)
{
    int length = 0;

    if (isnan(value)) {
        return snprintf(out, size, "nan");
    }
    for (int digits = 15; digits <= 17; digits++) {
        length = snprintf(out, size, "%.*g", digits, value);
        if (strtod(out, NULL) == value) {
            break;
        }
    }
    return length;
}

mb_status mb_table_writer_row(mb_table_writer *writer, const double *values)
{
    char line[32 * MB_TABLE_COLUMNS_MAX];
    size_t length = 0;
    locale_t before = uselocale(writer->plain);

    for (size_t i = 0; i < writer->columns; i++) {
        int made = print_number(values[i], line + length, 31);
        length += made > 0 ? (size_t)made : 0;
        line[length++] = i + 1 < writer->columns ? ',' : '\n';
    }
    (void)uselocale(before);
    mb_status status = mb_sink_write(writer->sink, line, length);
    return status == MB_OK && mb_sink_is_direct(writer->sink) ? mb_sink_flush(writer->sink) : status;
}

mb_status mb_table_writer_commit(mb_table_writer *writer)
{
    return mb_sink_commit(writer->sink);
}

mb_status mb_table_writer_keep_partial(mb_table_writer *writer)
{
    mb_status status = write_remark(writer->sink, "interrupted here");

    return status == MB_OK ? mb_sink_commit(writer->sink) : status;
}

void mb_table_writer_abandon(mb_table_writer *writer)
{
    if (writer != NULL) {
        mb_sink_abandon(writer->sink);
    }
}

void mb_table_writer_destroy(mb_table_writer *writer)
{
    if (writer == NULL) {
        return;
    }
    mb_sink_destroy(writer->sink);
    if (writer->plain != (locale_t)0) {
        freelocale(writer->plain);
    }
    mb_release(writer);
}
