#include "mirrorband/filter.h"

#include <math.h>
#include <string.h>

#include "kernels/kernels.h"

enum { CHUNK = 256 };

struct mb_fir {
    const mb_kernels *kernels;
    float *taps; /* reversed, zeros before them up to a multiple of MB_LANES */
    size_t tap_count;
    size_t padded;
    uint64_t non_finite;
    float *re, *im; /* the last padded - 1 samples and a chunk behind them */
};

mb_status mb_fir_create(const mb_fir_settings *settings, mb_fir **out)
{
    *out = NULL;
    if (settings->taps == NULL) {
        return mb_fail(MB_ERROR_ARGUMENT, "taps", "taps must point to tap_count numbers");
    }
    if (settings->tap_count < 1 || settings->tap_count > (size_t)1 << 20) {
        return mb_fail(MB_ERROR_ARGUMENT, "tap_count", "tap_count must be between 1 and 1048576; it is %zu",
                       settings->tap_count);
    }
    mb_fir *fir = mb_allocate(1, sizeof *fir);
    if (fir == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a filter");
    }
    fir->kernels = mb_kernels_best();
    fir->tap_count = settings->tap_count;
    fir->padded = (fir->tap_count + MB_LANES - 1) / MB_LANES * MB_LANES;
    fir->taps = mb_allocate(fir->padded, sizeof *fir->taps);
    fir->re = mb_allocate(fir->padded + CHUNK, sizeof *fir->re);
    fir->im = mb_allocate(fir->padded + CHUNK, sizeof *fir->im);
    if (fir->taps == NULL || fir->re == NULL || fir->im == NULL) {
        mb_fir_destroy(fir);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a filter of %zu taps", settings->tap_count);
    }
    for (size_t i = 0; i < fir->tap_count; i++) {
        fir->taps[fir->padded - 1 - i] = settings->taps[i];
    }
    *out = fir;
    return MB_OK;
}

void mb_fir_destroy(mb_fir *fir)
{
    if (fir != NULL) {
        mb_release(fir->taps);
        mb_release(fir->re);
        mb_release(fir->im);
        mb_release(fir);
    }
}

void mb_fir_reset(mb_fir *fir)
{
    memset(fir->re, 0, (fir->padded + CHUNK) * sizeof *fir->re);
    memset(fir->im, 0, (fir->padded + CHUNK) * sizeof *fir->im);
}

size_t mb_fir_delay_samples(const mb_fir *fir)
{
    return (fir->tap_count - 1) / 2;
}

mb_filter_counts mb_fir_state(const mb_fir *fir)
{
    return (mb_filter_counts){fir->non_finite};
}

void mb_fir_process_f32(mb_fir *fir, const float *in, size_t n, float *out)
{
    size_t past = fir->padded - 1;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        for (size_t i = 0; i < run; i++) {
            bool finite = isfinite(in[done + i]);
            fir->re[past + i] = finite ? in[done + i] : 0.0f;
            fir->non_finite += finite ? 0 : 1;
        }
        for (size_t i = 0; i < run; i++) {
            out[done + i] = fir->kernels->dot(fir->taps, fir->re + i, fir->padded);
        }
        memmove(fir->re, fir->re + run, past * sizeof *fir->re);
        done += run;
    }
}

void mb_fir_process_cf32(mb_fir *fir, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    size_t past = fir->padded - 1;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        for (size_t i = 0; i < run; i++) {
            bool finite = isfinite(in[done + i].re) && isfinite(in[done + i].im);
            fir->re[past + i] = finite ? in[done + i].re : 0.0f;
            fir->im[past + i] = finite ? in[done + i].im : 0.0f;
            fir->non_finite += finite ? 0 : 1;
        }
        for (size_t i = 0; i < run; i++) {
            out[done + i].re = fir->kernels->dot(fir->taps, fir->re + i, fir->padded);
            out[done + i].im = fir->kernels->dot(fir->taps, fir->im + i, fir->padded);
        }
        memmove(fir->re, fir->re + run, past * sizeof *fir->re);
        memmove(fir->im, fir->im + run, past * sizeof *fir->im);
        done += run;
    }
}
