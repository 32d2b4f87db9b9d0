/* The FIR filter convolves as scipy does, for real and complex samples, and cuts do not matter. */
#include "filter_reference.h"
#include "failing_memory.h"
#include "signals.h"
#include "stage_cuts.h"

enum { TAPS = 41, COUNT = 3000 };

static mb_fir *made_filter(void)
{
    float taps[TAPS];
    mb_fir *fir = NULL;

    for (size_t i = 0; i < TAPS; i++) {
        taps[i] = (float)reference_firwin_quarter_41[i];
    }
    mb_fir_settings settings = {taps, TAPS};
    assert_ok(mb_fir_create(&settings, &fir));
    return fir;
}

static void real_samples_are_filtered_as_by_lfilter(void **state)
{
    mb_fir *fir = made_filter();
    float samples[100];

    (void)state;
    numbers(100, samples);
    mb_fir_process_f32(fir, samples, 100, samples); /* in place */
    for (size_t i = 0; i < 100; i++) {
        assert_near(samples[i], reference_filtered[i], 3e-7); /* rounding of 41 products to float */
    }
    assert_int_equal(mb_fir_delay_samples(fir), 20);
    mb_fir_destroy(fir);
    mb_fir_destroy(NULL);
}

static void both_rails_are_filtered_alike(void **state)
{
    mb_fir *fir = made_filter();
    mb_cf32 samples[100];
    float rail[100];

    (void)state;
    numbers(100, rail);
    for (size_t i = 0; i < 100; i++) {
        samples[i] = (mb_cf32){rail[i], -2.0f * rail[i]};
    }
    mb_fir_process_cf32(fir, samples, 100, samples);
    for (size_t i = 0; i < 100; i++) {
        assert_near(samples[i].re, reference_filtered[i], 3e-7);
        assert_near(samples[i].im, -2.0 * reference_filtered[i], 6e-7);
    }
    mb_fir_destroy(fir);
}

static size_t run_real(void *stage, const void *in, size_t n, void *out)
{
    mb_fir_process_f32(stage, in, n, out);
    return n;
}

static size_t run_complex(void *stage, const void *in, size_t n, void *out)
{
    mb_fir_process_cf32(stage, in, n, out);
    return n;
}

static void reset(void *stage)
{
    mb_fir_reset(stage);
}

static void cuts_do_not_matter(void **state)
{
    static float samples[2 * COUNT];
    mb_fir *fir = made_filter();

    (void)state;
    numbers(2 * COUNT, samples);
    stage_cuts real = {fir, run_real, reset, samples, COUNT, sizeof(float), sizeof(float), COUNT};
    stage_cuts complex = {fir, run_complex, reset, samples, COUNT, sizeof(mb_cf32), sizeof(mb_cf32), COUNT};
    assert_cuts_do_not_matter(&real);
    assert_cuts_do_not_matter(&complex);
    mb_fir_destroy(fir);
}

static void what_is_no_number_counts_as_zero(void **state)
{
    mb_fir *fir = made_filter(), *clean = made_filter();
    float samples[100], others[100];

    (void)state;
    numbers(100, samples);
    samples[7] = 0.0f;
    memcpy(others, samples, sizeof samples);
    samples[7] = NAN;
    mb_fir_process_f32(fir, samples, 100, samples);
    mb_fir_process_f32(clean, others, 100, others);
    assert_memory_equal(samples, others, sizeof samples);
    assert_int_equal(mb_fir_state(fir).non_finite, 1);
    mb_fir_destroy(fir);
    mb_fir_destroy(clean);
}

static void wrong_settings_and_lack_of_memory_are_told(void **state)
{
    float tap = 1.0f;
    mb_fir_settings none = {&tap, 0}, empty = {NULL, 1}, one = {&tap, 1};
    mb_fir *fir = NULL;

    (void)state;
    assert_fault(mb_fir_create(&none, &fir), MB_ERROR_ARGUMENT, "tap_count");
    assert_fault(mb_fir_create(&empty, &fir), MB_ERROR_ARGUMENT, "taps");
    assert_survives_lack_of_memory(mb_fir_create(&one, &fir));
    mb_fir_destroy(fir);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(real_samples_are_filtered_as_by_lfilter),
        cmocka_unit_test(both_rails_are_filtered_alike),
        cmocka_unit_test(cuts_do_not_matter),
        cmocka_unit_test(what_is_no_number_counts_as_zero),
        cmocka_unit_test(wrong_settings_and_lack_of_memory_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
