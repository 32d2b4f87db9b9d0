/* Damaged metadata, tables and headers are refused or read, never more: seeded corruption of valid ones. */
#include "samples.h"
#include "sigmf.h"

enum { ROUNDS = 4000 };

static const char META[] =
    "{\"global\":{\"core:datatype\":\"ci16_le\",\"core:version\":\"1.2.5\",\"core:sample_rate\":48000.5,"
    "\"core:description\":\"a \\u00b1 b\",\"core:num_channels\":1},\"captures\":[{\"core:sample_start\":0,"
    "\"core:frequency\":7285000}],\"annotations\":[{\"core:sample_start\":1,\"core:sample_count\":2,"
    "\"core:freq_lower_edge\":1,\"core:freq_upper_edge\":2,\"core:label\":\"x\",\"signal:detail\":{\"type\":"
    "\"analog\",\"mod_class\":\"dsb\",\"carrier_variant\":\"suppressed_carrier\"}}]}";
static const char TABLE[] = "# truth\ntime_s,phase_rad,gain_db\n0,0.25,-3\n0.01,1e-3,nan\n0.02,-0.5,inf\n";

static uint64_t seed(void)
{
    const char *given = getenv("MB_TEST_SEED");

    return given != NULL ? strtoull(given, NULL, 10) : 1;
}

/* Changes, removes, doubles or moves a few bytes; returns the new length. */
static size_t corrupt(mb_random *random, char *bytes, size_t length, size_t room)
{
    size_t changes = 1 + (size_t)(mb_random_bits(random) % 4);

    for (size_t i = 0; i < changes && length > 1; i++) {
        size_t at = (size_t)(mb_random_bits(random) % length);
        size_t span = 1 + (size_t)(mb_random_bits(random) % 16);
        span = at + span > length ? length - at : span;
        switch (mb_random_bits(random) % 4) {
        case 0:
            bytes[at] = (char)mb_random_bits(random);
            break;
        case 1:
            memmove(bytes + at, bytes + at + span, length - at - span);
            length -= span;
            break;
        case 2:
            if (length + span <= room) {
                memmove(bytes + at + span, bytes + at, length - at);
                length += span;
            }
            break;
        default:
            bytes[at] = "0123456789-+eE.{}[],:\"\n#\\"[mb_random_bits(random) % 24];
            break;
        }
    }
    return length;
}

static void must_say_why(mb_status status)
{
    if (status != MB_OK) {
        assert_true(status == MB_ERROR_FORMAT || status == MB_ERROR_UNSUPPORTED ||
                    status == MB_ERROR_ARGUMENT);
        assert_true(strlen(mb_last_fault()->text) > 10);
    }
}

static void damaged_metadata_is_refused_or_read(void **state)
{
    char text[2 * sizeof META];
    mb_random random;
    int refused = 0;

    (void)state;
    print_message("seed %llu\n", (unsigned long long)seed());
    mb_random_seed(&random, seed(), 1);
    for (int i = 0; i < ROUNDS; i++) {
        mb_sigmf meta;
        memcpy(text, META, sizeof META);
        size_t length = corrupt(&random, text, sizeof META - 1, sizeof text);
        mb_status status = mb_sigmf_parse(text, length, "a.sigmf-meta", &meta);
        must_say_why(status);
        refused += status != MB_OK ? 1 : 0;
        if (status == MB_OK) {
            must_say_why(mb_sigmf_check_length(&meta, 3, "a.sigmf-meta", "a.sigmf-data"));
        }
        mb_sigmf_clear(&meta);
    }
    assert_in_range(refused, ROUNDS / 4, ROUNDS - 1);
}

static void damaged_tables_are_refused_or_read(void **state)
{
    const char *path = path_of("fuzz", "a.csv");
    char text[2 * sizeof TABLE];
    mb_random random;

    (void)state;
    mb_random_seed(&random, seed(), 2);
    for (int i = 0; i < ROUNDS / 4; i++) {
        mb_table_reader *reader = NULL;
        double row[MB_TABLE_COLUMNS_MAX];
        bool more = true;
        memcpy(text, TABLE, sizeof TABLE);
        put_file(path, text, corrupt(&random, text, sizeof TABLE - 1, sizeof text));
        mb_status status = mb_table_reader_open(path, NULL, 0, &reader);
        for (int rows = 0; status == MB_OK && more; rows++) {
            assert_true(rows < 100);
            status = mb_table_reader_row(reader, row, &more);
        }
        must_say_why(status);
        mb_table_reader_close(reader);
    }
}

static void damaged_sound_headers_are_refused_or_read(void **state)
{
    const char *whole = path_of("fuzz", "whole.rf64"), *path = path_of("fuzz", "a.wav");
    mb_iq_writer_settings settings = {.format = MB_IQ_CI16, .rate_hz = 48000.0};
    mb_iq_writer *writer = NULL;
    mb_cf32 *samples = make_samples(64, 1), block[64];
    char good[512], bytes[1024];
    mb_random random;

    (void)state;
    assert_ok(mb_iq_writer_create(whole, &settings, &writer));
    assert_ok(mb_iq_writer_write(writer, samples, 64));
    assert_ok(mb_iq_writer_commit(writer));
    mb_iq_writer_destroy(writer);
    size_t length = get_file(whole, good, sizeof good);
    mb_random_seed(&random, seed(), 3);
    for (int i = 0; i < ROUNDS / 4; i++) {
        mb_iq_reader *reader = NULL;
        size_t got = 1;
        memcpy(bytes, good, length);
        put_file(path, bytes, corrupt(&random, bytes, length, sizeof bytes));
        mb_status status = mb_iq_reader_open(path, NULL, &reader);
        for (int blocks = 0; status == MB_OK && got > 0; blocks++) {
            assert_true(blocks < 100);
            status = mb_iq_read(reader, block, 64, &got);
        }
        must_say_why(status);
        mb_iq_reader_close(reader);
    }
    mb_release(samples);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(damaged_metadata_is_refused_or_read),
        cmocka_unit_test(damaged_tables_are_refused_or_read),
        cmocka_unit_test(damaged_sound_headers_are_refused_or_read),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
