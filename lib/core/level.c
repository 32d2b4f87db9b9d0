#include "mirrorband/core.h"

#include <math.h>

double mb_power_db(double power)
{
    return power > 1e-40 ? 10.0 * log10(power) : -400.0;
}

double mb_db_power(double level_db)
{
    return pow(10.0, level_db / 10.0);
}

size_t mb_scrub_f32(float *samples, size_t count)
{
    size_t bad = 0;

    for (size_t i = 0; i < count; i++) {
        if (!isfinite(samples[i])) {
            samples[i] = 0.0f;
            bad++;
        }
    }
    return bad;
}

size_t mb_scrub_cf32(mb_cf32 *samples, size_t count)
{
    size_t bad = 0;

    for (size_t i = 0; i < count; i++) {
        if (!isfinite(samples[i].re) || !isfinite(samples[i].im)) {
            samples[i] = (mb_cf32){0.0f, 0.0f};
            bad++;
        }
    }
    return bad;
}
