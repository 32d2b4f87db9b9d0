/** signals.h - signals the tests of this room are fed, and how outputs are looked at. */
#ifndef TESTS_FILTER_SIGNALS_H
#define TESTS_FILTER_SIGNALS_H

#include "check.h"
#include "mirrorband/filter.h"

/** Linear congruential numbers in [-1, 1), as numbers() of filter_reference.py. */
static inline void numbers(size_t count, float *out)
{
    uint32_t word = 12345;

    for (size_t i = 0; i < count; i++) {
        word = (UINT32_C(1103515245) * word + 12345u) % (UINT32_C(1) << 31);
        out[i] = (float)((double)word / 1073741824.0 - 1.0);
    }
}

/** Tone exp(j 2 pi f k / rate) in double precision, turned to float last. */
static inline void tone(double frequency_hz, double rate_hz, double amplitude, size_t count, mb_cf32 *out)
{
    double turns = frequency_hz / rate_hz;

    for (size_t k = 0; k < count; k++) {
        double place = turns * (double)k, angle = 2.0 * MB_PI * (place - floor(place));
        out[k] = (mb_cf32){(float)(amplitude * cos(angle)), (float)(amplitude * sin(angle))};
    }
}

/** Complex amplitude of samples at a frequency, the time of sample 0 being start_s; Blackman-Harris window of
 * four terms, which leaks below -92 dB beyond four bins. */
static inline void line_at(const mb_cf32 *samples, size_t count, double frequency_hz, double rate_hz,
                           double start_s, double *re, double *im)
{
    double sum = 0.0;

    *re = *im = 0.0;
    for (size_t k = 0; k < count; k++) {
        double x = 2.0 * MB_PI * ((double)k + 0.5) / (double)count;
        double w = 0.35875 - 0.48829 * cos(x) + 0.14128 * cos(2.0 * x) - 0.01168 * cos(3.0 * x);
        double angle = -2.0 * MB_PI * fmod(frequency_hz * ((double)k / rate_hz + start_s), 1.0);
        *re += w * ((double)samples[k].re * cos(angle) - (double)samples[k].im * sin(angle));
        *im += w * ((double)samples[k].re * sin(angle) + (double)samples[k].im * cos(angle));
        sum += w;
    }
    *re /= sum;
    *im /= sum;
}

/** Its power in dB. */
static inline double line_db(const mb_cf32 *samples, size_t count, double frequency_hz, double rate_hz)
{
    double re, im;

    line_at(samples, count, frequency_hz, rate_hz, 0.0, &re, &im);
    return mb_power_db(re * re + im * im);
}

/** Mean power of samples in dB. */
static inline double mean_db(const mb_cf32 *samples, size_t count)
{
    double sum = 0.0;

    for (size_t i = 0; i < count; i++) {
        sum += (double)samples[i].re * (double)samples[i].re + (double)samples[i].im * (double)samples[i].im;
    }
    return mb_power_db(sum / (double)count);
}

#endif
