/* Windows of the averaged spectra; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_WINDOW_H
#define MIRRORBAND_MEASURE_WINDOW_H

#include "mirrorband/measure.h"

typedef struct mb_window_shape {
    double square_sum; /* sum of squares of the window */
    double noise_bins; /* equivalent noise bandwidth, in bins */
    double lobe_bins;  /* half width of the main lobe, first null, in bins */
} mb_window_shape;

/* Fills count values of a periodic window (its next value would be the first again). sidelobe_db: Kaiser
 * only. */
mb_window_shape mb_window_fill(mb_window_kind kind, double sidelobe_db, size_t count, float *window);

#endif
