/* WAV and RF64 as others expect them: header bytes of FACTS.md F, sizes beyond 4 GiB, a third program agrees.
 */
#include "samples.h"
#include "sound.h"

static const char *path_in(const char *name)
{
    return path_of("wave", name);
}

static uint64_t number_at(const unsigned char *bytes, size_t at, int count)
{
    uint64_t value = 0;

    for (int i = count - 1; i >= 0; i--) {
        value = (value << 8) | bytes[at + (size_t)i];
    }
    return value;
}

static void write_iq(const char *path, mb_iq_format format, size_t n)
{
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_writer *writer = NULL;
    mb_cf32 *samples = make_samples(n, 5);

    settings.rate_hz = 48000.0;
    settings.format = format;
    assert_ok(mb_iq_writer_create(path, &settings, &writer));
    assert_ok(mb_iq_writer_write(writer, samples, n));
    assert_ok(mb_iq_writer_commit(writer));
    mb_iq_writer_destroy(writer);
    mb_release(samples);
}

static void a_wav_begins_with_the_canonical_44_bytes(void **state)
{
    unsigned char bytes[256];
    mb_audio_writer_settings settings = mb_audio_writer_settings_default();
    mb_audio_writer *writer = NULL;
    const float samples[] = {0.5f, -0.5f, 1.0f, -1.0f, 1.5f};
    const int16_t expected[] = {16384, -16384, 32767, -32768, 32767}; /* FACTS F: 0.5 -> 16384; clamped */

    (void)state;
    settings.rate_hz = 8000.0;
    assert_ok(mb_audio_writer_create(path_in("five.wav"), &settings, &writer));
    assert_ok(mb_audio_writer_write(writer, samples, 5));
    assert_int_equal(mb_audio_writer_state_of(writer).clipped, 2);
    assert_ok(mb_audio_writer_commit(writer));
    mb_audio_writer_destroy(writer);
    /* FACTS F, canonical PCM WAVE (Microsoft/IBM RIFF 1991) */
    assert_int_equal(get_file(path_in("five.wav"), bytes, sizeof bytes), 54);
    assert_memory_equal(bytes, "RIFF", 4);
    assert_int_equal(number_at(bytes, 4, 4), 54 - 8);
    assert_memory_equal(bytes + 8, "WAVEfmt ", 8);
    assert_int_equal(number_at(bytes, 16, 4), 16);
    assert_int_equal(number_at(bytes, 20, 2), 1);
    assert_int_equal(number_at(bytes, 22, 2), 1);
    assert_int_equal(number_at(bytes, 24, 4), 8000);
    assert_int_equal(number_at(bytes, 28, 4), 16000);
    assert_int_equal(number_at(bytes, 32, 2), 2);
    assert_int_equal(number_at(bytes, 34, 2), 16);
    assert_memory_equal(bytes + 36, "data", 4);
    assert_int_equal(number_at(bytes, 40, 4), 10);
    assert_memory_equal(bytes + 44, expected, sizeof expected);
}

static void an_rf64_holds_64_bit_sizes(void **state)
{
    unsigned char bytes[256];

    (void)state;
    write_iq(path_in("four.rf64"), MB_IQ_CI16, 4);
    size_t size = get_file(path_in("four.rf64"), bytes, sizeof bytes);
    /* FACTS F, RF64 (EBU Tech 3306 Annex A): for 4 stereo 16-bit frames libsndfile writes 120 bytes */
    assert_int_equal(size, 120);
    assert_memory_equal(bytes, "RF64\xff\xff\xff\xffWAVEds64", 16);
    assert_int_equal(number_at(bytes, 16, 4), 28);
    assert_int_equal(number_at(bytes, 20, 8), 112);
    assert_int_equal(number_at(bytes, 28, 8), 16);
    assert_int_equal(number_at(bytes, 36, 8), 4);
    assert_int_equal(number_at(bytes, 44, 4), 0);
}

/* A hole of more than 4 GiB costs no room on disk: the far end must still be found. */
static void an_rf64_beyond_4_gib_is_exact(void **state)
{
    const uint64_t far = UINT64_C(1200000000); /* frames of 4 bytes: 4.8 GB */
    const char *path = path_in("far.rf64");
    const int16_t near_end[] = {11, -12, 13, -14};
    int16_t back[8];
    unsigned char bytes[64];
    mb_sound *sound = NULL;
    mb_source *source = NULL;
    mb_iq_reader *reader = NULL;
    size_t got = 0;

    (void)state;
    assert_ok(mb_sound_create(path, SF_FORMAT_RF64 | SF_FORMAT_PCM_16, 2400000.0, 2, &sound));
    assert_ok(mb_sound_write_s16(sound, near_end, 1));
    assert_ok(mb_sound_seek(sound, far));
    assert_ok(mb_sound_write_s16(sound, near_end, 2));
    assert_ok(mb_sound_commit(sound));
    mb_sound_close(sound);
    (void)get_file(path, bytes, sizeof bytes);
    assert_true(number_at(bytes, 28, 8) == (far + 2) * 4);
    assert_true(number_at(bytes, 36, 8) == far + 2);
    assert_ok(mb_iq_reader_open(path, NULL, &reader));
    assert_true(mb_iq_reader_info(reader).samples == far + 2);
    mb_iq_reader_close(reader);
    assert_ok(mb_source_open(path, false, &source));
    assert_ok(mb_sound_open(path, source, &sound));
    assert_ok(mb_sound_seek(sound, far - 1));
    assert_ok(mb_sound_read_s16(sound, back, 4, &got));
    assert_int_equal(got, 3);
    assert_true(back[0] == 0 && back[1] == 0);
    assert_memory_equal(back + 2, near_end, sizeof near_end);
    mb_sound_close(sound);
    assert_int_equal(remove(path), 0);
}

static void a_wav_does_not_grow_beyond_4_gib(void **state)
{
    const char *path = path_in("far.wav");
    const int16_t samples[4] = {1, 2, 3, 4};
    mb_sound *sound = NULL;

    (void)state;
    assert_ok(mb_sound_create(path, SF_FORMAT_WAV | SF_FORMAT_PCM_16, 2400000.0, 2, &sound));
    assert_ok(mb_sound_write_s16(sound, samples, 2));
    assert_ok(mb_sound_seek(sound, UINT64_C(1073741823)));
    assert_fault(mb_sound_write_s16(sound, samples, 2), MB_ERROR_UNSUPPORTED, mb_last_fault()->field);
    assert_non_null(strstr(mb_last_fault()->text, "use .rf64"));
    mb_sound_close(sound);
    assert_false(is_there(path));
}

/* sndfile-info (libsndfile 1.2.0, Debian sndfile-programs) reads the header on its own. */
static void another_program_reads_the_same(void **state)
{
    char command[1200], text[4096];

    (void)state;
    write_iq(path_in("info.wav"), MB_IQ_CF32, 12345);
    (void)snprintf(command, sizeof command, "sndfile-info '%s' 2>/dev/null", path_in("info.wav"));
    FILE *pipe = popen(command, "r");
    assert_non_null(pipe);
    size_t size = fread(text, 1, sizeof text - 1, pipe);
    text[size] = '\0';
    if (pclose(pipe) != 0) {
        skip();
    }
    assert_non_null(strstr(text, "Sample Rate : 48000"));
    assert_non_null(strstr(text, "Frames      : 12345"));
    assert_non_null(strstr(text, "Channels    : 2"));
    assert_non_null(strstr(text, "=> WAVE_FORMAT_IEEE_FLOAT"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_wav_begins_with_the_canonical_44_bytes),
        cmocka_unit_test(an_rf64_holds_64_bit_sizes),
        cmocka_unit_test(an_rf64_beyond_4_gib_is_exact),
        cmocka_unit_test(a_wav_does_not_grow_beyond_4_gib),
        cmocka_unit_test(another_program_reads_the_same),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
