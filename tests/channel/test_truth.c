/* The truth is what was done: undoing it gives the message back. */
#include "samples.h"

enum { SEED = 77, COUNT = 96000, STEP_AT = 24000, GAP_FROM = 40000, GAP_TO = 44000 };

/* Truth of every sample, kept by a callback. */
typedef struct truth_log {
    mb_truth *rows;
    size_t count, room;
} truth_log;

static void keep(void *user, const mb_truth *truth)
{
    truth_log *log = user;

    assert_true(log->count < log->room);
    log->rows[log->count++] = *truth;
}

static truth_log log_of(size_t room)
{
    truth_log log = {.rows = calloc(room, sizeof(mb_truth)), .room = room};

    assert_non_null(log.rows);
    return log;
}

/* A real message: two tones in the voice band at 8 kHz, power 0.25. */
static void fill_message(mb_cf32 *samples, size_t count)
{
    for (size_t n = 0; n < count; n++) {
        double t = (double)n / 8e3;
        samples[n] = (mb_cf32){
            (float)(0.5 * sin(2.0 * MB_PI * 700.0 * t) + 0.5 * cos(2.0 * MB_PI * 1900.0 * t)), 0.0f};
    }
}

static mb_channel_settings moving_settings(void)
{
    mb_channel_settings settings = mb_channel_settings_default();

    settings.rate_hz = 8e3;
    settings.seed = SEED;
    settings.offset_hz = 137.0;
    settings.drift_hz_per_s = 0.2;
    settings.random_phase = true;
    settings.phase_noise_linewidth_hz = 0.5;
    settings.gain_db = -3.0;
    return settings;
}

/* Largest power of the difference x exp(-j phase)/gain - message, relative to the message, where there is no
 * gap. With one path the gain is that path's. */
static double worst_after_undoing(const mb_cf32 *message, const mb_cf32 *heard, const truth_log *log)
{
    double error = 0.0, power = 0.0;

    for (size_t n = 0; n < log->count; n++) {
        const mb_truth *truth = &log->rows[n];
        if (truth->gain_db > -300.0) {
            double gain = sqrt(mb_db_power(truth->gain_db)) * hypot(truth->path_re[0], truth->path_im[0]);
            double c = cos(truth->carrier_phase_rad), s = -sin(truth->carrier_phase_rad);
            double re = heard[n].re * c - heard[n].im * s - gain * message[n].re;
            double im = heard[n].re * s + heard[n].im * c;
            error += re * re + im * im;
            power += gain * gain * message[n].re * message[n].re;
        }
    }
    return mb_power_db(error / power);
}

/* Offset, drift, phase, phase noise, gain, step, gap and flat fading undone by the truth, sample by sample:
 * what is left is the rounding of float samples, -80 dB asked for. */
static void derotating_by_the_truth_gives_the_message_back(void **state)
{
    mb_channel_settings settings = moving_settings();
    mb_cf32 *message = samples_of(COUNT), *heard = samples_of(COUNT);
    truth_log log = log_of(COUNT);

    (void)state;
    print_message("seed %d\n", SEED);
    settings.paths = 1;
    settings.doppler_spread_hz = 2.0;
    settings.level_step_at_s = STEP_AT / 8e3;
    settings.level_step_db = 10.0;
    settings.gap_at_s = GAP_FROM / 8e3;
    settings.gap_length_s = (GAP_TO - GAP_FROM) / 8e3;
    mb_channel *channel = channel_of(&settings);
    fill_message(message, COUNT);
    mb_channel_set_truth_callback(channel, 1, keep, &log);
    mb_channel_process(channel, message, COUNT, heard);
    assert_int_equal(log.count, COUNT);
    assert_at_most(worst_after_undoing(message, heard, &log), -130.0);
    for (size_t n = GAP_FROM; n < GAP_TO; n++) {
        assert_true(heard[n].re == 0.0f && heard[n].im == 0.0f && log.rows[n].gain_db == -400.0);
    }
    assert_near(log.rows[GAP_FROM - 1].gain_db, 7.0, 1e-12);
    assert_near(log.rows[STEP_AT - 1].gain_db, -3.0, 1e-12);
    assert_near(log.rows[GAP_TO].gain_db, 7.0, 1e-12);
    mb_channel_destroy(channel);
    free(log.rows);
    free(message);
    free(heard);
}

/* Two paths rebuilt from the truth: oscillator phase = carrier phase less the coherent phase of the paths. */
static void the_path_gains_of_the_truth_rebuild_the_output(void **state)
{
    mb_channel_settings settings = moving_settings();
    mb_cf32 *message = samples_of(COUNT), *heard = samples_of(COUNT);
    truth_log log = log_of(COUNT);
    double error = 0.0;

    (void)state;
    assert_ok(mb_channel_settings_fading(&settings, "low-disturbed"));
    mb_channel *channel = channel_of(&settings);
    size_t delay = (size_t)rint(mb_channel_state(channel).delay_s * 8e3);
    fill_message(message, COUNT);
    mb_channel_set_truth_callback(channel, 1, keep, &log);
    mb_channel_process(channel, message, COUNT, heard);
    for (size_t n = delay; n < COUNT; n++) {
        const mb_truth *truth = &log.rows[n];
        double gain = sqrt(mb_db_power(-3.0));
        double phase = truth->carrier_phase_rad -
                       mb_fading_phase(truth->path_re, truth->path_im, settings.delay_s, 300.0, 2700.0);
        double first = message[n].re, second = message[n - delay].re;
        double re = gain * (truth->path_re[0] * first + truth->path_re[1] * second);
        double im = gain * (truth->path_im[0] * first + truth->path_im[1] * second);
        double off_re = heard[n].re - (re * cos(phase) - im * sin(phase));
        double off_im = heard[n].im - (re * sin(phase) + im * cos(phase));
        error += off_re * off_re + off_im * off_im;
    }
    assert_at_most(mb_power_db(error / power_of(heard, COUNT) / COUNT), -130.0);
    mb_channel_destroy(channel);
    free(log.rows);
    free(message);
    free(heard);
}

/* Power of the in-phase arm with the truth's phase turned by `off`, of a white message in the voice band. */
static double in_phase_power(const mb_cf32 *heard, const truth_log *log, double off)
{
    double sum = 0.0;

    for (size_t n = 0; n < log->count; n++) {
        double phase = log->rows[n].carrier_phase_rad + off;
        double re = heard[n].re * cos(phase) + heard[n].im * sin(phase);
        sum += re * re;
    }
    return sum / (double)log->count;
}

/* A message flat from 300 to 2700 Hz: 241 tones of random phase. */
static void fill_flat_message(mb_cf32 *samples, size_t count)
{
    mb_random random;

    mb_random_seed(&random, SEED, 0);
    for (int tone = 0; tone <= 240; tone++) {
        double angle = 2.0 * MB_PI * mb_random_uniform(&random);
        double step = 2.0 * MB_PI * (300.0 + 10.0 * tone) / 8e3;
        for (size_t n = 0; n < count; n++) {
            samples[n].re += (float)(0.05 * cos(angle + step * (double)n));
        }
    }
}

/* With slow fading the phase of the truth is the one with most in the in-phase arm: the maximum of a parabola
 * through three phases lies at 0. 0.02 rad: the message is only flat on average over the fades. */
static void the_phase_of_the_truth_is_the_best_for_a_detector(void **state)
{
    mb_channel_settings settings = moving_settings();
    mb_cf32 *message = samples_of(COUNT), *heard = samples_of(COUNT);

    (void)state;
    fill_flat_message(message, COUNT);
    assert_ok(mb_channel_settings_fading(&settings, "mid-moderate"));
    for (uint64_t seed = SEED; seed < SEED + 3; seed++) {
        truth_log log = log_of(COUNT);
        settings.seed = seed;
        mb_channel *channel = channel_of(&settings);
        mb_channel_set_truth_callback(channel, 1, keep, &log);
        mb_channel_process(channel, message, COUNT, heard);
        double low = in_phase_power(heard, &log, -0.3), high = in_phase_power(heard, &log, 0.3);
        double middle = in_phase_power(heard, &log, 0.0);
        assert_true(middle > low && middle > high);
        assert_near(0.15 * (high - low) / (2.0 * middle - low - high), 0.0, 0.02);
        mb_channel_destroy(channel);
        free(log.rows);
    }
    free(message);
    free(heard);
}

/* The low frequencies never change their sign against the phase of the truth. */
static void the_branch_of_the_phase_follows_the_sum_of_the_paths(void **state)
{
    mb_channel_settings settings = moving_settings();
    mb_cf32 *samples = samples_of(COUNT);
    truth_log log = log_of(COUNT);

    (void)state;
    settings.offset_hz = settings.drift_hz_per_s = settings.phase_noise_linewidth_hz = 0.0;
    settings.random_phase = false;
    assert_ok(mb_channel_settings_fading(&settings, "high-moderate"));
    mb_channel *channel = channel_of(&settings);
    mb_channel_set_truth_callback(channel, 1, keep, &log);
    mb_channel_process(channel, samples, COUNT, samples);
    for (size_t n = 0; n < COUNT; n++) {
        const mb_truth *truth = &log.rows[n];
        double re = truth->path_re[0] + truth->path_re[1], im = truth->path_im[0] + truth->path_im[1];
        double phase = truth->carrier_phase_rad;
        assert_at_least(re * cos(phase) + im * sin(phase), -1e-9);
    }
    mb_channel_destroy(channel);
    free(log.rows);
    free(samples);
}

/* One path of 2 Hz spread: its phase moves little from sample to sample but in the depth of a fade. */
static void the_phase_is_unwrapped(void **state)
{
    mb_channel_settings settings = moving_settings();
    mb_cf32 *samples = samples_of(COUNT);
    truth_log log = log_of(COUNT);

    (void)state;
    settings.paths = 1;
    settings.doppler_spread_hz = 2.0;
    settings.phase_noise_linewidth_hz = 0.0;
    mb_channel *channel = channel_of(&settings);
    mb_channel_set_truth_callback(channel, 1, keep, &log);
    mb_channel_process(channel, samples, COUNT, samples);
    for (size_t n = 1; n < COUNT; n++) {
        double step = log.rows[n].carrier_phase_rad - log.rows[n - 1].carrier_phase_rad;
        assert_near(step, 2.0 * MB_PI * log.rows[n].carrier_offset_hz / 8e3, 0.5);
    }
    mb_channel_destroy(channel);
    free(log.rows);
    free(samples);
}

static void the_truth_comes_at_the_samples_asked_for(void **state)
{
    mb_channel_settings settings = moving_settings();
    mb_cf32 *samples = samples_of(1000);
    truth_log log = log_of(1000);

    (void)state;
    mb_channel *channel = channel_of(&settings);
    assert_int_equal(mb_channel_truth(channel).sample, 0);
    mb_channel_set_truth_callback(channel, 80, keep, &log); /* 10 ms */
    for (size_t at = 0; at < 1000; at += 125) {
        mb_channel_process(channel, samples + at, 125, samples + at);
    }
    assert_int_equal(log.count, 13);
    for (size_t k = 0; k < log.count; k++) {
        assert_int_equal(log.rows[k].sample, 80 * k);
        assert_near(log.rows[k].time_s, 0.01 * (double)k, 1e-15);
        assert_near(log.rows[k].carrier_offset_hz, 137.0 + 0.2 * 0.01 * (double)k, 1e-12);
    }
    assert_int_equal(mb_channel_truth(channel).sample, 999);
    mb_channel_set_truth_callback(channel, 80, NULL, NULL);
    mb_channel_process(channel, samples, 1000, samples);
    assert_int_equal(log.count, 13);
    mb_channel_destroy(channel);
    free(log.rows);
    free(samples);
}

/* Output and truth against the closed form, in the order of the settings: phase + 2 pi (offset t + drift
 * t^2/2). 12 s at 8 kHz; float samples. */
static void the_oscillator_does_what_the_settings_say(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 *samples = samples_of(COUNT);

    (void)state;
    settings.rate_hz = 8e3;
    settings.offset_hz = -331.25;
    settings.drift_hz_per_s = 7.5;
    settings.phase_rad = 0.4;
    mb_channel *channel = channel_of(&settings);
    fill_tone(samples, COUNT, 0.0, 1.0);
    mb_channel_process(channel, samples, COUNT, samples);
    for (size_t n = 0; n < COUNT; n += 999) {
        double t = (double)n / 8e3, phase = 0.4 + 2.0 * MB_PI * (-331.25 * t + 3.75 * t * t);
        assert_near(samples[n].re, cos(phase), 2e-7);
        assert_near(samples[n].im, sin(phase), 2e-7);
    }
    double t = (COUNT - 1) / 8e3;
    mb_truth truth = mb_channel_truth(channel);
    assert_near(truth.carrier_phase_rad, 0.4 + 2.0 * MB_PI * (-331.25 * t + 3.75 * t * t), 1e-8);
    assert_near(truth.carrier_offset_hz, -331.25 + 7.5 * t, 1e-9);
    mb_channel_destroy(channel);
    free(samples);
}

/* What the paths do to the carrier itself, seen by its leak. */
static void path_gains_are_those_at_the_carrier(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 *samples = samples_of(COUNT);

    (void)state;
    settings.rate_hz = 8e3;
    settings.carrier_hz = 1130.0;
    settings.leak_dbc = 0.0;
    settings.paths = 2;
    settings.delay_s = 2e-3;
    mb_channel *channel = channel_of(&settings);
    mb_channel_process(channel, samples, COUNT, samples);
    mb_truth truth = mb_channel_truth(channel);
    double angle = 2.0 * MB_PI * fmod(1130.0 * (COUNT - 1) / 8e3, 1.0);
    double re = truth.path_re[0] + truth.path_re[1], im = truth.path_im[0] + truth.path_im[1];
    assert_near(samples[COUNT - 1].re, re * cos(angle) - im * sin(angle), 1e-6);
    assert_near(samples[COUNT - 1].im, re * sin(angle) + im * cos(angle), 1e-6);
    mb_channel_destroy(channel);
    free(samples);
}

/* Power in over power out of a flat message; 241 tones are flat to 0.02 dB. */
static void the_power_gain_of_the_truth_is_that_of_a_flat_message(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 *message = samples_of(COUNT), *heard = samples_of(COUNT);

    (void)state;
    fill_flat_message(message, COUNT);
    settings.rate_hz = 8e3;
    settings.paths = 2;
    for (int delay = 0; delay < 5; delay++) {
        settings.delay_s = delay / 8e3;
        mb_channel *channel = channel_of(&settings);
        mb_channel_process(channel, message, COUNT, heard);
        double gain_db = mb_power_db(power_of(heard, COUNT) / power_of(message, COUNT));
        assert_near(mb_channel_truth(channel).fading_db, gain_db, 0.03);
        mb_channel_destroy(channel);
    }
    free(message);
    free(heard);
}

/* A message on a carrier away from the centre: the truth includes carrier_hz, also with a delayed path. */
static void a_carrier_off_the_centre_is_part_of_the_truth(void **state)
{
    mb_channel_settings settings = moving_settings();
    mb_cf32 *message = samples_of(COUNT), *sent = samples_of(COUNT), *heard = samples_of(COUNT);
    truth_log log = log_of(COUNT);

    (void)state;
    settings.carrier_hz = 1003.0;
    settings.paths = 2;
    settings.delay_s = 0.125e-3; /* one sample */
    settings.second_path_db = -40.0;
    mb_channel *channel = channel_of(&settings);
    fill_message(message, COUNT);
    for (size_t n = 0; n < COUNT; n++) {
        double angle = 2.0 * MB_PI * 1003.0 * (double)n / 8e3;
        sent[n] = (mb_cf32){(float)(message[n].re * cos(angle)), (float)(message[n].re * sin(angle))};
    }
    mb_channel_set_truth_callback(channel, 1, keep, &log);
    mb_channel_process(channel, sent, COUNT, heard);
    assert_near(log.rows[0].carrier_offset_hz, 1140.0, 1e-9);
    /* what the second path adds 40 dB down is the only thing left, in phase to first order */
    assert_at_most(worst_after_undoing(message, heard, &log), -38.0);
    double quadrature = 0.0;
    for (size_t n = 0; n < COUNT; n++) {
        double phase = log.rows[n].carrier_phase_rad;
        double im = heard[n].im * cos(phase) - heard[n].re * sin(phase);
        quadrature += im * im;
    }
    assert_at_most(mb_power_db(quadrature / COUNT / power_of(heard, COUNT)), -38.0);
    mb_channel_destroy(channel);
    free(log.rows);
    free(message);
    free(sent);
    free(heard);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(derotating_by_the_truth_gives_the_message_back),
        cmocka_unit_test(the_path_gains_of_the_truth_rebuild_the_output),
        cmocka_unit_test(the_phase_of_the_truth_is_the_best_for_a_detector),
        cmocka_unit_test(the_branch_of_the_phase_follows_the_sum_of_the_paths),
        cmocka_unit_test(the_phase_is_unwrapped),
        cmocka_unit_test(the_truth_comes_at_the_samples_asked_for),
        cmocka_unit_test(a_carrier_off_the_centre_is_part_of_the_truth),
        cmocka_unit_test(the_oscillator_does_what_the_settings_say),
        cmocka_unit_test(path_gains_are_those_at_the_carrier),
        cmocka_unit_test(the_power_gain_of_the_truth_is_that_of_a_flat_message),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
