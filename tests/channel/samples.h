/** samples.h - samples, spectra and channels for the tests of the channel room. */
#ifndef TESTS_CHANNEL_SAMPLES_H
#define TESTS_CHANNEL_SAMPLES_H

#include "check.h"
#include "mirrorband/channel.h"

/** A channel of these settings; fails the test when it cannot be made. */
static inline mb_channel *channel_of(const mb_channel_settings *settings)
{
    mb_channel *channel = NULL;

    assert_ok(mb_channel_create(settings, &channel));
    return channel;
}

/** Memory for count samples, zeroed; never NULL. */
static inline mb_cf32 *samples_of(size_t count)
{
    mb_cf32 *samples = calloc(count, sizeof *samples);

    assert_non_null(samples);
    return samples;
}

/** Writes amplitude exp(j 2 pi turns n). */
static inline void fill_tone(mb_cf32 *samples, size_t count, double turns, double amplitude)
{
    for (size_t n = 0; n < count; n++) {
        double angle = 2.0 * MB_PI * fmod(turns * (double)n, 1.0);
        samples[n] = (mb_cf32){(float)(amplitude * cos(angle)), (float)(amplitude * sin(angle))};
    }
}

/** Writes random samples of about unit power, uniform on each rail. */
static inline void fill_random(mb_cf32 *samples, size_t count, uint64_t seed)
{
    mb_random random;

    mb_random_seed(&random, seed, 0);
    for (size_t n = 0; n < count; n++) {
        samples[n].re = (float)(2.4 * mb_random_uniform(&random) - 1.2);
        samples[n].im = (float)(2.4 * mb_random_uniform(&random) - 1.2);
    }
}

/** Mean of |x|^2. */
static inline double power_of(const mb_cf32 *samples, size_t count)
{
    double sum = 0.0;

    for (size_t n = 0; n < count; n++) {
        sum += (double)samples[n].re * samples[n].re + (double)samples[n].im * samples[n].im;
    }
    return sum / (double)count;
}

/** Power of one line: |mean of x exp(-j 2 pi turns n)|^2, in double. */
static inline double line_power(const mb_cf32 *samples, size_t count, double turns)
{
    double re = 0.0, im = 0.0;

    for (size_t n = 0; n < count; n++) {
        double angle = -2.0 * MB_PI * fmod(turns * (double)n, 1.0), c = cos(angle), s = sin(angle);
        re += samples[n].re * c - samples[n].im * s;
        im += samples[n].re * s + samples[n].im * c;
    }
    return (re * re + im * im) / ((double)count * (double)count);
}

#endif
