/**
 * first_stage.h - the one filter of the decimator that runs at the full rate.
 *
 * Three box filters in a row, each as long as the factor: their zeros lie on all bands that fold onto the
 * wanted one, one in the middle and two spread to 0.866 of its half width (Chebyshev nodes, which make the
 * largest leak within the band the smallest). The product of the three, rotated to the wanted frequency, is
 * one complex filter; what is left of the mixing is done at the low rate.
 */
#ifndef FILTER_FIRST_STAGE_H
#define FILTER_FIRST_STAGE_H

#include "mirrorband/filter.h"

/** Largest factor for which what folds into the passband stays below the attenuation; 1: no stage is needed.
 */
size_t mb_first_stage_factor(const mb_decimator_settings *settings);

typedef struct mb_first_stage mb_first_stage;

/** factor: from mb_first_stage_factor, 2 or more. Errors: MEMORY. */
mb_status mb_first_stage_create(const mb_decimator_settings *settings, size_t factor, mb_first_stage **out);
/** Takes n samples; returns how many came out, at most n / factor + 1. One kind of sample per object. */
size_t mb_first_stage_cf32(mb_first_stage *stage, const mb_cf32 *in, size_t n, mb_cf32 *out);
size_t mb_first_stage_ci16(mb_first_stage *stage, const mb_ci16 *in, size_t n, mb_cf32 *out);
/** Delay in input samples. */
double mb_first_stage_delay(const mb_first_stage *stage);
/** The gain the passband needs behind it is 1 + curvature f^2. */
double mb_first_stage_curvature(const mb_first_stage *stage);
uint64_t mb_first_stage_non_finite(const mb_first_stage *stage);
void mb_first_stage_reset(mb_first_stage *stage);
void mb_first_stage_destroy(mb_first_stage *stage);

#endif
