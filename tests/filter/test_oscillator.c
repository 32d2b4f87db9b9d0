/* The oscillator's phase is exact for ever and its samples are pure. */
#include "signals.h"

enum { COUNT = 20000 };

static void samples_are_those_of_a_pure_tone(void **state)
{
    static const double frequencies[] = {0.0, 137.0, -1e-3, 7999.9, -8000.0, 4000.0, 2718.281828};
    static mb_cf32 ones[COUNT], made[COUNT];

    (void)state;
    for (size_t i = 0; i < COUNT; i++) {
        ones[i] = (mb_cf32){1.0f, 0.0f};
    }
    for (size_t f = 0; f < sizeof frequencies / sizeof frequencies[0]; f++) {
        mb_oscillator oscillator = {0, 0};
        double error = 0.0;
        mb_oscillator_set(&oscillator, frequencies[f], 16000.0);
        mb_oscillator_rotate(&oscillator, ones, COUNT, made);
        for (size_t k = 0; k < COUNT; k++) {
            double angle = 2.0 * MB_PI * fmod(frequencies[f] / 16000.0 * (double)k, 1.0);
            error += pow((double)made[k].re - cos(angle), 2.0) + pow((double)made[k].im - sin(angle), 2.0);
        }
        assert_at_most(mb_power_db(error / COUNT), -135.0); /* 24-bit numbers leave -144 dB at best */
    }
}

static void small_steps_are_not_lost(void **state)
{
    /* STYLE.md, traps: an oscillator that loses steps of -1e-7 rad; a thousand of them must move the phase by
     * -1e-4 */
    mb_oscillator oscillator = {0, 0};
    mb_cf32 one = {1.0f, 0.0f}, out;

    (void)state;
    mb_oscillator_set(&oscillator, -1e-7, 2.0 * MB_PI);
    for (int i = 0; i < 1000; i++) {
        mb_oscillator_rotate(&oscillator, &one, 1, &out);
    }
    assert_near((double)(int64_t)oscillator.phase * 2.0 * MB_PI * 0x1.0p-64, -1e-4, 1e-12);
}

static void phase_goes_on_when_the_frequency_changes(void **state)
{
    mb_oscillator oscillator = {0, 0};
    mb_cf32 ones[100], out[100];

    (void)state;
    for (size_t i = 0; i < 100; i++) {
        ones[i] = (mb_cf32){1.0f, 0.0f};
    }
    mb_oscillator_set(&oscillator, 100.0, 1000.0);
    mb_oscillator_rotate(&oscillator, ones, 25, out); /* two turns and a half */
    mb_oscillator_set(&oscillator, -200.0, 1000.0);
    mb_oscillator_rotate(&oscillator, ones, 2, out);
    assert_near(out[0].re, -1.0, 1e-6);
    assert_near(out[1].re, -cos(0.4 * MB_PI), 1e-6);
    assert_near(out[1].im, sin(0.4 * MB_PI), 1e-6);
}

static void days_of_samples_leave_the_phase_exact(void **state)
{
    /* 1/4 + 1/1024 of the rate has a step without rounding: after any multiple of 1024 samples the phase is 0
     */
    mb_oscillator oscillator = {0, 0};
    static mb_cf32 samples[1024];

    (void)state;
    mb_oscillator_set(&oscillator, 257.0, 1024.0);
    for (int i = 0; i < 1000; i++) {
        mb_oscillator_rotate(&oscillator, samples, 1024, samples);
    }
    assert_true(oscillator.phase == 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(samples_are_those_of_a_pure_tone),
        cmocka_unit_test(small_steps_are_not_lost),
        cmocka_unit_test(phase_goes_on_when_the_frequency_changes),
        cmocka_unit_test(days_of_samples_leave_the_phase_exact),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
