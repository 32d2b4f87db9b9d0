/* Decimation by whole numbers for the analyser, which shares no stage with the chains it judges. Internal. */
#ifndef MIRRORBAND_MEASURE_NARROW_H
#define MIRRORBAND_MEASURE_NARROW_H

#include "mirrorband/core.h"

typedef struct mb_narrow mb_narrow;

/*
 * Low-pass and keep every factor-th sample: flat to pass_hz, -attenuation_db from stop_hz on (sidelobes of
 * the design; DC gain 1).
 */
typedef struct mb_narrow_settings {
    double rate_hz; /* of the input */
    size_t factor;
    double pass_hz, stop_hz;
    double attenuation_db;
} mb_narrow_settings;

mb_status mb_narrow_create(const mb_narrow_settings *settings, mb_narrow **out);
/* Returns how many were made: at most count / factor + 1. in may be out. */
size_t mb_narrow_process(mb_narrow *narrow, const mb_cf32 *in, size_t count, mb_cf32 *out);
void mb_narrow_reset(mb_narrow *narrow);
void mb_narrow_destroy(mb_narrow *narrow);

#endif
