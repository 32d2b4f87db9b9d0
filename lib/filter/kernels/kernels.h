/**
 * kernels.h - the inner loops of the room, compiled once for any machine and once for each instruction set
 * that helps. All sets give the same bits: sums are kept in a fixed number of lanes that are joined in a
 * fixed order, and no product is contracted with a sum.
 */
#ifndef FILTER_KERNELS_H
#define FILTER_KERNELS_H

#include "mirrorband/core.h"

enum {
    MB_LANES = 16,         /* partial sums of a float kernel; lengths of taps are multiples of it */
    MB_SHORT_LANES = 8,    /* complex samples that a 16-bit kernel takes at a time */
    MB_SHORT_SEGMENT = 64, /* samples summed in 32 bits before they are added as float */
    MB_SHORT_TAP = 5790    /* tap modulus at which a whole segment of full scale stays below 2^31 */
};

typedef struct mb_kernels {
    const char *name;
    /* sum of a[i] b[i]; n is a multiple of MB_LANES */
    float (*dot)(const float *a, const float *b, size_t n);
    /* sum of c[i] x[i]; taps_re and taps_im hold each part twice; n is a multiple of MB_LANES / 2 */
    mb_cf32 (*dot_cf32)(const float *taps_re, const float *taps_im, const mb_cf32 *x, size_t n);
    /* the same; taps_re holds (re, -im), taps_im (im, re); n is a multiple of MB_SHORT_LANES */
    mb_cf32 (*dot_ci16)(const mb_ci16 *taps_re, const mb_ci16 *taps_im, const mb_ci16 *x, size_t n);
    /* out[i] = in[i] exp(+j 2 pi (phase + i step) / 2^64); in may be out */
    void (*rotate)(uint64_t phase, uint64_t step, const mb_cf32 *in, size_t n, mb_cf32 *out);
    /* no infinity and no NaN among n numbers */
    bool (*all_finite)(const float *x, size_t n);
} mb_kernels;

/** The quickest set for this machine. Asks the processor anew each time: nothing is kept. */
const mb_kernels *mb_kernels_best(void);

/** The i-th set that this machine can run, 0 being the plain one; NULL beyond the last. */
const mb_kernels *mb_kernels_at(size_t index);

extern const mb_kernels mb_kernels_plain;
extern const mb_kernels mb_kernels_avx2;

#endif
