/* Audio comes back as written, from any of the containers, at any rate, one chosen channel. */
#include "samples.h"
#include "sound.h"

enum { COUNT = 10007 };

static const char *path_in(const char *name)
{
    return path_of("audio", name);
}

static void write_audio(const char *path, mb_audio_format format, double rate_hz, const float *samples)
{
    mb_audio_writer_settings settings = mb_audio_writer_settings_default();
    mb_audio_writer *writer = NULL;

    settings.format = format;
    settings.rate_hz = rate_hz;
    assert_ok(mb_audio_writer_create(path, &settings, &writer));
    for (size_t i = 0; i < COUNT; i += 960) {
        assert_ok(mb_audio_writer_write(writer, samples + i, COUNT - i < 960 ? COUNT - i : 960));
    }
    assert_ok(mb_audio_writer_commit(writer));
    assert_int_equal(mb_audio_writer_state_of(writer).samples, COUNT);
    mb_audio_writer_destroy(writer);
}

static double read_error(const char *path, const float *samples, size_t block, double rate_hz)
{
    mb_audio_reader *reader = NULL;
    float *out = mb_allocate(block, sizeof *out);
    double worst = 0.0;
    size_t done = 0, got = 0;

    assert_ok(mb_audio_reader_open(path, NULL, &reader));
    assert_int_equal(mb_audio_reader_info(reader).samples, COUNT);
    assert_near(mb_audio_reader_info(reader).rate_hz, rate_hz, 0.0);
    for (int pass = 0; pass < 2; pass++) {
        for (done = 0; done < COUNT; done += got) {
            assert_ok(mb_audio_read(reader, out, block, &got));
            assert_true(got > 0);
            for (size_t i = 0; i < got; i++) {
                worst = fmax(worst, fabs((double)out[i] - (double)samples[done + i]));
            }
        }
        assert_ok(mb_audio_read(reader, out, block, &got));
        assert_int_equal(got, 0);
        assert_ok(mb_audio_rewind(reader));
    }
    mb_audio_reader_close(reader);
    mb_release(out);
    return worst;
}

static void every_container_gives_back_its_samples(void **state)
{
    static const struct {
        const char *name;
        mb_audio_format format;
        double rate_hz, tolerance; /* half a step: rounding to nearest */
    } cases[] = {
        {"a.wav", MB_AUDIO_BY_ENDING, 8000.0, 0.5 / 32768.0},
        {"b.wav", MB_AUDIO_S24, 11025.0, 0.5 / 8388608.0},
        {"c.wav", MB_AUDIO_F32, 48000.0, 0.0},
        {"a.flac", MB_AUDIO_BY_ENDING, 44100.0, 0.5 / 32768.0},
        {"b.flac", MB_AUDIO_S24, 96000.0, 0.5 / 8388608.0},
        {"a.rf64", MB_AUDIO_BY_ENDING, 16000.0, 0.5 / 32768.0},
        {"b.rf64", MB_AUDIO_F32, 192000.0, 0.0},
    };
    mb_cf32 *pairs = make_samples(COUNT, 2);
    float *samples = mb_allocate(COUNT, sizeof *samples);

    (void)state;
    for (size_t i = 0; i < COUNT; i++) {
        samples[i] = pairs[i].re;
    }
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        const char *path = path_in(cases[i].name);
        write_audio(path, cases[i].format, cases[i].rate_hz, samples);
        assert_at_most(read_error(path, samples, 480, cases[i].rate_hz), cases[i].tolerance);
        assert_at_most(read_error(path, samples, COUNT + 1, cases[i].rate_hz), cases[i].tolerance);
    }
    mb_release(samples);
    mb_release(pairs);
}

static void a_channel_of_several_must_be_chosen(void **state)
{
    const int16_t frames[] = {1, 100, -7, 2, 200, -8};
    mb_audio_open options = mb_audio_open_default();
    mb_audio_reader *reader = NULL;
    mb_sound *sound = NULL;
    float out[4];
    size_t got = 0;

    (void)state;
    assert_ok(mb_sound_create(path_in("three.wav"), SF_FORMAT_WAV | SF_FORMAT_PCM_16, 8000.0, 3, &sound));
    assert_ok(mb_sound_write_s16(sound, frames, 2));
    assert_ok(mb_sound_commit(sound));
    mb_sound_close(sound);
    assert_fault(mb_audio_reader_open(path_in("three.wav"), NULL, &reader), MB_ERROR_ARGUMENT, "channel");
    options.channel = 4;
    assert_fault(mb_audio_reader_open(path_in("three.wav"), &options, &reader), MB_ERROR_ARGUMENT, "channel");
    options.channel = 2;
    assert_ok(mb_audio_reader_open(path_in("three.wav"), &options, &reader));
    assert_ok(mb_audio_read(reader, out, 4, &got));
    assert_int_equal(got, 2);
    assert_near(out[0], 100.0 / 32768.0, 0.0);
    assert_near(out[1], 200.0 / 32768.0, 0.0);
    mb_audio_reader_close(reader);
}

static void clipped_audio_is_counted_when_read(void **state)
{
    const float samples[] = {0.1f, 1.0f, -1.0f, 0.5f};
    mb_audio_writer_settings settings = mb_audio_writer_settings_default();
    mb_audio_writer *writer = NULL;
    mb_audio_reader *reader = NULL;
    float out[8];
    size_t got = 0;

    (void)state;
    settings.rate_hz = 8000.0;
    assert_ok(mb_audio_writer_create(path_in("clipped.flac"), &settings, &writer));
    assert_ok(mb_audio_writer_write(writer, samples, 4));
    assert_ok(mb_audio_writer_commit(writer));
    mb_audio_writer_destroy(writer);
    assert_ok(mb_audio_reader_open(path_in("clipped.flac"), NULL, &reader));
    assert_ok(mb_audio_read(reader, out, 8, &got));
    assert_int_equal(got, 4);
    assert_int_equal(mb_audio_reader_state_of(reader).at_full_scale, 2);
    /* FACTS 0: round trip of +1.0 through 16 bit gives 0.999969482 */
    assert_near(out[1], 0.999969482, 1e-9);
    mb_audio_reader_close(reader);
}

static void settings_are_checked(void **state)
{
    mb_audio_writer_settings settings = mb_audio_writer_settings_default();
    mb_audio_writer *writer = NULL;

    (void)state;
    assert_fault(mb_audio_writer_create(path_in("x.wav"), &settings, &writer), MB_ERROR_ARGUMENT, "rate_hz");
    settings.rate_hz = 8000.5;
    assert_fault(mb_audio_writer_create(path_in("x.wav"), &settings, &writer), MB_ERROR_ARGUMENT, "rate_hz");
    settings.rate_hz = 8000.0;
    settings.format = MB_AUDIO_F32;
    assert_fault(mb_audio_writer_create(path_in("x.flac"), &settings, &writer), MB_ERROR_UNSUPPORTED,
                 "format");
    settings.format = MB_AUDIO_BY_ENDING;
    assert_fault(mb_audio_writer_create("-", &settings, &writer), MB_ERROR_ARGUMENT, "format");
    assert_int_equal(mb_audio_writer_create("x.ogg", &settings, &writer), MB_ERROR_UNSUPPORTED);
    assert_string_equal(mb_last_fault()->text,
                        "x.ogg has no ending that is written as audio; use one of .wav .flac .rf64");
    assert_int_equal(mb_audio_writer_create("audio:front", &settings, &writer), MB_ERROR_UNSUPPORTED);
    mb_audio_writer_destroy(NULL);
    mb_audio_writer_abandon(NULL);
    mb_audio_reader_close(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_container_gives_back_its_samples),
        cmocka_unit_test(a_channel_of_several_must_be_chosen),
        cmocka_unit_test(clipped_audio_is_counted_when_read),
        cmocka_unit_test(settings_are_checked),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
