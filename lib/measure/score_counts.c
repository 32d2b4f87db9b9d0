#include "score_counts.h"

#include <math.h>

static const double level_from_db = -300.0, level_step_db = 0.05, snr_from_db = -60.0, snr_step_db = 0.01;

static size_t bin_of(double value, double from, double step, size_t bins)
{
    double bin = (value - from) / step + 0.5;

    return (size_t)fmin(fmax(bin, 0.0), (double)bins - 1.0);
}

void mb_frame_levels_add(mb_frame_levels *levels, double power)
{
    size_t bin = bin_of(mb_power_db(power), level_from_db, level_step_db, MB_LEVEL_BINS);

    levels->sum[bin] += power;
    levels->count[bin]++;
    levels->highest = fmax(levels->highest, power);
}

double mb_frame_levels_active(const mb_frame_levels *levels)
{
    size_t from = bin_of(mb_power_db(levels->highest) - 30.0, level_from_db, level_step_db, MB_LEVEL_BINS);
    double sum = 0.0;
    uint64_t count = 0;

    for (size_t i = from; i < MB_LEVEL_BINS; i++) {
        sum += levels->sum[i];
        count += levels->count[i];
    }
    return count > 0 ? sum / (double)count : 0.0;
}

void mb_snr_counts_add(mb_snr_counts *counts, double snr_db)
{
    counts->count[bin_of(snr_db, snr_from_db, snr_step_db, MB_SNR_BINS)]++;
    counts->worst = counts->total == 0 ? snr_db : fmin(counts->worst, snr_db);
    counts->total++;
}

/* Value of the rank-th smallest, from 0. */
static double value_at(const mb_snr_counts *counts, uint64_t rank)
{
    uint64_t below = 0;
    size_t bin = 0;

    while (bin + 1 < MB_SNR_BINS && below + counts->count[bin] <= rank) {
        below += counts->count[bin++];
    }
    return snr_from_db + snr_step_db * (double)bin;
}

double mb_snr_counts_median(const mb_snr_counts *counts)
{
    if (counts->total == 0) {
        return NAN;
    }
    return (value_at(counts, (counts->total - 1) / 2) + value_at(counts, counts->total / 2)) / 2.0;
}
