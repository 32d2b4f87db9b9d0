/* Histograms that stand for lists of unknown length in the score; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_SCORE_COUNTS_H
#define MIRRORBAND_MEASURE_SCORE_COUNTS_H

#include "mirrorband/core.h"

enum { MB_LEVEL_BINS = 8192, MB_SNR_BINS = 20001 };

/* Powers of short frames, by level in steps of 0.05 dB from -300 dB on. */
typedef struct mb_frame_levels {
    double sum[MB_LEVEL_BINS];
    uint64_t count[MB_LEVEL_BINS];
    double highest;
} mb_frame_levels;

void mb_frame_levels_add(mb_frame_levels *levels, double power);
/* Mean power of the frames within 30 dB of the highest; 0 without any. */
double mb_frame_levels_active(const mb_frame_levels *levels);

/* SNRs in steps of 0.01 dB from -60 to 140 dB. */
typedef struct mb_snr_counts {
    uint32_t count[MB_SNR_BINS];
    uint64_t total;
    double worst;
} mb_snr_counts;

void mb_snr_counts_add(mb_snr_counts *counts, double snr_db);
/* Median, within 0.005 dB; NAN without any. */
double mb_snr_counts_median(const mb_snr_counts *counts);

#endif
