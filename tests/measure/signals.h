/** signals.h - test signals of known figures, made in double and rounded once. */
#ifndef TESTS_MEASURE_SIGNALS_H
#define TESTS_MEASURE_SIGNALS_H

#include "check.h"

#include "mirrorband/measure.h"

/** Zeroed samples that are released by the test. */
static inline mb_cf32 *samples_of(size_t count)
{
    mb_cf32 *samples = mb_allocate(count, sizeof *samples);

    assert_non_null(samples);
    return samples;
}

/** Adds amplitude exp(j(2 pi frequency t + phase)), by turning a phasor in double (error below 1e-9). */
static inline void add_line(mb_cf32 *samples, size_t count, double rate_hz, double frequency_hz,
                            double amplitude, double phase_rad)
{
    double step = 2.0 * MB_PI * frequency_hz / rate_hz, turn_re = cos(step), turn_im = sin(step);
    double re = amplitude * cos(phase_rad), im = amplitude * sin(phase_rad);

    for (size_t i = 0; i < count; i++) {
        samples[i].re += (float)re;
        samples[i].im += (float)im;
        double next = re * turn_re - im * turn_im;
        im = re * turn_im + im * turn_re;
        re = next;
    }
}

/** Adds a double-sideband tone of the message amplitude given: two lines of half of it. */
static inline void add_tone(mb_cf32 *samples, size_t count, double rate_hz, double carrier_hz, double tone_hz,
                            double amplitude)
{
    add_line(samples, count, rate_hz, carrier_hz + tone_hz, amplitude / 2.0, 0.4);
    add_line(samples, count, rate_hz, carrier_hz - tone_hz, amplitude / 2.0, 0.4);
}

/** Adds complex Gaussian noise of this mean square. */
static inline void add_noise(mb_cf32 *samples, size_t count, double power, uint64_t seed)
{
    mb_random random;
    double sigma = sqrt(power / 2.0);

    print_message("seed %d\n", (int)seed);
    mb_random_seed(&random, seed, 0);
    for (size_t i = 0; i < count; i++) {
        samples[i].re += (float)(sigma * mb_random_normal(&random));
        samples[i].im += (float)(sigma * mb_random_normal(&random));
    }
}

#endif
