/* The resampler gives what scipy's gives, at any pair of rates, without drift, images or aliases. */
#include "filter_reference.h"
#include "failing_memory.h"
#include "signals.h"
#include "stage_cuts.h"

static mb_resampler *made_resampler(double in_hz, double out_hz)
{
    mb_resampler_settings settings = mb_resampler_settings_default();
    mb_resampler *resampler = NULL;

    settings.rate_in_hz = in_hz;
    settings.rate_out_hz = out_hz;
    assert_ok(mb_resampler_create(&settings, &resampler));
    return resampler;
}

/* resample_poly gives the signal itself at the places asked for; ours comes a whole number of outputs late if
 * zeros go before it. Tolerance: -100 dB of a signal of size 1. */
static void compare_with_scipy(double in_hz, double out_hz, const double *reference, size_t first)
{
    mb_resampler *resampler = made_resampler(in_hz, out_hz);
    float *in = calloc(2 * REFERENCE_COUNT, sizeof *in), *out = calloc(8 * REFERENCE_COUNT, sizeof *out);
    size_t zeros = 0, late = (size_t)lrint(mb_resampler_delay_s(resampler) * in_hz);

    while (fabs(remainder((double)(late + zeros) * out_hz / in_hz, 1.0)) > 1e-9) {
        zeros++;
    }
    for (size_t i = 0; i < REFERENCE_COUNT; i++) {
        in[zeros + i] = (float)reference_band_limited[i];
    }
    size_t shift = (size_t)lrint((double)(late + zeros) * out_hz / in_hz);
    size_t made = mb_resampler_process_f32(resampler, in, zeros + REFERENCE_COUNT + late, out);
    assert_true(made >= first + 200 + shift &&
                made <= mb_resampler_output_bound(resampler, 2 * REFERENCE_COUNT));
    for (size_t k = 0; k < 200; k++) {
        assert_near(out[first + shift + k], reference[k], 1e-5);
    }
    mb_resampler_destroy(resampler);
    free(in);
    free(out);
}

static void samples_are_those_of_resample_poly(void **state)
{
    (void)state;
    compare_with_scipy(16000.0, 48000.0, reference_up_3, 1500);
    compare_with_scipy(32000.0, 16000.0, reference_down_2, 200);
    compare_with_scipy(16000.0, 20000.0, reference_5_of_4, 600);
}

/* Rates whose table is exact and rates whose table is interpolated. */
static const double pairs[][2] = {{48000.0, 16000.0}, {44100.0, 48000.0},   {250000.0, 16000.0},
                                  {16000.0, 78125.0}, {48000.123, 48000.0}, {44100.0, 44101.337},
                                  {16000.0, 16000.0}, {1.024e6, 44100.0}};

/* All that is not the tone, in dB below it, and the tone's own gain and phase at the stated delay. */
static void check_tone(mb_resampler *resampler, const double *rates, double frequency_hz)
{
    double delay_s = mb_resampler_delay_s(resampler), re, im;
    size_t count = (size_t)((2.0 * delay_s + 0.02) * rates[0]), skip = (size_t)(2.0 * delay_s * rates[1]) + 2;
    mb_cf32 *in = calloc(count, sizeof *in);
    mb_cf32 *out = calloc(mb_resampler_output_bound(resampler, count), sizeof *out);

    mb_resampler_reset(resampler);
    tone(frequency_hz, rates[0], 1.0, count, in);
    size_t made = mb_resampler_process_cf32(resampler, in, count, out), kept = made - skip;
    line_at(out + skip, kept, frequency_hz, rates[1], (double)skip / rates[1] - delay_s, &re, &im);
    assert_near(re, 1.0, 5e-5);
    assert_near(im, 0.0, 2e-6); /* the delay is exact */
    double error = 0.0;
    for (size_t k = 0; k < kept; k++) {
        double angle = 2.0 * MB_PI * fmod(frequency_hz * ((double)(k + skip) / rates[1] - delay_s), 1.0);
        error += pow((double)out[skip + k].re - re * cos(angle), 2.0) +
                 pow((double)out[skip + k].im - re * sin(angle), 2.0);
    }
    assert_at_most(mb_power_db(error / (double)kept), -100.0);
    free(in);
    free(out);
}

static void tones_come_through_pure_and_on_time(void **state)
{
    static const double shares[] = {0.0123, 0.2, 0.449};

    (void)state;
    for (size_t p = 0; p < sizeof pairs / sizeof pairs[0]; p++) {
        mb_resampler *resampler = made_resampler(pairs[p][0], pairs[p][1]);
        for (size_t s = 0; s < 3; s++) {
            check_tone(resampler, pairs[p], shares[s] * fmin(pairs[p][0], pairs[p][1]));
        }
        mb_resampler_destroy(resampler);
    }
}

static void what_would_fold_into_the_passband_is_gone(void **state)
{
    static mb_cf32 in[20000], out[20000];

    (void)state;
    for (double frequency_hz = 8800.0; frequency_hz < 24000.0; frequency_hz += 317.0) {
        mb_resampler *resampler = made_resampler(48000.0, 16000.0);
        tone(frequency_hz, 48000.0, 1.0, 4000, in);
        size_t made = mb_resampler_process_cf32(resampler, in, 4000, out);
        assert_at_most(mean_db(out + 300, made - 300), -100.0);
        mb_resampler_destroy(resampler);
    }
}

static void counts_are_exact_over_any_length(void **state)
{
    static float in[1000], out[2000];
    mb_resampler *resampler = made_resampler(48000.0, 44100.0);
    uint64_t made = 0;

    (void)state;
    for (int i = 0; i < 480; i++) { /* 10 s */
        made += mb_resampler_process_f32(resampler, in, 1000, out);
    }
    assert_int_equal(made, 441000);
    mb_resampler_destroy(resampler);
}

static size_t run_real(void *stage, const void *in, size_t n, void *out)
{
    return mb_resampler_process_f32(stage, in, n, out);
}

static size_t run_complex(void *stage, const void *in, size_t n, void *out)
{
    return mb_resampler_process_cf32(stage, in, n, out);
}

static void reset(void *stage)
{
    mb_resampler_reset(stage);
}

static void cuts_do_not_matter(void **state)
{
    static float samples[6000];

    (void)state;
    numbers(6000, samples);
    for (size_t p = 0; p < 6; p++) {
        mb_resampler *resampler = made_resampler(pairs[p][0], pairs[p][1]);
        size_t bound = mb_resampler_output_bound(resampler, 3000);
        stage_cuts real = {resampler, run_real, reset, samples, 3000, sizeof(float), sizeof(float), bound};
        stage_cuts both = {resampler, run_complex,     reset,           samples,
                           3000,      sizeof(mb_cf32), sizeof(mb_cf32), bound};
        assert_cuts_do_not_matter(&real);
        assert_cuts_do_not_matter(&both);
        mb_resampler_destroy(resampler);
    }
}

static void what_is_no_number_counts_as_zero(void **state)
{
    mb_cf32 in[50] = {{0.0f, 0.0f}}, out[50];
    mb_resampler *resampler = made_resampler(16000.0, 16000.0);

    (void)state;
    in[3].im = NAN;
    in[9].re = INFINITY;
    size_t made = mb_resampler_process_cf32(resampler, in, 50, out);
    for (size_t i = 0; i < made; i++) {
        assert_true(out[i].re == 0.0f && out[i].im == 0.0f);
    }
    assert_int_equal(mb_resampler_state(resampler).non_finite, 2);
    mb_resampler_destroy(resampler);
}

static void fault(double in_hz, double out_hz, double passband_hz, double attenuation_db, const char *field)
{
    mb_resampler_settings settings = {in_hz, out_hz, passband_hz, attenuation_db};
    mb_resampler *resampler = NULL;

    assert_fault(mb_resampler_create(&settings, &resampler), MB_ERROR_ARGUMENT, field);
    assert_null(resampler);
}

static void wrong_settings_and_lack_of_memory_are_told(void **state)
{
    mb_resampler_settings settings = mb_resampler_settings_default();
    mb_resampler *resampler = NULL;

    (void)state;
    fault(0.0, 16000.0, 0.0, 80.0, "rate_in_hz");
    fault(16000.0, NAN, 0.0, 80.0, "rate_out_hz");
    fault(16000.0, 48000.0, 8000.0, 80.0, "passband_hz");
    fault(16000.0, 48000.0, -1.0, 80.0, "passband_hz");
    fault(16000.0, 48000.0, 0.0, 200.0, "attenuation_db");
    fault(1e9, 1.0, 0.0, 80.0, "passband_hz");
    assert_survives_lack_of_memory(mb_resampler_create(&settings, &resampler));
    mb_resampler_destroy(resampler);
    mb_resampler_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(samples_are_those_of_resample_poly),
        cmocka_unit_test(tones_come_through_pure_and_on_time),
        cmocka_unit_test(what_would_fold_into_the_passband_is_gone),
        cmocka_unit_test(counts_are_exact_over_any_length),
        cmocka_unit_test(cuts_do_not_matter),
        cmocka_unit_test(what_is_no_number_counts_as_zero),
        cmocka_unit_test(wrong_settings_and_lack_of_memory_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
