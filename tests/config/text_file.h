/* text_file.h - whole files as text, for the tests of the config room. */
#ifndef TESTS_CONFIG_TEXT_FILE_H
#define TESTS_CONFIG_TEXT_FILE_H

#include "check.h"

/* The file with a zero behind it, to be freed; the test fails if it cannot be read. */
static inline char *text_file_read(const char *path, size_t *length)
{
    FILE *file = fopen(path, "rb");
    char *text = calloc(1, 1 << 20);

    if (file == NULL || text == NULL) {
        fail_msg("cannot read %s", path);
        abort();
    }
    *length = fread(text, 1, (1 << 20) - 1, file);
    (void)fclose(file);
    return text;
}

/* What a function wrote to a stream, to be freed. */
static inline char *text_written(void (*write)(FILE *stream, const void *user), const void *user)
{
    char *text = NULL;
    size_t length = 0;
    FILE *stream = open_memstream(&text, &length);

    assert_non_null(stream);
    write(stream, user);
    assert_int_equal(fclose(stream), 0);
    return text;
}

#endif
