/** resampler.h - the resampler as other parts of the room make it. */
#ifndef FILTER_RESAMPLER_H
#define FILTER_RESAMPLER_H

#include "mirrorband/filter.h"

typedef struct mb_resampler_plan {
    uint64_t in, out;  /* rates in any common unit, exact; below 2^62 */
    double rate_in_hz; /* the same rates in Hz */
    double rate_out_hz;
    double passband_hz; /* below half the lower rate */
    double attenuation_db;
    double curvature_s2; /* gain in the passband is 1 + curvature f^2, to make up for a filter before it */
} mb_resampler_plan;

mb_status mb_resampler_make(const mb_resampler_plan *plan, mb_resampler **out);

/** Most outputs that n inputs can give, wherever the stream stands. */
uint64_t mb_most_outputs(uint64_t inputs, uint64_t in, uint64_t out);

#endif
