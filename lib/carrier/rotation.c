#include "rotation.h"

#include <math.h>

phase_segment phase_segment_between(double start, const mb_phase_state *first, const mb_phase_state *second,
                                    double length, double rate_hz)
{
    const double turn = 2.0 * MB_PI;
    phase_segment segment = {.start = start, .length = length};
    double seconds = length / rate_hz;
    double base = turn * floor(first->phase_rad / turn); /* keeps the polynomial exact after days */
    double p0 = first->phase_rad - base, p1 = second->phase_rad - base;
    double v0 = first->frequency_rad_s * seconds, v1 = second->frequency_rad_s * seconds;

    segment.coefficient[0] = p0;
    segment.coefficient[1] = v0;
    segment.coefficient[2] = 3.0 * (p1 - p0) - 2.0 * v0 - v1;
    segment.coefficient[3] = v0 + v1 - 2.0 * (p1 - p0);
    return segment;
}

void phase_segment_rotate(const phase_segment *segment, double position, const mb_cf32 *in, size_t n,
                          mb_cf32 *out)
{
    const double *c = segment->coefficient;
    const double turn = 2.0 * MB_PI, per_turn = 1.0 / turn, per_length = 1.0 / segment->length;

    for (size_t i = 0; i < n; i++) {
        double u = (position + (double)i - segment->start) * per_length;
        double phase = c[0] + u * (c[1] + u * (c[2] + u * c[3]));
        float angle = (float)(phase - turn * floor(phase * per_turn + 0.5));
        float cs = cosf(angle), sn = sinf(angle), re = in[i].re, im = in[i].im;
        out[i] = (mb_cf32){re * cs + im * sn, im * cs - re * sn};
    }
}
