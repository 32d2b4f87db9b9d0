#include "plot.h"

#include <math.h>

double mb_plot_position(const plot_scale *scale, double value, double length_px)
{
    double position = (value - scale->low) / (scale->high - scale->low) * length_px;

    /* far outside is as good as just outside, and does not upset whatever draws it */
    return fmin(length_px + 2000.0, fmax(-2000.0, position));
}

static bool never_decreases(const plot_series *series)
{
    for (size_t i = 1; i < series->count; i++) {
        if (!(series->x[i] >= series->x[i - 1])) {
            return false;
        }
    }
    return true;
}

/* Keeps first, lowest, highest and last of a run, and every gap (not a number) in it. */
static void keep_run(const plot_series *series, size_t begin, size_t end, bool *keep)
{
    size_t lowest = begin, highest = begin;

    for (size_t i = begin; i < end; i++) {
        double y = series->y[i];
        if (!isfinite(y)) {
            keep[i] = true;
            continue;
        }
        lowest = !(series->y[lowest] <= y) ? i : lowest;
        highest = !(series->y[highest] >= y) ? i : highest;
    }
    keep[begin] = keep[end - 1] = keep[lowest] = keep[highest] = true;
}

void mb_plot_thin(const plot_series *series, const plot_scale *x, double width_px, bool *keep)
{
    bool all = (double)series->count < 4.0 * width_px || !never_decreases(series);
    size_t begin = 0;

    for (size_t i = 0; i < series->count; i++) {
        keep[i] = all;
    }
    for (size_t i = 1; i <= series->count && !all; i++) {
        double column = floor(2.0 * mb_plot_position(x, series->x[begin], width_px));
        if (i == series->count || floor(2.0 * mb_plot_position(x, series->x[i], width_px)) != column) {
            keep_run(series, begin, i, keep);
            begin = i;
        }
    }
}
