/**
 * doubler.h - doubles the rate of complex samples by the midpoint interpolator of Lagrange: half of the
 * outputs are the inputs, the others lie between them. Its gain is flat at 0 Hz and its zeros all lie at half
 * the new rate, where the image of a narrow signal is.
 */
#ifndef FILTER_DOUBLER_H
#define FILTER_DOUBLER_H

#include "mirrorband/core.h"

enum { MB_DOUBLER_PAIRS = 16 };

typedef struct mb_doubler {
    size_t pairs;                 /* samples to either side of a midpoint */
    float taps[MB_DOUBLER_PAIRS]; /* of the nearest pair first */
    size_t kept;                  /* 2 pairs - 1: samples kept for the next call */
    mb_cf32 *past;                /* those, and room for `room` new ones */
    size_t room;
} mb_doubler;

/** Fewest pairs for which the image of |f| <= passband_hz is attenuated; 0 if MB_DOUBLER_PAIRS do not do. */
size_t mb_doubler_pairs(double passband_hz, double rate_in_hz, double attenuation_db);
/** room: most samples handed over at once. Errors: MEMORY. */
mb_status mb_doubler_make(size_t pairs, size_t room, mb_doubler *doubler);
/** 2 n samples out, `pairs` input samples late; n at most room; in and out apart. */
void mb_doubler_process(mb_doubler *doubler, const mb_cf32 *in, size_t n, mb_cf32 *out);
void mb_doubler_reset(mb_doubler *doubler);
void mb_doubler_clear(mb_doubler *doubler);

#endif
