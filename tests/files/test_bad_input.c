/*
 * Every input of the folder bad/ is refused with the status and the very sentence of bad/expected.txt. Its
 * lines: what it is read as (iq, raw: iq with a rate, verify: iq held against its hash, audio, table), the
 * file, the status, the sentence with {} for the path of the file without its ending.
 */
#include "samples.h"

static mb_status read_iq(const char *path, const char *how)
{
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_cf32 block[64];
    size_t got = 0;

    options.rate_hz = strcmp(how, "raw") == 0 ? 8000.0 : 0.0;
    options.verify = strcmp(how, "verify") == 0;
    mb_status status = mb_iq_reader_open(path, &options, &reader);
    while (status == MB_OK && (status = mb_iq_read(reader, block, 64, &got)) == MB_OK && got > 0) {
    }
    mb_iq_reader_close(reader);
    return status;
}

static mb_status read_audio(const char *path)
{
    mb_audio_reader *reader = NULL;
    float block[64];
    size_t got = 0;
    mb_status status = mb_audio_reader_open(path, NULL, &reader);

    while (status == MB_OK && (status = mb_audio_read(reader, block, 64, &got)) == MB_OK && got > 0) {
    }
    mb_audio_reader_close(reader);
    return status;
}

static mb_status read_table(const char *path)
{
    const char *wanted[] = {"time_s", "offset_hz"};
    mb_table_reader *reader = NULL;
    double row[2];
    bool more = true;
    mb_status status = mb_table_reader_open(path, wanted, 2, &reader);

    while (status == MB_OK && more) {
        status = mb_table_reader_row(reader, row, &more);
    }
    mb_table_reader_close(reader);
    return status;
}

static mb_status read_as(const char *how, const char *path)
{
    if (strcmp(how, "audio") == 0) {
        return read_audio(path);
    }
    return strcmp(how, "table") == 0 ? read_table(path) : read_iq(path, how);
}

/* The sentence with the path of the file put in for each {}. */
static void fill_in(const char *sentence, const char *stem, char *out, size_t size)
{
    size_t used = 0;

    for (const char *at = sentence; *at != '\0' && used + 1 < size; at++) {
        if (at[0] == '{' && at[1] == '}') {
            used += (size_t)snprintf(out + used, size - used, "%s", stem);
            at++;
        } else {
            out[used++] = *at;
        }
    }
    out[used < size ? used : size - 1] = '\0';
}

static void every_bad_input_is_told_in_its_sentence(void **state)
{
    char line[2048], how[16], name[64], wanted[2048], path[512], stem[512];
    int status = 0, at = 0, checked = 0, wrong = 0;
    FILE *list = fopen(MB_TEST_SOURCE_DIR "/tests/files/bad/expected.txt", "r");

    (void)state;
    assert_non_null(list);
    while (fgets(line, sizeof line, list) != NULL) {
        line[strcspn(line, "\n")] = '\0';
        if (line[0] == '#' || line[0] == '\0') {
            continue;
        }
        assert_int_equal(sscanf(line, "%15s %63s %d %n", how, name, &status, &at), 3);
        (void)snprintf(path, sizeof path, "%s/tests/files/bad/%s", MB_TEST_SOURCE_DIR, name);
        (void)snprintf(stem, sizeof stem, "%.*s", (int)(strrchr(path, '.') - path), path);
        fill_in(line + at, stem, wanted, sizeof wanted);
        mb_status found = read_as(how, path);
        if ((int)found != status || strcmp(mb_last_fault()->text, wanted) != 0) {
            print_error("%s as %s: status %d\n  %s\nexpected %d\n  %s\n", name, how, (int)found,
                        mb_last_fault()->text, status, wanted);
            wrong++;
        }
        checked++;
    }
    (void)fclose(list);
    assert_int_equal(wrong, 0);
    assert_at_least(checked, 60);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(every_bad_input_is_told_in_its_sentence)};

    return cmocka_run_group_tests(tests, NULL, NULL);
}
