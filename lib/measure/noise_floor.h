/* Mean of noise bins among which lines may stand; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_NOISE_FLOOR_H
#define MIRRORBAND_MEASURE_NOISE_FLOOR_H

#include "mirrorband/core.h"

/*
 * From the median, so that lines and voices beside do not count. Sorts the values. averages: independent
 * stretches behind each value, 1 or more. 0 without values.
 */
double mb_noise_floor(double *values, size_t count, double averages);

#endif
