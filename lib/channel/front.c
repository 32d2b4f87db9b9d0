#include "front.h"

#include <math.h>

void channel_front_set_rails(channel_front *front, double gain_db, double phase_deg)
{
    double gain = sqrt(mb_db_power(gain_db)), angle = phase_deg * MB_PI / 180.0;

    front->unequal = gain_db != 0.0 || phase_deg != 0.0;
    front->from_re = gain * sin(angle);
    front->from_im = gain * cos(angle);
}

void channel_front_set_dc(channel_front *front, double dc_dbfs, double phase_rad)
{
    double level = isinf(dc_dbfs) ? 0.0 : sqrt(mb_db_power(dc_dbfs));

    front->dc_re = level * cos(phase_rad);
    front->dc_im = level * sin(phase_rad);
}

void channel_front_set_limits(channel_front *front, double limit, unsigned bits)
{
    front->limit = (float)limit;
    front->steps = bits > 0 ? ldexpf(1.0f, (int)bits - 1) : 0.0f;
}

static void mix_rails(const channel_front *front, mb_cf32 *samples, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        samples[i].im = (float)(front->from_re * samples[i].re + front->from_im * samples[i].im);
    }
}

static void add_dc(const channel_front *front, mb_cf32 *samples, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        samples[i].re = (float)(samples[i].re + front->dc_re);
        samples[i].im = (float)(samples[i].im + front->dc_im);
    }
}

static bool limit_rail(float *rail, float low, float high)
{
    float in = *rail;

    *rail = in < low ? low : in > high ? high : in;
    return *rail != in;
}

static void limit_rails(channel_front *front, float low, float high, mb_cf32 *samples, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        bool re = limit_rail(&samples[i].re, low, high);
        bool im = limit_rail(&samples[i].im, low, high);
        front->clipped += re || im;
    }
}

/* Mid-tread, as two's complement converters are: whole steps from -2^(bits-1) to 2^(bits-1) - 1. */
static void quantise(channel_front *front, mb_cf32 *samples, size_t count)
{
    float steps = front->steps;

    for (size_t i = 0; i < count; i++) {
        samples[i].re = rintf(samples[i].re * steps);
        samples[i].im = rintf(samples[i].im * steps);
    }
    limit_rails(front, -steps, steps - 1.0f, samples, count);
    for (size_t i = 0; i < count; i++) {
        samples[i].re /= steps;
        samples[i].im /= steps;
    }
}

void channel_front_apply(channel_front *front, mb_cf32 *samples, size_t count)
{
    if (front->unequal) {
        mix_rails(front, samples, count);
    }
    if (front->dc_re != 0.0 || front->dc_im != 0.0) {
        add_dc(front, samples, count);
    }
    if (isfinite(front->limit)) {
        limit_rails(front, -front->limit, front->limit, samples, count);
    }
    if (front->steps > 0.0f) {
        quantise(front, samples, count);
    }
}
