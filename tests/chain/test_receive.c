/* Live reception: what was transmitted comes back, in time, and nothing else does. */
#include "passages.h"

#include "failing_memory.h"
#include "mirrorband/measure.h"
#include "stage_cuts.h"

enum { SECONDS = 6, MESSAGE = SECONDS * 8000 };

/* A voice of 6 s at 8 kHz, transmitted at rate_hz, its carrier moved by offset_hz. */
static passage voice_on_air(float *message, double rate_hz, double offset_hz)
{
    mb_transmit_settings settings = plain_transmit(8000.0, rate_hz);
    size_t count = MESSAGE;

    signal_voice_at(message, count, 8000.0, 121.0, 1001);
    passage p = transmit_all(&settings, message, count);
    passage_shift(&p, offset_hz, rate_hz);
    return p;
}

static mb_score_result score(const float *message, const float *audio, size_t count, double skip_s)
{
    mb_score_settings settings = mb_score_settings_default();
    mb_score_result result;
    mb_score *judge = NULL;

    settings.skip_s = skip_s;
    assert_ok(mb_score_create(&settings, &judge));
    mb_score_align(judge, message, audio, count);
    assert_ok(mb_score_aligned(judge));
    mb_score_fit(judge, message, audio, count);
    assert_ok(mb_score_finish(judge, &result));
    mb_score_destroy(judge);
    return result;
}

/* Without noise what is left is the ripple of the filters and the tracker: 40 dB asked, from 1.5 s on. The
 * delay is the stated one, within an audio sample. */
static void what_was_transmitted_is_received(void **state)
{
    static const double rates[][2] = {{48e3, 137.0}, {240e3, -820.0}, {2.4e6, 440.0}};
    static float message[MESSAGE];

    (void)state;
    print_message("seed 1001\n");
    for (size_t i = 0; i < sizeof rates / sizeof rates[0]; i++) {
        mb_receive_settings settings = mb_receive_settings_default();
        passage p = voice_on_air(message, rates[i][0], rates[i][1]);
        mb_receive_state last;
        mb_receive *receive = NULL;
        size_t count;
        settings.rate_hz = rates[i][0];
        settings.audio_rate_hz = 8000.0;
        float *audio = receive_all(&settings, &p, &count, &last);
        mb_score_result r = score(message, audio, count < MESSAGE ? count : MESSAGE, 1.5);
        print_message("%g Hz: %.1f dB\n", rates[i][0], r.snr_db);
        assert_at_least(r.snr_db, 40.0);
        assert_int_equal(r.polarity_changes, 0);
        assert_ok(mb_receive_create(&settings, &receive));
        assert_near(r.delay_s, mb_receive_delay_s(receive), 1.0 / 8000.0);
        mb_receive_destroy(receive);
        assert_near(last.carrier.carrier_offset_hz, rates[i][1], 0.1);
        assert_int_equal(last.carrier.locks, 1);
        free(audio);
        free(p.samples);
    }
}

static void the_delay_by_default_is_at_most_120_ms(void **state)
{
    static const double rates[] = {48e3, 240e3, 2.4e6};

    (void)state;
    for (size_t i = 0; i < 3; i++) {
        mb_receive_settings settings = mb_receive_settings_default();
        mb_receive *receive = NULL;
        settings.rate_hz = rates[i];
        assert_ok(mb_receive_create(&settings, &receive));
        assert_at_most(mb_receive_delay_s(receive), 0.12);
        mb_receive_destroy(receive);
    }
}

/* The carrier lies 20 kHz from the centre: it is looked for there, and told from the centre of the input. */
static void a_carrier_far_from_the_centre_is_found_where_it_is_said_to_be(void **state)
{
    static float message[MESSAGE];
    mb_receive_settings settings = mb_receive_settings_default();
    passage p = voice_on_air(message, 240e3, 20333.0);
    mb_receive_state last;
    size_t count;

    (void)state;
    settings.rate_hz = 240e3;
    settings.offset_hz = 20000.0;
    settings.audio_rate_hz = 8000.0;
    float *audio = receive_all(&settings, &p, &count, &last);
    assert_near(last.carrier.carrier_offset_hz, 20333.0, 0.1);
    free(audio);
    free(p.samples);
}

/* One sideband alone, and the Costas loop, receive the same message. */
static void other_detectors_and_trackers_receive_it_too(void **state)
{
    static float message[MESSAGE];
    passage p = voice_on_air(message, 48e3, -55.0);

    (void)state;
    for (int way = 0; way < 3; way++) {
        mb_receive_settings settings = mb_receive_settings_default();
        mb_receive_state last;
        size_t count;
        settings.audio_rate_hz = 8000.0;
        settings.sideband = way == 0 ? MB_SIDEBAND_UPPER : way == 1 ? MB_SIDEBAND_LOWER : MB_SIDEBAND_BOTH;
        settings.tracker = way == 2 ? MB_TRACKER_COSTAS : MB_TRACKER_KALMAN;
        float *audio = receive_all(&settings, &p, &count, &last);
        mb_score_result r = score(message, audio, count < MESSAGE ? count : MESSAGE, 1.5);
        assert_at_least(r.snr_db, 35.0);
        free(audio);
    }
    free(p.samples);
}

static void noise_is_muted(void **state)
{
    mb_receive_settings settings = mb_receive_settings_default();
    passage p = {calloc(240000, sizeof(mb_cf32)), 240000};
    mb_receive_state last;
    size_t count;

    (void)state;
    print_message("seed 1011\n");
    signal_add_noise(p.samples, p.count, 0.01, 0.0, 1011);
    float *audio = receive_all(&settings, &p, &count, &last);
    assert_int_equal(last.carrier.mode, MB_CARRIER_SEARCH);
    assert_int_equal(last.carrier.locks, 0);
    for (size_t i = 0; i < count; i++) {
        assert_near(audio[i], 0.0, 0.0);
    }
    free(audio);
    free(p.samples);
}

/* Both act on the audio: the level is that asked for, and the squelch opens with the voice. */
static void gain_control_and_squelch_are_in_the_chain(void **state)
{
    static float message[MESSAGE];
    mb_receive_settings settings = mb_receive_settings_default();
    passage p = voice_on_air(message, 48e3, 10.0);
    mb_receive_state last;
    size_t count;

    (void)state;
    for (size_t i = 0; i < p.count; i++) {
        p.samples[i] = (mb_cf32){0.1f * p.samples[i].re, 0.1f * p.samples[i].im};
    }
    settings.gain_control = settings.squelch = true;
    settings.level_dbfs = -34.0;
    float *audio = receive_all(&settings, &p, &count, &last);
    assert_true(last.squelch_open);
    assert_near(last.gain_db, 6.0, 3.0); /* from -40 dBFS */
    assert_near(mb_power_db(signal_power(audio + count / 2, count / 2)), -34.0, 1.5);
    free(audio);
    free(p.samples);
}

static size_t process_receive(void *stage, const void *in, size_t n, void *out)
{
    return mb_receive_process_cf32(stage, in, n, out);
}

static void reset_receive(void *stage)
{
    mb_receive_reset(stage);
}

static void the_output_does_not_depend_on_the_cuts(void **state)
{
    static float message[MESSAGE];
    mb_receive_settings settings = mb_receive_settings_default();
    passage p = voice_on_air(message, 48e3, 333.0);
    mb_receive *receive = NULL;

    (void)state;
    settings.audio_rate_hz = 44100.0;
    settings.gain_control = settings.squelch = true;
    p.samples[70000].re = NAN;
    assert_ok(mb_receive_create(&settings, &receive));
    const stage_cuts cuts = {
        receive, process_receive, reset_receive, p.samples,
        120000,  sizeof(mb_cf32), sizeof(float), mb_receive_output_bound(receive, 120000)};
    assert_cuts_do_not_matter(&cuts);
    mb_receive_destroy(receive);
    free(p.samples);
}

/* The 16-bit path against the float path on the same samples: -90 dB. */
static void sixteen_bit_samples_give_the_same_audio(void **state)
{
    static float message[MESSAGE];
    mb_receive_settings settings = mb_receive_settings_default();
    passage p = voice_on_air(message, 240e3, 333.0);
    mb_ci16 *words = calloc(p.count, sizeof *words);
    mb_receive_state last;
    mb_receive *receive = NULL;
    double error = 0.0;
    size_t count;

    (void)state;
    for (size_t i = 0; i < p.count; i++) {
        words[i] = (mb_ci16){(int16_t)lrintf(30000.0f * p.samples[i].re),
                             (int16_t)lrintf(30000.0f * p.samples[i].im)};
        p.samples[i] = (mb_cf32){(float)words[i].re / 32768.0f, (float)words[i].im / 32768.0f};
    }
    settings.rate_hz = 240e3;
    float *audio = receive_all(&settings, &p, &count, &last);
    assert_ok(mb_receive_create(&settings, &receive));
    float *same = calloc(mb_receive_output_bound(receive, p.count), sizeof *same);
    assert_int_equal(mb_receive_process_ci16(receive, words, p.count, same), count);
    for (size_t i = 0; i < count; i++) {
        error += pow((double)audio[i] - (double)same[i], 2.0);
    }
    assert_at_most(mb_power_db(error / (double)count / signal_power(audio, count)), -90.0);
    mb_receive_destroy(receive);
    free(same);
    free(audio);
    free(words);
    free(p.samples);
}

static void a_rate_too_low_says_how_much_it_takes(void **state)
{
    mb_receive_settings settings = mb_receive_settings_default();
    mb_receive *receive = NULL;

    (void)state;
    settings.rate_hz = 8000.0;
    assert_fault(mb_receive_create(&settings, &receive), MB_ERROR_ARGUMENT, "rate_hz");
    assert_non_null(strstr(mb_last_fault()->text, "8000 Hz is too low"));
    assert_non_null(strstr(mb_last_fault()->text, "at least 12000 Hz"));
    settings.rate_hz = 48000.0;
    settings.offset_hz = 22000.0;
    assert_fault(mb_receive_create(&settings, &receive), MB_ERROR_ARGUMENT, "rate_hz");
    assert_non_null(strstr(mb_last_fault()->text, "at least 51500 Hz")); /* 2 (22000 + 2750 + 1000) */
    assert_null(receive);
}

static void each_bad_setting_is_named(void **state)
{
    static const struct {
        size_t offset;
        double value;
        const char *field;
    } rows[] = {
        {offsetof(mb_receive_settings, rate_hz), 26e6, "rate_hz"},
        {offsetof(mb_receive_settings, offset_hz), 24001.0, "offset_hz"},
        {offsetof(mb_receive_settings, span_hz), 49.0, "span_hz"},
        {offsetof(mb_receive_settings, baseband_rate_hz), NAN, "baseband_rate_hz"},
        {offsetof(mb_receive_settings, audio_rate_hz), 7999.0, "audio_rate_hz"},
        {offsetof(mb_receive_settings, low_hz), 700.0, "low_hz"},
        {offsetof(mb_receive_settings, high_hz), 6001.0, "high_hz"},
        {offsetof(mb_receive_settings, look_ahead_s), 5.1, "look_ahead_s"},
        {offsetof(mb_receive_settings, loop_bandwidth_hz), 0.0, "loop_bandwidth_hz"},
        {offsetof(mb_receive_settings, damping), INFINITY, "damping"},
        {offsetof(mb_receive_settings, squelch_quality), 1.1, "squelch_quality"},
    };

    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        mb_receive_settings settings = mb_receive_settings_default();
        mb_receive *receive = NULL;
        mb_recording *recording = NULL;
        memcpy((char *)&settings + rows[i].offset, &rows[i].value, sizeof rows[i].value);
        assert_fault(mb_receive_create(&settings, &receive), MB_ERROR_ARGUMENT, rows[i].field);
        assert_fault(mb_recording_create(&settings, &recording), MB_ERROR_ARGUMENT, rows[i].field);
        assert_null(receive);
        assert_null(recording);
    }
}

static mb_status make_and_destroy(void)
{
    mb_receive_settings settings = mb_receive_settings_default();
    mb_receive *receive = NULL;

    settings.audio_rate_hz = 8000.0;
    settings.gain_control = settings.squelch = true;
    settings.tracker = MB_TRACKER_COSTAS;
    mb_status status = mb_receive_create(&settings, &receive);
    assert_true((status == MB_OK) == (receive != NULL));
    mb_receive_destroy(receive);
    return status;
}

static void lack_of_memory_is_told_and_nothing_leaks(void **state)
{
    (void)state;
    assert_survives_lack_of_memory(make_and_destroy());
    mb_receive_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(what_was_transmitted_is_received),
        cmocka_unit_test(the_delay_by_default_is_at_most_120_ms),
        cmocka_unit_test(a_carrier_far_from_the_centre_is_found_where_it_is_said_to_be),
        cmocka_unit_test(other_detectors_and_trackers_receive_it_too),
        cmocka_unit_test(noise_is_muted),
        cmocka_unit_test(gain_control_and_squelch_are_in_the_chain),
        cmocka_unit_test(the_output_does_not_depend_on_the_cuts),
        cmocka_unit_test(sixteen_bit_samples_give_the_same_audio),
        cmocka_unit_test(a_rate_too_low_says_how_much_it_takes),
        cmocka_unit_test(each_bad_setting_is_named),
        cmocka_unit_test(lack_of_memory_is_told_and_nothing_leaks),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
