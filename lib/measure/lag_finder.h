/* Finds by how much one stream lags another, in bounded memory; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_LAG_FINDER_H
#define MIRRORBAND_MEASURE_LAG_FINDER_H

#include "mirrorband/core.h"

typedef struct mb_lag_finder mb_lag_finder;

/* max_lag: samples, 1 or more. */
mb_status mb_lag_finder_create(size_t max_lag, mb_lag_finder **out);
void mb_lag_finder_add(mb_lag_finder *finder, const float *message, const float *audio, size_t count);
/* The lag of the audio, whatever its sign of amplitude; ends the streams. NO_SIGNAL when nothing correlates
 * at all. */
mb_status mb_lag_finder_end(mb_lag_finder *finder, ptrdiff_t *lag);
void mb_lag_finder_reset(mb_lag_finder *finder);
void mb_lag_finder_destroy(mb_lag_finder *finder);

#endif
