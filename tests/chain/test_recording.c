/* Reception of whole recordings: what was transmitted comes back, sample for sample in its place. */
#include "passages.h"

#include "failing_memory.h"
#include "mirrorband/measure.h"

enum { SECONDS = 3, MOST = SECONDS * 48000 + 100 };

static float message[MOST];

/* A voice at audio_rate_hz, transmitted at rate_hz, its carrier moved by offset_hz. */
static passage voice_on_air(double audio_rate_hz, double rate_hz, double offset_hz, size_t *count)
{
    mb_transmit_settings settings = plain_transmit(audio_rate_hz, rate_hz);

    *count = (size_t)(SECONDS * audio_rate_hz) + 17;
    signal_voice_at(message, *count, audio_rate_hz, 121.0, 1101);
    passage p = transmit_all(&settings, message, *count);
    passage_shift(&p, offset_hz, rate_hz);
    return p;
}

static double output_snr_db(const float *audio, size_t count, uint64_t *polarity_changes)
{
    const mb_score_settings settings = mb_score_settings_default();
    mb_score_result result;
    mb_score *judge = NULL;

    assert_ok(mb_score_create(&settings, &judge));
    mb_score_align(judge, message, audio, count);
    assert_ok(mb_score_aligned(judge));
    mb_score_fit(judge, message, audio, count);
    assert_ok(mb_score_finish(judge, &result));
    mb_score_destroy(judge);
    *polarity_changes = result.polarity_changes;
    return result.snr_db;
}

/* Rates of audio and IQ: the length is exact, and no sample lies off its place by one or more. */
static void every_sample_comes_back_to_its_place(void **state)
{
    static const double rates[][2] = {{8e3, 48e3},   {16e3, 240e3}, {44.1e3, 48e3},
                                      {48e3, 240e3}, {16e3, 2.4e6}, {44.1e3, 1.024e6}};

    (void)state;
    print_message("seed 1101\n");
    for (size_t i = 0; i < sizeof rates / sizeof rates[0]; i++) {
        mb_receive_settings settings = mb_receive_settings_default();
        mb_receive_state summary;
        size_t count, got;
        passage p = voice_on_air(rates[i][0], rates[i][1], 137.0, &count);
        settings.rate_hz = rates[i][1];
        settings.audio_rate_hz = rates[i][0];
        float *audio = record_all(&settings, &p, &got, &summary);
        double wanted = (double)p.count * rates[i][0] / rates[i][1];
        assert_int_equal(got, llround(wanted));
        assert_near(passage_lag(message, audio, got < count ? got : count, 4), 0.0, 1.0);
        assert_near(summary.carrier.carrier_offset_hz, 137.0, 0.05);
        free(audio);
        free(p.samples);
    }
}

/* Noise-free: the ripple of the filters alone is left, 40 dB asked, from the first sample on. */
static void what_was_transmitted_is_received(void **state)
{
    static const double rates_hz[] = {48e3, 240e3, 2.4e6};

    (void)state;
    for (size_t i = 0; i < 3; i++) {
        mb_receive_settings settings = mb_receive_settings_default();
        mb_receive_state summary;
        size_t count, got;
        uint64_t changes;
        passage p = voice_on_air(8000.0, rates_hz[i], -700.0, &count);
        settings.rate_hz = rates_hz[i];
        settings.audio_rate_hz = 8000.0;
        float *audio = record_all(&settings, &p, &got, &summary);
        double snr_db = output_snr_db(audio, got < count ? got : count, &changes);
        print_message("%g Hz: %.1f dB\n", rates_hz[i], snr_db);
        assert_at_least(snr_db, 40.0);
        assert_int_equal(changes, 0);
        assert_int_equal(summary.carrier.locks, 1);
        free(audio);
        free(p.samples);
    }
}

/* Nothing to decimate: the input already has the rate of the baseband inside. */
static void samples_at_the_baseband_rate_are_taken_as_they_are(void **state)
{
    const signal_carrier carrier = {-333.0, 0.2, 1.0};
    const size_t count = signal_samples(SECONDS);
    mb_receive_settings settings = mb_receive_settings_default();
    mb_receive_state summary;
    passage p = {calloc(count, sizeof(mb_cf32)), count};
    size_t got;

    (void)state;
    print_message("seeds 1131, 1132\n");
    signal_voice(message, count, 109.0, 1131);
    signal_noisy_voice(message, count, &carrier, 30.0, 1132, p.samples);
    settings.rate_hz = SIGNAL_RATE_HZ;
    float *audio = record_all(&settings, &p, &got, &summary);
    assert_int_equal(got, count);
    assert_near(passage_lag(message, audio, count, 4), 0.0, 0.5);
    assert_near(summary.carrier.carrier_offset_hz, -333.0 + 0.2 * 0.5 * SECONDS, 0.1);
    free(audio);
    free(p.samples);
}

/* Both passes cut at random give the bits of whole passes. */
static void the_audio_does_not_depend_on_the_cuts(void **state)
{
    mb_receive_settings settings = mb_receive_settings_default();
    mb_receive_state summary;
    mb_recording *recording = NULL;
    mb_random random;
    size_t count, got, made = 0;
    passage p = voice_on_air(8000.0, 48e3, 60.0, &count);

    (void)state;
    print_message("seed 1111\n");
    settings.gain_control = settings.squelch = true;
    settings.audio_rate_hz = 44100.0;
    float *audio = record_all(&settings, &p, &got, &summary);
    float *cut = calloc(got + 200000, sizeof *cut);
    assert_ok(mb_recording_create(&settings, &recording));
    mb_random_seed(&random, 1111, 0);
    for (int pass = 0; pass < 2; pass++) {
        for (size_t done = 0; done < p.count;) {
            size_t now = (size_t)(mb_random_bits(&random) % 3000);
            now = now < p.count - done ? now : p.count - done;
            if (pass == 0) {
                assert_ok(mb_recording_listen_cf32(recording, p.samples + done, now));
            } else {
                made += mb_recording_process_cf32(recording, p.samples + done, now, cut + made);
            }
            done += now;
        }
        if (pass == 0) {
            assert_ok(mb_recording_resolve(recording));
        }
    }
    for (size_t more = 1; more > 0; made += more) {
        more = mb_recording_drain(recording, cut + made);
    }
    assert_int_equal(made, got);
    assert_memory_equal(cut, audio, got * sizeof *cut);
    mb_recording_destroy(recording);
    free(cut);
    free(audio);
    free(p.samples);
}

/* The 16-bit path against the float path on the same samples: -90 dB. */
static void sixteen_bit_samples_give_the_same_audio(void **state)
{
    mb_receive_settings settings = mb_receive_settings_default();
    mb_receive_state summary;
    mb_recording *recording = NULL;
    size_t count, got, made;
    double error = 0.0;
    passage p = voice_on_air(8000.0, 240e3, 60.0, &count);
    mb_ci16 *words = calloc(p.count, sizeof *words);

    (void)state;
    for (size_t i = 0; i < p.count; i++) {
        words[i] = (mb_ci16){(int16_t)lrintf(30000.0f * p.samples[i].re),
                             (int16_t)lrintf(30000.0f * p.samples[i].im)};
        p.samples[i] = (mb_cf32){(float)words[i].re / 32768.0f, (float)words[i].im / 32768.0f};
    }
    settings.rate_hz = 240e3;
    float *audio = record_all(&settings, &p, &got, &summary);
    assert_ok(mb_recording_create(&settings, &recording));
    assert_ok(mb_recording_listen_ci16(recording, words, p.count));
    assert_ok(mb_recording_resolve(recording));
    float *same =
        calloc(mb_recording_output_bound(recording, p.count) + mb_recording_output_bound(recording, 0),
               sizeof *same);
    made = mb_recording_process_ci16(recording, words, p.count, same);
    for (size_t more = 1; more > 0; made += more) {
        more = mb_recording_drain(recording, same + made);
    }
    assert_int_equal(made, got);
    for (size_t i = 0; i < got; i++) {
        error += pow((double)audio[i] - (double)same[i], 2.0);
    }
    assert_at_most(mb_power_db(error / (double)got / signal_power(audio, got)), -90.0);
    mb_recording_destroy(recording);
    free(same);
    free(audio);
    free(words);
    free(p.samples);
}

/* Times count from the first sample of the input, offsets from its centre: the phase of the track is that of
 * the shift given to the emission, to a multiple of pi. */
static void the_track_tells_time_and_offset_of_the_input(void **state)
{
    mb_receive_settings settings = mb_receive_settings_default();
    mb_recording *recording = NULL;
    size_t count;
    passage p = voice_on_air(8000.0, 240e3, 20250.0, &count);

    (void)state;
    settings.rate_hz = 240e3;
    settings.offset_hz = 20000.0;
    assert_ok(mb_recording_create(&settings, &recording));
    assert_ok(mb_recording_listen_cf32(recording, p.samples, p.count));
    assert_ok(mb_recording_resolve(recording));
    size_t points = mb_recording_point_count(recording);
    assert_near((double)points, 100.0 * SECONDS, 3.0);
    for (size_t i = 0; i < points; i++) {
        mb_track_point point = mb_recording_point(recording, i);
        mb_track_point first = mb_recording_point(recording, 0);
        assert_near(point.carrier_offset_hz, 20250.0, 0.1);
        assert_near(point.time_s - first.time_s, 0.01 * (double)i, 1e-9);
        assert_near(point.phase_rad - first.phase_rad, 2.0 * MB_PI * 250.0 * 0.01 * (double)i, 0.05);
    }
    assert_near(mb_recording_point(recording, 0).time_s, 0.0, 0.02);
    mb_recording_destroy(recording);
    free(p.samples);
}

/* For measurements: the message on the real axis, nothing on the other. */
static void the_derotated_baseband_has_the_message_on_the_real_axis(void **state)
{
    mb_receive_settings settings = mb_receive_settings_default();
    mb_recording *recording = NULL;
    size_t count;
    passage p = voice_on_air(8000.0, 48e3, 321.0, &count);

    (void)state;
    assert_ok(mb_recording_create(&settings, &recording));
    assert_ok(mb_recording_listen_cf32(recording, p.samples, p.count));
    assert_ok(mb_recording_resolve(recording));
    mb_cf32 *baseband = calloc(mb_recording_output_bound(recording, p.count), sizeof *baseband);
    size_t made = mb_recording_derotate_cf32(recording, p.samples, p.count, baseband);
    assert_near((double)made, SECONDS * mb_recording_baseband_rate_hz(recording), 400.0);
    assert_at_most(signal_quadrature_db(baseband, 0, made), -40.0);
    assert_true(mb_recording_baseband_delay_s(recording) > 0.0 &&
                mb_recording_baseband_delay_s(recording) < 0.05);
    mb_recording_destroy(recording);
    free(baseband);
    free(p.samples);
}

static void noise_is_no_signal(void **state)
{
    const mb_receive_settings settings = mb_receive_settings_default();
    mb_recording *recording = NULL;
    mb_cf32 *noise = calloc(240000, sizeof *noise);

    (void)state;
    print_message("seed 1121\n");
    signal_add_noise(noise, 240000, 0.01, 0.0, 1121);
    assert_ok(mb_recording_create(&settings, &recording));
    assert_ok(mb_recording_listen_cf32(recording, noise, 240000));
    assert_int_equal(mb_recording_resolve(recording), MB_ERROR_NO_SIGNAL);
    mb_recording_destroy(recording);
    free(noise);
}

static mb_status make_and_destroy(void)
{
    mb_receive_settings settings = mb_receive_settings_default();
    mb_recording *recording = NULL;

    settings.audio_rate_hz = 8000.0;
    settings.gain_control = settings.squelch = true;
    mb_status status = mb_recording_create(&settings, &recording);
    assert_true((status == MB_OK) == (recording != NULL));
    mb_recording_destroy(recording);
    return status;
}

static void lack_of_memory_is_told_and_nothing_leaks(void **state)
{
    (void)state;
    assert_survives_lack_of_memory(make_and_destroy());
    mb_recording_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_sample_comes_back_to_its_place),
        cmocka_unit_test(what_was_transmitted_is_received),
        cmocka_unit_test(samples_at_the_baseband_rate_are_taken_as_they_are),
        cmocka_unit_test(the_audio_does_not_depend_on_the_cuts),
        cmocka_unit_test(sixteen_bit_samples_give_the_same_audio),
        cmocka_unit_test(the_track_tells_time_and_offset_of_the_input),
        cmocka_unit_test(the_derotated_baseband_has_the_message_on_the_real_axis),
        cmocka_unit_test(noise_is_no_signal),
        cmocka_unit_test(lack_of_memory_is_told_and_nothing_leaks),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
