/* Assessment of IQ samples: figures known from how the signal was made. */
#include "assess_signals.h"

enum { RATE = 48000, COUNT = 7 * RATE, SHORT = 3 * RATE };

static mb_assess_iq_settings settings_at(double rate_hz)
{
    mb_assess_iq_settings settings = mb_assess_iq_settings_default();

    settings.receive.rate_hz = rate_hz;
    return settings;
}

static mb_assess_iq_result figures_of(const emission_plan *plan, const float *message, size_t count,
                                      bool truth)
{
    mb_assess_iq_settings settings = settings_at(plan->rate_hz);
    mb_assess_iq *assess = NULL;
    mb_assess_iq_result result;
    mb_cf32 *air = on_air(plan, message, count, 5);

    assert_ok(assess_in_blocks(&settings, air, count, 4800, &assess));
    for (size_t i = 0; truth && i < count; i += (size_t)(plan->rate_hz / 100.0)) {
        double time_s = (double)i / plan->rate_hz;
        mb_assess_iq_truth(assess, time_s, plan->offset_hz + plan->drift_hz_per_s * time_s);
    }
    assert_ok(mb_assess_iq_finish(assess, &result));
    mb_assess_iq_destroy(assess);
    mb_release(air);
    return result;
}

/* A leak of -40 dBc under a drift and noise of -15 dB: docs/method-measure.md promises 0.5 dB. */
static void a_leak_is_measured_under_drift_and_noise(void **state)
{
    (void)state;
    emission_plan plan = {.rate_hz = RATE,
                          .offset_hz = 137.0,
                          .drift_hz_per_s = 0.5,
                          .phase_rad = 1.0,
                          .leak_dbc = -40.0,
                          .noise_db = -15.0};
    float *message = speech_like(RATE, COUNT, 11);
    mb_assess_iq_result r = figures_of(&plan, message, COUNT, true);

    assert_true(r.found && r.emission.carrier_found);
    assert_near(r.carrier_mean_dbc, -40.0, 0.5);
    assert_near(r.carrier_dbc - r.carrier_mean_dbc, mb_power_db(r.activity), 1e-6);
    assert_near(r.sidebands_dbfs, mb_power_db(mean_square(message, COUNT)), 0.1);
    assert_near(r.emission.balance_db, 0.0, 0.15);
    assert_near(r.carrier_drift_hz_per_s, 0.5, 0.01);
    assert_true(r.has_truth);
    /* the truth is straight, so mean found and mean truth over the same points differ by the error alone */
    assert_near(r.carrier_offset_hz - r.truth_offset_hz, r.offset_error_hz, 0.02);
    assert_near(r.offset_error_hz, 0.0, 0.02);
    assert_at_most(r.offset_rms_error_hz, 0.05);
    assert_at_least(r.lock_quality, 0.85);
    mb_release(message);
}

/* Of a clean file of 16 bits a leak of -80 dBc is measured within 0.3 dB, whatever the rate. */
static void a_leak_of_80_db_below_is_measured_in_sixteen_bits(void **state)
{
    (void)state;
    const double rates[] = {48000.0, 250000.0};

    for (size_t i = 0; i < 2; i++) {
        emission_plan plan = {.rate_hz = rates[i],
                              .offset_hz = -612.3,
                              .leak_dbc = -80.0,
                              .noise_db = -INFINITY,
                              .sixteen_bit = true};
        size_t count = (size_t)(4.0 * rates[i]);
        float *message = speech_like(rates[i], count, 12);
        mb_assess_iq_result r = figures_of(&plan, message, count, false);
        assert_true(r.found && r.emission.carrier_found);
        assert_near(r.carrier_offset_hz, -612.3, 0.005);
        assert_near(r.carrier_mean_dbc, -80.0, 0.3);
        assert_near(r.emission.balance_db, 0.0, 0.01);
        assert_false(r.has_truth);
        assert_true(isnan(r.truth_offset_hz));
        mb_release(message);
    }
}

/* Without a leak the figure is a bound, and says so. */
static void no_leak_gives_a_bound(void **state)
{
    (void)state;
    emission_plan plan = {.rate_hz = RATE, .offset_hz = 10.0, .leak_dbc = -INFINITY, .noise_db = -15.0};
    float *message = speech_like(RATE, COUNT, 13);
    mb_assess_iq_result r = figures_of(&plan, message, COUNT, false);

    assert_true(r.found);
    assert_false(r.emission.carrier_found);
    assert_at_most(r.carrier_mean_dbc, -45.0);
    mb_release(message);
}

/* The activity is that of the clean message by ITU-T P.56, though noise fills the pauses. */
static void activity_does_not_count_the_noise(void **state)
{
    (void)state;
    emission_plan plan = {.rate_hz = RATE, .offset_hz = 300.0, .leak_dbc = -INFINITY, .noise_db = -12.0};
    float *message = speech_like(RATE, COUNT, 14);
    mb_speech_meter *meter = NULL;

    assert_ok(mb_speech_meter_create(RATE, &meter));
    mb_speech_meter_process_f32(meter, message, COUNT);
    mb_assess_iq_result r = figures_of(&plan, message, COUNT, false);
    /* the hangover of 0.2 s ends where the remaining noise of 10 ms blocks lets it; 5 points = 0.2 dB */
    assert_near(r.activity, mb_speech_meter_state(meter).activity, 0.05);
    mb_speech_meter_destroy(meter);
    mb_release(message);
}

static void noise_alone_has_power_but_no_carrier(void **state)
{
    (void)state;
    mb_assess_iq_settings settings = settings_at(RATE);
    mb_assess_iq *assess = NULL;
    mb_assess_iq_result r;
    mb_random random;
    mb_cf32 *noise = mb_allocate(SHORT, sizeof *noise);

    mb_random_seed(&random, 3, 0);
    for (size_t i = 0; i < SHORT; i++) {
        noise[i] =
            (mb_cf32){(float)(0.1 * mb_random_normal(&random)), (float)(0.1 * mb_random_normal(&random))};
    }
    assert_int_equal(assess_in_blocks(&settings, noise, SHORT, 4800, &assess), MB_ERROR_NO_SIGNAL);
    mb_assess_iq_truth(assess, 0.0, 1.0); /* there is nothing to hold it against */
    assert_ok(mb_assess_iq_finish(assess, &r));
    assert_false(r.found || r.has_truth);
    assert_near(r.emission.mean_power_dbfs, mb_power_db(0.02), 0.05);
    assert_true(isnan(r.carrier_offset_hz) && isnan(r.carrier_dbc) && isnan(r.lock_quality));
    mb_assess_iq_destroy(assess);
    mb_release(noise);
}

/* Two tones of 0.25 with a cubic term: 3/4 k a^2 over the tone, both sides of each line. */
static void two_tones_show_their_products(void **state)
{
    (void)state;
    mb_assess_iq_settings settings = settings_at(RATE);
    mb_assess_iq *assess = NULL;
    mb_assess_iq_result r;
    const double k = 0.01, a = 0.25;
    mb_cf32 *air = mb_allocate(SHORT, sizeof *air);

    settings.tone_low_hz = 700.0;
    settings.tone_high_hz = 1900.0;
    for (size_t i = 0; i < SHORT; i++) {
        double t = (double)i / RATE, m = a * (cos(2.0 * MB_PI * 700.0 * t) + cos(2.0 * MB_PI * 1900.0 * t));
        double phase = 2.0 * MB_PI * 55.5 * t, x = m + k * m * m * m;
        air[i] = (mb_cf32){(float)(x * cos(phase)), (float)(x * sin(phase))};
    }
    assert_ok(assess_in_blocks(&settings, air, SHORT, 9600, &assess));
    assert_ok(mb_assess_iq_finish(assess, &r));
    assert_true(r.has_two_tone);
    assert_near(r.two_tone.third_order_db, 2.0 * mb_power_db(0.75 * k * a * a), 0.2);
    assert_near(r.emission.mean_power_dbfs, mb_power_db(a * a), 0.02);
    mb_assess_iq_destroy(assess);
    mb_release(air);
}

static void figures_do_not_depend_on_the_blocks(void **state)
{
    (void)state;
    emission_plan plan = {
        .rate_hz = RATE, .offset_hz = 137.0, .drift_hz_per_s = 0.5, .leak_dbc = -40.0, .noise_db = -20.0};
    const size_t count = SHORT, blocks[] = {SHORT, 1000, 61};
    float *message = speech_like(RATE, count, 15);
    mb_cf32 *air = on_air(&plan, message, count, 5);
    mb_assess_iq_settings settings = settings_at(RATE);
    mb_assess_iq_result first, next;

    for (size_t i = 0; i < 3; i++) {
        mb_assess_iq *assess = NULL;
        assert_ok(assess_in_blocks(&settings, air, count, blocks[i], &assess));
        assert_ok(mb_assess_iq_finish(assess, i == 0 ? &first : &next));
        mb_assess_iq_destroy(assess);
        if (i > 0) {
            assert_true(first.carrier_mean_dbc == next.carrier_mean_dbc);
            assert_true(first.emission.occupied_99_hz == next.emission.occupied_99_hz);
            assert_true(first.emission.balance_db == next.emission.balance_db);
        }
    }
    mb_release(air);
    mb_release(message);
}

static void settings_are_checked(void **state)
{
    (void)state;
    mb_assess_iq *assess = NULL;
    mb_assess_iq_settings s = settings_at(RATE);

    s.half_width_hz = 100.0;
    assert_fault(mb_assess_iq_create(&s, &assess), MB_ERROR_ARGUMENT, "half_width_hz");
    s = settings_at(RATE);
    s.resolution_hz = NAN;
    assert_fault(mb_assess_iq_create(&s, &assess), MB_ERROR_ARGUMENT, "resolution_hz");
    s = settings_at(RATE);
    s.tone_low_hz = 1900.0;
    s.tone_high_hz = 700.0;
    assert_fault(mb_assess_iq_create(&s, &assess), MB_ERROR_ARGUMENT, "tone_high_hz");
    s = settings_at(100.0);
    assert_fault(mb_assess_iq_create(&s, &assess), MB_ERROR_ARGUMENT, "rate_hz");
    assert_null(assess);
    mb_assess_iq_destroy(NULL);
}

static void too_little_is_refused(void **state)
{
    (void)state;
    mb_assess_iq_settings s = settings_at(RATE);
    mb_assess_iq *assess = NULL;
    mb_assess_iq_result r;
    static const mb_cf32 few[100];

    assert_ok(mb_assess_iq_create(&s, &assess));
    assert_int_equal(mb_assess_iq_finish(assess, &r), MB_ERROR_NO_SIGNAL);
    assert_ok(mb_assess_iq_listen(assess, few, 100));
    mb_assess_iq_process(assess, few, 100); /* before resolve: ignored */
    assert_int_equal(mb_assess_iq_resolve(assess), MB_ERROR_NO_SIGNAL);
    mb_assess_iq_process(assess, few, 100);
    assert_int_equal(mb_assess_iq_finish(assess, &r), MB_ERROR_NO_SIGNAL);
    mb_assess_iq_destroy(assess);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_leak_is_measured_under_drift_and_noise),
        cmocka_unit_test(a_leak_of_80_db_below_is_measured_in_sixteen_bits),
        cmocka_unit_test(no_leak_gives_a_bound),
        cmocka_unit_test(activity_does_not_count_the_noise),
        cmocka_unit_test(noise_alone_has_power_but_no_carrier),
        cmocka_unit_test(two_tones_show_their_products),
        cmocka_unit_test(figures_do_not_depend_on_the_blocks),
        cmocka_unit_test(settings_are_checked),
        cmocka_unit_test(too_little_is_refused),
    };

    return cmocka_run_group_tests(tests, NULL, NULL);
}
