/* What mb_emission holds; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_EMISSION_H
#define MIRRORBAND_MEASURE_EMISSION_H

#include "mirrorband/filter.h"
#include "mirrorband/measure.h"

#include "narrow.h"

enum { MB_EMISSION_CHUNK = 4096, MB_EMISSION_STAGES = 2 };

/* Beside the missing carrier nothing of a voice is expected up to here. */
#define MB_EMISSION_QUIET_HZ 120.0

struct mb_emission {
    mb_emission_settings settings;
    mb_oscillator to_carrier;               /* moves the missing carrier to 0 Hz */
    mb_narrow *to_fine[MB_EMISSION_STAGES]; /* NULL: stage not needed */
    mb_narrow *to_level;                    /* the width of the signal; NULL: the fine band is no wider */
    mb_narrow *to_quiet;                    /* the neighbourhood of the carrier */
    mb_spectrum *wide;                      /* NULL: the fine one covers the band */
    mb_spectrum *fine;
    mb_spectrum *quiet;
    mb_speech_meter *meter;
    double fine_edge_hz; /* the fine spectrum is true up to here */
    double square_sum, peak_square;
    uint64_t samples, non_finite;
    mb_cf32 *chunk, *moved;
};

#endif
