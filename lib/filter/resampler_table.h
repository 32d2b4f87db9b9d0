/** resampler_table.h - impulse response of a resampler, cut into phases. */
#ifndef FILTER_RESAMPLER_TABLE_H
#define FILTER_RESAMPLER_TABLE_H

#include "resampler.h"

typedef struct mb_phase_table {
    float *taps;   /* rows of `padded` taps, the tap of the oldest sample first */
    size_t padded; /* multiple of MB_LANES */
    size_t span;   /* input samples that the response covers; the delay is half of it */
    size_t phases; /* rows in one input sample; one more row follows when blended */
    bool blended;  /* false: one row for each fraction that occurs */
} mb_phase_table;

/** plan->in and plan->out without a common divisor. Errors: MEMORY, ARGUMENT (too long). */
mb_status mb_phase_table_make(const mb_resampler_plan *plan, mb_phase_table *table);

#endif
