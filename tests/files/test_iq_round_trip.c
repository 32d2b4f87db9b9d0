/* What is written is read back: exactly where the format holds it, else to half a step; from files and in
 * cuts. */
#include "samples.h"

enum { COUNT = 20011 };

static const char *path_in(const char *name)
{
    return path_of("iq_round_trip", name);
}

static void write_all(const char *path, mb_iq_format format, const mb_cf32 *samples, size_t n)
{
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_writer *writer = NULL;

    settings.format = format;
    settings.rate_hz = 48000.0;
    assert_ok(mb_iq_writer_create(path, &settings, &writer));
    for (size_t i = 0; i < n; i += 1000) {
        assert_ok(mb_iq_writer_write(writer, samples + i, n - i < 1000 ? n - i : 1000));
    }
    assert_false(is_there(path)); /* appears only when complete */
    assert_ok(mb_iq_writer_commit(writer));
    assert_true(is_there(path));
    assert_int_equal(mb_iq_writer_state_of(writer).samples, n);
    mb_iq_writer_destroy(writer);
}

/* Largest difference between a file, read in blocks of the given size, and samples. */
static double read_error(const char *path, const mb_cf32 *samples, size_t n, size_t block)
{
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_cf32 *got_samples = mb_allocate(block, sizeof *got_samples);
    double worst = 0.0;
    size_t got = 0, done = 0;

    options.rate_hz = 48000.0;
    assert_ok(mb_iq_reader_open(path, &options, &reader));
    assert_int_equal(mb_iq_reader_info(reader).samples, n);
    assert_near(mb_iq_reader_info(reader).rate_hz, 48000.0, 0.0);
    do {
        assert_ok(mb_iq_read(reader, got_samples, block, &got));
        for (size_t i = 0; i < got; i++) {
            worst = fmax(worst, fabs((double)got_samples[i].re - (double)samples[done + i].re));
            worst = fmax(worst, fabs((double)got_samples[i].im - (double)samples[done + i].im));
        }
        done += got;
    } while (got > 0);
    assert_int_equal(done, n);
    mb_iq_reader_close(reader);
    mb_release(got_samples);
    return worst;
}

static void every_container_gives_back_its_samples(void **state)
{
    static const struct {
        const char *name;
        mb_iq_format format;
        double tolerance; /* half a step of the format: rounding to nearest cannot be further off */
    } cases[] = {
        {"a.cf32", MB_IQ_BY_ENDING, 0.0},
        {"a.ci16", MB_IQ_BY_ENDING, 0.5 / 32768.0},
        {"a.ci8", MB_IQ_BY_ENDING, 0.5 / 128.0},
        {"a.cu8", MB_IQ_BY_ENDING, 0.5 / 128.0},
        {"b.wav", MB_IQ_BY_ENDING, 0.0},
        {"c.wav", MB_IQ_CI16, 0.5 / 32768.0},
        {"b.rf64", MB_IQ_CF32, 0.0},
        {"c.rf64", MB_IQ_CI16, 0.5 / 32768.0},
        {"b.sigmf-meta", MB_IQ_BY_ENDING, 0.0},
        {"c.sigmf-meta", MB_IQ_CI16, 0.5 / 32768.0},
        {"d.sigmf-meta", MB_IQ_CI8, 0.5 / 128.0},
        {"e.sigmf-meta", MB_IQ_CU8, 0.5 / 128.0},
    };
    mb_cf32 *samples = make_samples(COUNT, 1);

    (void)state;
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        const char *path = path_in(cases[i].name);
        (void)remove(path);
        write_all(path, cases[i].format, samples, COUNT);
        assert_at_most(read_error(path, samples, COUNT, 1), cases[i].tolerance);
        assert_at_most(read_error(path, samples, COUNT, 997), cases[i].tolerance);
        assert_at_most(read_error(path, samples, COUNT, COUNT + 5), cases[i].tolerance);
    }
    mb_release(samples);
}

static void integers_are_the_nearest_and_clamped_and_counted(void **state)
{
    /* FACTS: ci16 = nearest of x * 32768 within -32768..32767; cu8 zero 127.5, so +-0.5 step -> 127 and 128
     */
    const mb_cf32 samples[] = {{0.5f, -0.5f}, {1.0f, -1.0f}, {1.5f, -1.5f}, {0.99999f, 0.0f}, {NAN, 0.25f}};
    const int16_t expected16[] = {16384, -16384, 32767, -32768, 32767, -32768, 32767, 0, 0, 0};
    const uint8_t expected8[] = {192, 64, 255, 0, 255, 0, 255, 128, 128, 128};
    int16_t stored16[16];
    uint8_t stored8[32];
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_writer *writer = NULL;

    (void)state;
    settings.rate_hz = 1e6;
    assert_ok(mb_iq_writer_create(path_in("edge.ci16"), &settings, &writer));
    assert_ok(mb_iq_writer_write(writer, samples, 5));
    assert_int_equal(mb_iq_writer_state_of(writer).clipped, 3); /* 1.0 and 0.99999 are nearest to 32768 */
    assert_int_equal(mb_iq_writer_state_of(writer).non_finite, 1);
    assert_ok(mb_iq_writer_commit(writer));
    mb_iq_writer_destroy(writer);
    assert_int_equal(get_file(path_in("edge.ci16"), stored16, sizeof stored16), sizeof expected16);
    assert_memory_equal(stored16, expected16, sizeof expected16);

    assert_ok(mb_iq_writer_create(path_in("edge.cu8"), &settings, &writer));
    assert_ok(mb_iq_writer_write(writer, samples, 5));
    assert_ok(mb_iq_writer_commit(writer));
    mb_iq_writer_destroy(writer);
    assert_int_equal(get_file(path_in("edge.cu8"), stored8, sizeof stored8), sizeof expected8);
    assert_memory_equal(stored8, expected8, sizeof expected8);
}

static void a_reader_counts_full_scale_and_non_finite_and_rewinds(void **state)
{
    const int16_t stored[] = {32767, 0, 5, -32768, 100, -100};
    const float bad[] = {NAN, 0.0f, 0.5f, -0.75f, 1.0f, INFINITY};
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_cf32 out[4];
    mb_ci16 raw[4];
    size_t got = 0;

    (void)state;
    options.rate_hz = 48000.0;
    put_file(path_in("full.ci16"), stored, sizeof stored);
    assert_ok(mb_iq_reader_open(path_in("full.ci16"), &options, &reader));
    for (int pass = 0; pass < 2; pass++) {
        assert_ok(mb_iq_read(reader, out, 4, &got));
        assert_int_equal(got, 3);
        assert_int_equal(mb_iq_reader_state_of(reader).at_full_scale, 2);
        assert_near(mb_iq_reader_state_of(reader).peak, 1.0, 0.0);
        assert_ok(mb_iq_rewind(reader));
    }
    assert_ok(mb_iq_read_ci16(reader, raw, 4, &got));
    assert_memory_equal(raw, stored, sizeof stored);
    assert_int_equal(mb_iq_reader_state_of(reader).at_full_scale, 2);
    mb_iq_reader_close(reader);
    put_file(path_in("bad.cf32"), bad, sizeof bad);
    assert_ok(mb_iq_reader_open(path_in("bad.cf32"), &options, &reader));
    assert_ok(mb_iq_read(reader, out, 4, &got));
    assert_int_equal(mb_iq_reader_state_of(reader).non_finite, 2);
    assert_near(mb_iq_reader_state_of(reader).peak, 0.75, 0.0);
    assert_true(out[0].im == 0.0f && out[1].im == -0.75f && out[2].re == 0.0f);
    assert_fault(mb_iq_read_ci16(reader, raw, 1, &got), MB_ERROR_UNSUPPORTED, "format");
    mb_iq_reader_close(reader);
    mb_iq_reader_close(NULL);
}

static void one_pair_of_several_can_be_chosen(void **state)
{
    static const char meta[] =
        "{\"global\":{\"core:datatype\":\"ci16_le\",\"core:version\":\"1.2.5\","
        "\"core:sample_rate\":8000,\"core:num_channels\":2},\"captures\":[],\"annotations\":[]}";
    const int16_t stored[] = {1, 2, 3, 4, 5, 6, 7, 8};
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_ci16 raw[3];
    size_t got = 0;

    (void)state;
    put_file(path_in("two.sigmf-meta"), meta, sizeof meta - 1);
    put_file(path_in("two.sigmf-data"), stored, sizeof stored);
    assert_fault(mb_iq_reader_open(path_in("two.sigmf-meta"), &options, &reader), MB_ERROR_ARGUMENT,
                 "channel");
    options.channel = 2;
    assert_ok(mb_iq_reader_open(path_in("two.sigmf-meta"), &options, &reader));
    assert_ok(mb_iq_read_ci16(reader, raw, 3, &got));
    assert_int_equal(got, 2);
    assert_true(raw[0].re == 3 && raw[0].im == 4 && raw[1].re == 7 && raw[1].im == 8);
    mb_iq_reader_close(reader);
}

static void sixteen_bit_samples_pass_unchanged(void **state)
{
    mb_ci16 samples[300], back[300];
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_writer *writer = NULL;
    mb_iq_reader *reader = NULL;
    size_t got = 0;

    (void)state;
    for (int i = 0; i < 300; i++) {
        samples[i] = (mb_ci16){(int16_t)(i * 219 - 32768), (int16_t)(32767 - i * 219)};
    }
    settings.rate_hz = 240000.0;
    settings.format = MB_IQ_CI16;
    assert_ok(mb_iq_writer_create(path_in("pass.wav"), &settings, &writer));
    assert_ok(mb_iq_writer_write_ci16(writer, samples, 300));
    assert_ok(mb_iq_writer_commit(writer));
    mb_iq_writer_destroy(writer);
    assert_ok(mb_iq_reader_open(path_in("pass.wav"), NULL, &reader));
    assert_ok(mb_iq_read_ci16(reader, back, 300, &got));
    assert_int_equal(got, 300);
    assert_memory_equal(back, samples, sizeof samples);
    mb_iq_reader_close(reader);
}

static void words_and_endpoints_are_understood(void **state)
{
    mb_iq_format format = MB_IQ_BY_ENDING;
    mb_audio_format audio = MB_AUDIO_BY_ENDING;

    (void)state;
    assert_ok(mb_iq_format_parse("ci8", &format));
    assert_int_equal(format, MB_IQ_CI8);
    assert_int_equal(mb_iq_format_bytes(format), 2);
    assert_fault(mb_iq_format_parse("cs16", &format), MB_ERROR_ARGUMENT, "format");
    assert_string_equal(mb_last_fault()->text, "\"cs16\" is no IQ format; use one of cf32 ci16 ci8 cu8");
    assert_ok(mb_audio_format_parse("f32", &audio));
    assert_fault(mb_audio_format_parse("f64", &audio), MB_ERROR_ARGUMENT, "format");
    assert_int_equal(mb_endpoint_kind("-"), MB_ENDPOINT_PIPE);
    assert_int_equal(mb_endpoint_kind("audio:default"), MB_ENDPOINT_SOUND_DEVICE);
    assert_int_equal(mb_endpoint_kind("radio:driver=x"), MB_ENDPOINT_RADIO);
    assert_int_equal(mb_endpoint_kind("a.wav"), MB_ENDPOINT_PATH);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_container_gives_back_its_samples),
        cmocka_unit_test(integers_are_the_nearest_and_clamped_and_counted),
        cmocka_unit_test(a_reader_counts_full_scale_and_non_finite_and_rewinds),
        cmocka_unit_test(one_pair_of_several_can_be_chosen),
        cmocka_unit_test(sixteen_bit_samples_pass_unchanged),
        cmocka_unit_test(words_and_endpoints_are_understood),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
