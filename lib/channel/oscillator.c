#include "oscillator.h"

#include <math.h>

static double turns_at(const channel_oscillator *oscillator, uint64_t sample)
{
    double n = (double)sample;

    return oscillator->phase_turns + n * oscillator->frequency + 0.5 * n * n * oscillator->drift;
}

/* a b modulo 1, with the rounding of the product made good. */
static double product_fraction(double a, double b)
{
    double product = a * b;

    return (product - rint(product)) + fma(a, b, -product);
}

/* The same phase modulo 1, to the last bit also when there are many turns. */
static double fraction_at(const channel_oscillator *oscillator, uint64_t sample)
{
    double n = (double)sample;

    return oscillator->phase_turns + product_fraction(n, oscillator->frequency) +
           product_fraction(0.5 * n * n, oscillator->drift);
}

static double complex unit_phasor(double turns)
{
    double angle = 2.0 * MB_PI * (turns - rint(turns));

    return complex_of(cos(angle), sin(angle));
}

/* From sample n to n + 1 the phase moves by f + (n + 1/2) d. */
static void set_anchor(channel_oscillator *oscillator)
{
    double n = (double)oscillator->sample;

    oscillator->phasor = unit_phasor(fraction_at(oscillator, oscillator->sample));
    oscillator->step = unit_phasor(oscillator->frequency + (n + 0.5) * oscillator->drift);
}

void channel_oscillator_start(channel_oscillator *oscillator, const oscillator_plan *plan,
                              const channel_gauss *gauss, const mb_random *random)
{
    double rate_hz = plan->rate_hz;

    *oscillator = (channel_oscillator){
        .phase_turns = plan->phase_rad / (2.0 * MB_PI),
        .frequency = plan->frequency_hz / rate_hz,
        .drift = plan->drift_hz_per_s / (rate_hz * rate_hz),
        .noise_sigma = sqrt(2.0 * MB_PI * plan->linewidth_hz / rate_hz),
        .gauss = gauss,
        .random = *random,
    };
    oscillator->bend = unit_phasor(oscillator->drift);
    set_anchor(oscillator);
}

void channel_oscillator_jump(channel_oscillator *oscillator, uint64_t sample)
{
    oscillator->sample = sample - sample % OSCILLATOR_ANCHOR;
    set_anchor(oscillator);
    while (oscillator->sample < sample) {
        oscillator->phasor = complex_times(oscillator->phasor, oscillator->step);
        oscillator->step = complex_times(oscillator->step, oscillator->bend);
        oscillator->sample++;
    }
}

/* Up to the next anchor, count samples with the phasor at hand. */
static void make_plain(channel_oscillator *oscillator, size_t count, double complex *out)
{
    double complex phasor = oscillator->phasor, step = oscillator->step;

    for (size_t i = 0; i < count; i++) {
        out[i] = phasor;
        phasor = complex_times(phasor, step);
        step = complex_times(step, oscillator->bend);
    }
    oscillator->phasor = phasor;
    oscillator->step = step;
}

/* A Wiener process: independent steps, none before sample 0. */
static void add_noise(channel_oscillator *oscillator, size_t count, double complex *out)
{
    for (size_t i = 0; i < count; i++) {
        if (oscillator->sample + i > 0) {
            oscillator->noise_rad +=
                oscillator->noise_sigma * channel_gauss_draw(oscillator->gauss, &oscillator->random);
        }
        double angle = oscillator->noise_rad;
        out[i] = complex_times(out[i], complex_of(cos(angle), sin(angle)));
    }
}

void channel_oscillator_make(channel_oscillator *oscillator, size_t count, double complex *out)
{
    while (count > 0) {
        size_t within = (size_t)(oscillator->sample % OSCILLATOR_ANCHOR);
        size_t part = OSCILLATOR_ANCHOR - within < count ? OSCILLATOR_ANCHOR - within : count;
        if (within == 0) {
            set_anchor(oscillator);
        }
        make_plain(oscillator, part, out);
        if (oscillator->noise_sigma > 0.0) {
            add_noise(oscillator, part, out);
        }
        oscillator->sample += part;
        out += part;
        count -= part;
    }
}

double channel_oscillator_phase(const channel_oscillator *oscillator, uint64_t sample)
{
    return 2.0 * MB_PI * turns_at(oscillator, sample);
}
