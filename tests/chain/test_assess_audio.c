/* Audio against its message and ideal detection: figures known from how the signals were made. */
#include "assess_signals.h"

enum { SECONDS = 8 };

typedef struct lanes {
    const float *message, *audio;
    size_t message_count, audio_count, block;
} lanes;

static void hand_over(mb_assess_audio *assess, const lanes *from)
{
    size_t done[2] = {0, 0};
    mb_assess_lane lane;

    while ((lane = mb_assess_audio_next(assess)) != MB_ASSESS_NEITHER) {
        size_t which = lane == MB_ASSESS_MESSAGE ? 0 : 1;
        size_t count = which == 0 ? from->message_count : from->audio_count;
        const float *samples = which == 0 ? from->message : from->audio;
        size_t run = count - done[which] < from->block ? count - done[which] : from->block;
        if (run == 0) {
            mb_assess_audio_end(assess, lane);
        }
        assert_ok(mb_assess_audio_push(assess, lane, samples + done[which], run));
        done[which] += run;
    }
}

static mb_score_result score_of(double message_rate_hz, double audio_rate_hz, const lanes *from)
{
    mb_assess_audio_settings settings = mb_assess_audio_settings_default();
    mb_assess_audio *assess = NULL;
    mb_score_result result;

    settings.message_rate_hz = message_rate_hz;
    settings.audio_rate_hz = audio_rate_hz;
    assert_ok(mb_assess_audio_create(&settings, &assess));
    hand_over(assess, from);
    assert_ok(mb_assess_audio_aligned(assess));
    hand_over(assess, from);
    assert_ok(mb_assess_audio_finish(assess, &result));
    mb_assess_audio_destroy(assess);
    return result;
}

/* The same samples at 16 kHz, later by a delay, with noise of known power. */
static float *heard(const float *message, size_t count, size_t delay, double gain, double noise,
                    uint64_t seed)
{
    mb_random random;
    float *out = mb_allocate(count, sizeof *out);

    mb_random_seed(&random, seed, 2);
    for (size_t i = 0; i < count; i++) {
        double sample = i >= delay ? gain * (double)message[i - delay] : 0.0;
        out[i] = (float)(sample + noise * mb_random_normal(&random));
    }
    return out;
}

/* White noise counts by its share of 250-2800 Hz: 2550 of 8000 Hz. Tolerance: 49 free taps and chance. */
static void snr_and_delay_are_found_across_rates(void **state)
{
    (void)state;
    const size_t count = (size_t)SECONDS * 16000;
    float *message = speech_like(16000.0, count, 21);
    float *audio = heard(message, count, 800, -0.5, 0.01, 22);
    lanes from = {message, audio, count, count, 1000};
    double expected = mb_power_db(0.25 * mean_square(message, count) / (1e-4 * 2550.0 / 8000.0));

    mb_score_result r = score_of(16000.0, 16000.0, &from);
    assert_near(r.snr_db, expected, 0.15);
    assert_near(r.delay_s, 0.05, 1e-4);
    assert_near(r.gain_db, mb_power_db(0.25), 0.05);
    assert_int_equal(r.polarity_changes, 0);
    mb_release(audio);
    mb_release(message);
}

/* The same message at 44.1 kHz is made of the one at 16 kHz by the resampler, whose delay is known. */
static void any_pair_of_rates_will_do(void **state)
{
    (void)state;
    const size_t count = (size_t)SECONDS * 16000;
    float *audio = speech_like(16000.0, count, 23);
    mb_resampler_settings up = mb_resampler_settings_default();
    mb_resampler *resampler = NULL;

    up.rate_in_hz = 16000.0;
    up.rate_out_hz = 44100.0;
    assert_ok(mb_resampler_create(&up, &resampler));
    float *message = mb_allocate(mb_resampler_output_bound(resampler, count), sizeof *message);
    size_t made = mb_resampler_process_f32(resampler, audio, count, message);
    lanes from = {message, audio, made, count, 4000};
    mb_score_result r = score_of(44100.0, 16000.0, &from);
    assert_at_least(r.snr_db, 50.0);
    /* to the sample of the score, 1/8000 s */
    assert_near(r.delay_s, -mb_resampler_delay_s(resampler), 1.0 / 16000.0 + 1e-6);
    mb_resampler_destroy(resampler);
    mb_release(message);
    mb_release(audio);
}

static void a_turn_of_polarity_is_counted(void **state)
{
    (void)state;
    const size_t count = (size_t)SECONDS * 16000;
    float *message = speech_like(16000.0, count, 24), *audio = heard(message, count, 0, 1.0, 0.001, 25);

    for (size_t i = 3 * count / 4; i < count; i++) { /* half-way, nothing would be left to align by */
        audio[i] = -audio[i];
    }
    lanes from = {message, audio, count, count, 1000};
    mb_score_result r = score_of(16000.0, 16000.0, &from);
    assert_int_equal(r.polarity_changes, 1);
    assert_at_most(r.snr_db, 6.0);
    assert_at_least(r.segment_median_db, 20.0);
    mb_release(audio);
    mb_release(message);
}

/* Audio that ends early or late is held against silence, and the blocks make no difference. */
static void lengths_may_differ_and_blocks_do_not_matter(void **state)
{
    (void)state;
    const size_t count = (size_t)SECONDS * 16000;
    float *message = speech_like(16000.0, count, 26), *audio = heard(message, count, 0, 1.0, 0.002, 27);
    const size_t blocks[] = {8000, 1000, 77};
    mb_score_result r[3];

    for (size_t i = 0; i < 3; i++) {
        lanes from = {message, audio, count, count - 48000, blocks[i]};
        r[i] = score_of(16000.0, 16000.0, &from);
    }
    assert_near(r[0].scored_s, SECONDS, 0.01);
    assert_near(r[1].snr_db, r[0].snr_db, 1e-9);
    assert_near(r[2].snr_db, r[0].snr_db, 1e-9);
    mb_release(audio);
    mb_release(message);
}

static void faults_of_the_audio_lanes_are_told(void **state)
{
    (void)state;
    static const float silence[8000];
    mb_assess_audio_settings s = mb_assess_audio_settings_default();
    mb_assess_audio *assess = NULL;
    mb_status status = MB_OK;

    s.message_rate_hz = 100.0;
    assert_fault(mb_assess_audio_create(&s, &assess), MB_ERROR_ARGUMENT, "message_rate_hz");
    s = mb_assess_audio_settings_default();
    s.audio_rate_hz = NAN;
    assert_fault(mb_assess_audio_create(&s, &assess), MB_ERROR_ARGUMENT, "audio_rate_hz");
    s = mb_assess_audio_settings_default();
    s.skip_s = -1.0;
    assert_fault(mb_assess_audio_create(&s, &assess), MB_ERROR_ARGUMENT, "skip_s");
    s = mb_assess_audio_settings_default();
    s.max_delay_s = 9.0;
    assert_fault(mb_assess_audio_create(&s, &assess), MB_ERROR_ARGUMENT, "max_delay_s");
    s = mb_assess_audio_settings_default();
    assert_ok(mb_assess_audio_create(&s, &assess));
    for (int i = 0; i < 20 && status == MB_OK; i++) {
        status = mb_assess_audio_push(assess, MB_ASSESS_AUDIO, silence, 8000);
    }
    assert_int_equal(status, MB_ERROR_ARGUMENT);
    assert_string_equal(mb_last_fault()->field, "audio");
    mb_assess_audio_end(assess, MB_ASSESS_AUDIO);
    mb_assess_audio_end(assess, MB_ASSESS_MESSAGE);
    assert_int_equal(mb_assess_audio_next(assess), MB_ASSESS_NEITHER);
    assert_int_equal(mb_assess_audio_aligned(assess), MB_ERROR_NO_SIGNAL);
    mb_assess_audio_destroy(assess);
    mb_assess_audio_destroy(NULL);
}

/* Detects air with the phase of the plan plus an error; returns the audio, whole. */
static float *ideal_audio(const emission_plan *plan, const mb_cf32 *air, size_t count, double error_rad,
                          size_t *made)
{
    mb_assess_ideal_settings s = mb_assess_ideal_settings_default();
    mb_assess_ideal *ideal = NULL;
    size_t row = 0, got = 0, block = (size_t)(plan->rate_hz / 20.0);

    s.rate_hz = plan->rate_hz;
    s.offset_hz = plan->offset_hz;
    assert_ok(mb_assess_ideal_create(&s, &ideal));
    float *out = mb_allocate(count / 2 + 4 * mb_assess_ideal_bound(ideal, block), sizeof *out);
    *made = 0;
    for (size_t done = 0; done < count; done += block) {
        size_t run = count - done < block ? count - done : block;
        while ((double)row / 100.0 < (double)(done + run) / plan->rate_hz + 0.1) {
            mb_phase_point point = {(double)row / 100.0, plan_phase(plan, (double)row / 100.0) + error_rad};
            assert_int_equal(mb_assess_ideal_truth(ideal, &point, 1), 1);
            row++;
        }
        assert_ok(mb_assess_ideal_process(ideal, air + done, run, out + *made, &got));
        *made += got;
    }
    mb_assess_ideal_truth_end(ideal);
    do {
        assert_ok(mb_assess_ideal_drain(ideal, out + *made, &got));
        *made += got;
    } while (got > 0);
    mb_assess_ideal_destroy(ideal);
    return out;
}

/* The message comes back whole at a far offset under drift, and by cos^2 less when the phase is wrong. */
static void ideal_detection_uses_the_very_phase(void **state)
{
    (void)state;
    const double errors[] = {0.0, MB_PI / 3.0};
    emission_plan plan = {.rate_hz = 240000.0,
                          .offset_hz = 40137.0,
                          .drift_hz_per_s = 2.0,
                          .phase_rad = 0.7,
                          .leak_dbc = -INFINITY,
                          .noise_db = -INFINITY};
    const size_t count = (size_t)4 * 240000;
    float *message = speech_like(plan.rate_hz, count, 31);
    mb_cf32 *air = on_air(&plan, message, count, 32);
    float *wanted = mb_allocate(count / 15, sizeof *wanted);

    for (size_t i = 0; i < count / 15; i++) {
        wanted[i] = message[15 * i];
    }
    for (size_t i = 0; i < 2; i++) {
        size_t made = 0;
        float *audio = ideal_audio(&plan, air, count, errors[i], &made);
        assert_int_equal(made, count / 15);
        lanes from = {wanted, audio, count / 15, made, 1000};
        mb_score_result r = score_of(16000.0, 16000.0, &from);
        assert_at_least(r.snr_db, 55.0);
        assert_near(r.delay_s, 0.0, 1e-4);
        assert_near(r.gain_db, mb_theory_phase_error_db(errors[i]), 0.02);
        mb_release(audio);
    }
    mb_release(wanted);
    mb_release(air);
    mb_release(message);
}

static void faults_of_ideal_detection_are_told(void **state)
{
    (void)state;
    static const mb_cf32 silence[16000];
    mb_assess_ideal_settings s = mb_assess_ideal_settings_default();
    mb_assess_ideal *ideal = NULL;
    mb_status status = MB_OK;
    size_t made = 0;

    s.rate_hz = 100.0;
    assert_fault(mb_assess_ideal_create(&s, &ideal), MB_ERROR_ARGUMENT, "rate_hz");
    s = mb_assess_ideal_settings_default();
    s.offset_hz = 24000.0;
    assert_fault(mb_assess_ideal_create(&s, &ideal), MB_ERROR_ARGUMENT, "offset_hz");
    s = mb_assess_ideal_settings_default();
    s.high_hz = 10.0;
    assert_fault(mb_assess_ideal_create(&s, &ideal), MB_ERROR_ARGUMENT, "high_hz");
    s = mb_assess_ideal_settings_default();
    assert_ok(mb_assess_ideal_create(&s, &ideal));
    float *out = mb_allocate(mb_assess_ideal_bound(ideal, 16000), sizeof *out);
    for (int i = 0; i < 20 && status == MB_OK; i++) {
        status = mb_assess_ideal_process(ideal, silence, 16000, out, &made);
        assert_int_equal(made, 0); /* no truth, no audio */
    }
    assert_int_equal(status, MB_ERROR_ARGUMENT);
    assert_string_equal(mb_last_fault()->field, "truth");
    mb_release(out);
    mb_assess_ideal_destroy(ideal);
    mb_assess_ideal_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(snr_and_delay_are_found_across_rates),
        cmocka_unit_test(any_pair_of_rates_will_do),
        cmocka_unit_test(a_turn_of_polarity_is_counted),
        cmocka_unit_test(lengths_may_differ_and_blocks_do_not_matter),
        cmocka_unit_test(faults_of_the_audio_lanes_are_told),
        cmocka_unit_test(ideal_detection_uses_the_very_phase),
        cmocka_unit_test(faults_of_ideal_detection_are_told),
    };

    return cmocka_run_group_tests(tests, NULL, NULL);
}
