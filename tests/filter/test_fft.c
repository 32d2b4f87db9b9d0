/* The transform is numpy's, and its inverse leads back. */
#include "filter_reference.h"
#include "failing_memory.h"
#include "signals.h"

enum { LENGTH = 60 };

static void load(mb_cf32 *samples)
{
    float both[2 * LENGTH];

    numbers(2 * LENGTH, both);
    for (size_t i = 0; i < LENGTH; i++) {
        samples[i] = (mb_cf32){both[i], both[LENGTH + i]};
    }
}

static void the_transform_is_that_of_numpy(void **state)
{
    mb_cf32 samples[LENGTH], spectrum[LENGTH];
    mb_fft *fft = NULL;

    (void)state;
    load(samples);
    assert_ok(mb_fft_create(LENGTH, false, &fft));
    mb_fft_process(fft, samples, spectrum);
    for (size_t i = 0; i < LENGTH; i++) { /* single precision: some 1e-7 of the root of the energy, about 6 */
        assert_near(spectrum[i].re, reference_fft_re[i], 4e-6);
        assert_near(spectrum[i].im, reference_fft_im[i], 4e-6);
    }
    mb_fft_destroy(fft);
}

static void the_inverse_leads_back_in_place(void **state)
{
    mb_cf32 samples[LENGTH], work[LENGTH];
    mb_fft *forward = NULL, *back = NULL;

    (void)state;
    load(samples);
    memcpy(work, samples, sizeof work);
    assert_ok(mb_fft_create(LENGTH, false, &forward));
    assert_ok(mb_fft_create(LENGTH, true, &back));
    mb_fft_process(forward, work, work);
    mb_fft_process(back, work, work);
    for (size_t i = 0; i < LENGTH; i++) {
        assert_near(work[i].re / LENGTH, samples[i].re, 1e-6);
        assert_near(work[i].im / LENGTH, samples[i].im, 1e-6);
    }
    mb_fft_destroy(forward);
    mb_fft_destroy(back);
    mb_fft_destroy(NULL);
}

static void wrong_lengths_and_lack_of_memory_are_told(void **state)
{
    mb_fft *fft = NULL;

    (void)state;
    assert_fault(mb_fft_create(0, false, &fft), MB_ERROR_ARGUMENT, "length");
    assert_fault(mb_fft_create((size_t)1 << 27, false, &fft), MB_ERROR_ARGUMENT, "length");
    assert_survives_lack_of_memory(mb_fft_create(LENGTH, false, &fft));
    mb_fft_destroy(fft);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_transform_is_that_of_numpy),
        cmocka_unit_test(the_inverse_leads_back_in_place),
        cmocka_unit_test(wrong_lengths_and_lack_of_memory_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
