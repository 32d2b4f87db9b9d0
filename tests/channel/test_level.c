/* Gain, level step and gap, on the signal or on everything; carrier leak. */
#include "samples.h"

enum { COUNT = 4800, STEP_AT = 1000, GAP_FROM = 2000, GAP_TO = 2480 };

static mb_channel_settings events(void)
{
    mb_channel_settings settings = mb_channel_settings_default();

    settings.level_step_at_s = STEP_AT / 48e3;
    settings.level_step_db = -20.0;
    settings.gap_at_s = GAP_FROM / 48e3;
    settings.gap_length_s = (GAP_TO - GAP_FROM) / 48e3;
    return settings;
}

/* Amplitude factor that the events give to a sample. */
static double factor_at(size_t n)
{
    if (n >= GAP_FROM && n < GAP_TO) {
        return 0.0;
    }
    return n >= STEP_AT ? 0.1 : 1.0;
}

static void step_and_gap_begin_and_end_on_their_samples(void **state)
{
    mb_channel_settings settings = events();
    mb_cf32 *samples = samples_of(COUNT);

    (void)state;
    settings.gain_db = 6.0;
    mb_channel *channel = channel_of(&settings);
    fill_tone(samples, COUNT, 0.0, 0.5);
    mb_channel_process(channel, samples, COUNT, samples);
    for (size_t n = 0; n < COUNT; n++) {
        assert_near(samples[n].re, 0.5 * pow(10.0, 0.3) * factor_at(n), 1e-7);
    }
    mb_channel_destroy(channel);
    free(samples);
}

/* Noise of one seed through a channel with and without events. */
static void compare_noise(bool keep_noise)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 *plain = samples_of(COUNT), *marked = samples_of(COUNT);

    settings.noise_snr_db = 10.0;
    mb_channel *channel = channel_of(&settings);
    mb_channel_process(channel, plain, COUNT, plain);
    mb_channel_destroy(channel);
    settings = events();
    settings.noise_snr_db = 10.0;
    settings.events_keep_noise = keep_noise;
    channel = channel_of(&settings);
    mb_channel_process(channel, marked, COUNT, marked);
    mb_channel_destroy(channel);
    for (size_t n = 0; n < COUNT; n++) {
        double factor = keep_noise ? 1.0 : factor_at(n);
        assert_near(marked[n].im, factor * plain[n].im, 1e-6);
    }
    free(plain);
    free(marked);
}

static void a_transmitters_events_leave_the_noise_alone(void **state)
{
    (void)state;
    compare_noise(true);
}

static void a_receivers_events_act_on_the_noise_too(void **state)
{
    (void)state;
    compare_noise(false);
}

static void the_truth_of_the_gain_is_the_same_for_both_kinds(void **state)
{
    (void)state;
    for (int keep = 0; keep < 2; keep++) {
        mb_channel_settings settings = events();
        mb_cf32 *samples = samples_of(COUNT);
        settings.events_keep_noise = keep != 0;
        mb_channel *channel = channel_of(&settings);
        mb_channel_process(channel, samples, STEP_AT, samples);
        assert_near(mb_channel_truth(channel).gain_db, 0.0, 1e-12);
        mb_channel_process(channel, samples, GAP_FROM - STEP_AT, samples);
        assert_near(mb_channel_truth(channel).gain_db, -20.0, 1e-12);
        mb_channel_process(channel, samples, GAP_TO - GAP_FROM, samples);
        assert_near(mb_channel_truth(channel).gain_db, -400.0, 1e-12);
        mb_channel_process(channel, samples, 1, samples);
        assert_near(mb_channel_truth(channel).gain_db, -20.0, 1e-12);
        mb_channel_destroy(channel);
        free(samples);
    }
}

/* Carrier power over signal_power; it goes through gain and oscillator as the signal does. */
static void the_leak_is_a_carrier_of_the_level_asked_for(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 *samples = samples_of(COUNT);

    (void)state;
    settings.signal_power = 0.2;
    settings.leak_dbc = -40.0;
    settings.leak_phase_rad = 1.0;
    settings.carrier_hz = 1000.0;
    settings.offset_hz = 500.0;
    settings.gain_db = 10.0;
    mb_channel *channel = channel_of(&settings);
    mb_channel_process(channel, samples, COUNT, samples);
    double amplitude = sqrt(0.2 * 1e-4 * 10.0);
    assert_near(samples[0].re, amplitude * cos(1.0), 1e-8);
    assert_near(samples[0].im, amplitude * sin(1.0), 1e-8);
    assert_near(mb_power_db(line_power(samples, COUNT, 1500.0 / 48e3) / (0.2 * 10.0)), -40.0, 1e-4);
    assert_near(power_of(samples, COUNT) / (amplitude * amplitude), 1.0, 1e-6);
    mb_channel_destroy(channel);
    free(samples);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(step_and_gap_begin_and_end_on_their_samples),
        cmocka_unit_test(a_transmitters_events_leave_the_noise_alone),
        cmocka_unit_test(a_receivers_events_act_on_the_noise_too),
        cmocka_unit_test(the_truth_of_the_gain_is_the_same_for_both_kinds),
        cmocka_unit_test(the_leak_is_a_carrier_of_the_level_asked_for),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
