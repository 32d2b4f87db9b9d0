#include "mirrorband/filter.h"

#include <math.h>

#include "kernels/kernels.h"

void mb_oscillator_set(mb_oscillator *oscillator, double frequency_hz, double rate_hz)
{
    double turns = frequency_hz / rate_hz;

    turns -= floor(turns + 0.5);
    /* 2^63 half turns fit a signed number; the cast then wraps as the phase does */
    oscillator->step = (uint64_t)(int64_t)llrint(fmax(-0.5, fmin(turns, 0.4999999999999999)) * 0x1.0p64);
}

void mb_oscillator_rotate(mb_oscillator *oscillator, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    mb_kernels_best()->rotate(oscillator->phase, oscillator->step, in, n, out);
    oscillator->phase += oscillator->step * n;
}
