/** line.h - amplitudes of single spectral lines at whole bins, in double precision, for the modulate tests.
 */
#ifndef TESTS_MODULATE_LINE_H
#define TESTS_MODULATE_LINE_H

#include "check.h"

/** A complex line by its two parts. */
typedef struct line {
    double re, im;
} line;

static inline double line_magnitude(line at)
{
    return hypot(at.re, at.im);
}

static inline double line_power(line at)
{
    return at.re * at.re + at.im * at.im;
}

/* exp(-j 2 pi bin i / count) with the angle reduced in integers, so that long records lose nothing. */
static inline line line_turn(long bin, size_t i, size_t count)
{
    long length = (long)count;
    long step = ((bin % length) + length) % length;
    double angle = 2.0 * MB_PI * (double)((step * (long)i) % length) / (double)length;

    return (line){cos(angle), -sin(angle)};
}

/** Amplitude of the cosine at a bin of a real record: 2/N sum x exp(-j ...); bin 0 gives the mean. */
static inline line line_of_real(const double *samples, size_t count, long bin)
{
    line sum = {0.0, 0.0};
    double scale = (bin == 0 ? 1.0 : 2.0) / (double)count;

    for (size_t i = 0; i < count; i++) {
        line turn = line_turn(bin, i, count);
        sum.re += samples[i] * turn.re * scale;
        sum.im += samples[i] * turn.im * scale;
    }
    return sum;
}

/** Amplitude of the complex exponential at a bin (may be negative) of a complex record. */
static inline line line_of_complex(const mb_cf32 *samples, size_t count, long bin)
{
    line sum = {0.0, 0.0};

    for (size_t i = 0; i < count; i++) {
        line turn = line_turn(bin, i, count);
        double re = (double)samples[i].re, im = (double)samples[i].im;
        sum.re += (re * turn.re - im * turn.im) / (double)count;
        sum.im += (re * turn.im + im * turn.re) / (double)count;
    }
    return sum;
}

/** Adds amplitude cos(2 pi bin i / count) to a record. */
static inline void line_add(double *samples, size_t count, long bin, double amplitude)
{
    for (size_t i = 0; i < count; i++) {
        samples[i] += amplitude * line_turn(bin, i, count).re;
    }
}

static inline double decibel(double amplitude_ratio)
{
    return 20.0 * log10(fabs(amplitude_ratio));
}

#endif
