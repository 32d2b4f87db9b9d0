/* The FIR that best makes one stream of another, sample by sample; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_FIR_FIT_H
#define MIRRORBAND_MEASURE_FIR_FIT_H

#include "mirrorband/core.h"

typedef struct mb_fir_fit mb_fir_fit;

typedef struct mb_fir_fit_result {
    double fit_power;   /* of what the FIR makes of the message, sum of squares */
    double error_power; /* of the audio less that */
    double message_power;
} mb_fir_fit_result;

/* taps: odd, 3 to 127; the FIR reaches (taps - 1)/2 samples to either side. */
mb_status mb_fir_fit_create(size_t taps, mb_fir_fit **out);
void mb_fir_fit_add(mb_fir_fit *fit, const float *message, const float *audio, size_t count);
/* Solves for what was added; works in memory of its own (real-time safe). */
mb_fir_fit_result mb_fir_fit_solve(mb_fir_fit *fit);
void mb_fir_fit_reset(mb_fir_fit *fit);
void mb_fir_fit_destroy(mb_fir_fit *fit);

#endif
