/* The oscillator's phase is exact after days; its noise is a Wiener process. */
#include "check.h"

#include "channel_reference.h"
#include "oscillator.h"

enum { SEED = 66 };

static channel_oscillator oscillator_of(const oscillator_plan *plan, const channel_gauss *gauss)
{
    channel_oscillator oscillator;
    mb_random random;

    mb_random_seed(&random, SEED, 0);
    channel_oscillator_start(&oscillator, plan, gauss, &random);
    return oscillator;
}

/* Turns of a phasor less expected turns, to the nearest. */
static double turns_off(double complex phasor, double turns)
{
    double off = atan2(cimag(phasor), creal(phasor)) / (2.0 * MB_PI) - turns;

    return off - rint(off);
}

/* Against exact fractions (python). What is left is the rounding of offset/rate and drift/rate^2 to doubles:
 * one part in 2^53 of all turns so far, 1e11 of them in the worst row. */
static void phase_is_exact_after_hours_and_days(void **state)
{
    channel_gauss gauss;

    (void)state;
    channel_gauss_prepare(&gauss);
    for (size_t k = 0; k < sizeof oscillator_phases / sizeof oscillator_phases[0]; k++) {
        double rate = oscillator_phases[k].rate_hz, n = oscillator_phases[k].sample;
        oscillator_plan plan = {.rate_hz = rate,
                                .frequency_hz = oscillator_phases[k].offset_hz,
                                .drift_hz_per_s = oscillator_phases[k].drift_hz_per_s};
        channel_oscillator oscillator = oscillator_of(&plan, &gauss);
        double complex phasor;
        channel_oscillator_jump(&oscillator, (uint64_t)n);
        channel_oscillator_make(&oscillator, 1, &phasor);
        double turns =
            fabs(n * plan.frequency_hz / rate) + fabs(0.5 * n * n * plan.drift_hz_per_s / rate / rate);
        assert_near(turns_off(phasor, oscillator_phases[k].turns), 0.0, 1e-12 + turns * 0x1.0p-52);
        assert_near(hypot(creal(phasor), cimag(phasor)), 1.0, 1e-13);
    }
}

/* An hour at 8 kHz, sample by sample, against the closed form in long double. 1e-12 turns: 64 steps between
 * anchors, each with a rounding of 1e-16. */
static void phase_stays_exact_while_running(void **state)
{
    const oscillator_plan plan = {
        .rate_hz = 8e3, .frequency_hz = 137.25, .drift_hz_per_s = 0.2, .phase_rad = 1};
    static double complex phasor[1000];
    channel_gauss gauss;

    (void)state;
    channel_gauss_prepare(&gauss);
    channel_oscillator oscillator = oscillator_of(&plan, &gauss);
    for (uint64_t block = 0; block < 3600; block++) {
        channel_oscillator_make(&oscillator, 1000, phasor);
        long double t = (long double)(block * 1000 + 999) / 8000.0L;
        long double turns = 137.25L * t + 0.1L * t * t + 0.5L / acosl(-1.0L);
        assert_near(turns_off(phasor[999], (double)(turns - rintl(turns))), 0.0, 1e-11);
    }
    double rad = channel_oscillator_phase(&oscillator, oscillator.sample - 1);
    double t = 3599999.0 / 8000.0;
    assert_near(rad, 1.0 + 2.0 * MB_PI * (137.25 * t + 0.1 * t * t), 1e-8);
}

static void frequency_moves_with_the_drift(void **state)
{
    const oscillator_plan plan = {.rate_hz = 8e3, .frequency_hz = -50.0, .drift_hz_per_s = 5.0};
    double complex phasor[2];
    channel_gauss gauss;

    (void)state;
    channel_gauss_prepare(&gauss);
    channel_oscillator oscillator = oscillator_of(&plan, &gauss);
    for (uint64_t at_s = 0; at_s < 60; at_s += 7) {
        channel_oscillator_jump(&oscillator, at_s * 8000);
        channel_oscillator_make(&oscillator, 2, phasor);
        double complex step = phasor[1] * conj(phasor[0]);
        double frequency_hz = atan2(cimag(step), creal(step)) / (2.0 * MB_PI) * 8e3;
        /* the step lies half a sample later */
        assert_near(frequency_hz, -50.0 + 5.0 * ((double)at_s + 0.5 / 8e3), 1e-9);
    }
}

/* FACTS D: variance growth 2 pi dn tau; 1 Hz, 1 ms: 4.5416 deg rms. 100000 increments that do not overlap:
 * relative standard deviation of their variance 0.45 %, tolerance four of them. */
static void phase_noise_grows_as_a_wiener_process(void **state)
{
    enum { COUNT = 100000 };
    const oscillator_plan plan = {.rate_hz = 8e3, .linewidth_hz = 1.0};
    double complex phasor[80];
    double short_sum = 0.0, long_sum = 0.0, before = 0.0, long_before = 0.0;
    channel_gauss gauss;

    (void)state;
    print_message("seed %d\n", SEED);
    channel_gauss_prepare(&gauss);
    channel_oscillator oscillator = oscillator_of(&plan, &gauss);
    channel_oscillator_make(&oscillator, 1, phasor);
    assert_true(oscillator.noise_rad == 0.0);
    for (int i = 0; i < COUNT; i++) {
        channel_oscillator_make(&oscillator, 8, phasor);
        double step = oscillator.noise_rad - before;
        short_sum += step * step;
        before = oscillator.noise_rad;
        assert_near(turns_off(phasor[7], before / (2.0 * MB_PI)), 0.0, 1e-12);
        if (i % 10 == 9) {
            long_sum += (before - long_before) * (before - long_before);
            long_before = before;
        }
    }
    assert_near(sqrt(short_sum / COUNT) * 180.0 / MB_PI, 4.5416, 4.5416 * 0.01);
    /* ten times the time, ten times the variance: the steps are independent */
    assert_near(long_sum / (COUNT / 10.0) / (2.0 * MB_PI * 0.01), 1.0, 4.0 * sqrt(2.0 / (COUNT / 10.0)));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(phase_is_exact_after_hours_and_days),
        cmocka_unit_test(phase_stays_exact_while_running),
        cmocka_unit_test(frequency_moves_with_the_drift),
        cmocka_unit_test(phase_noise_grows_as_a_wiener_process),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
