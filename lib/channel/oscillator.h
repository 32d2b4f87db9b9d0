/** oscillator.h - a frequency that moves evenly with time, with Wiener phase noise, exact after days. */
#ifndef CHANNEL_OSCILLATOR_H
#define CHANNEL_OSCILLATOR_H

#include "complex_parts.h"
#include "gauss.h"

/**
 * Phase of sample n, in turns: phase + n f + n^2 d / 2, plus noise. It is computed from n itself at every
 * OSCILLATOR_ANCHOR-th sample; between, the phasor is multiplied on.
 */
typedef struct channel_oscillator {
    double phase_turns;
    double frequency;      /* turns per sample at sample 0 */
    double drift;          /* turns per sample, per sample */
    double noise_sigma;    /* of one step of the phase noise, rad */
    uint64_t sample;       /* the next one */
    double noise_rad;      /* of the sample made last */
    double complex phasor; /* of the next sample, without noise */
    double complex step;   /* from it to the one behind */
    double complex bend;   /* factor on the step */
    const channel_gauss *gauss;
    mb_random random;
} channel_oscillator;

enum { OSCILLATOR_ANCHOR = 64 };

/** What an oscillator is made of. */
typedef struct oscillator_plan {
    double rate_hz, frequency_hz, drift_hz_per_s, phase_rad, linewidth_hz;
} oscillator_plan;

/** Starts at sample 0; gauss is only used with a linewidth and must outlive the oscillator. Thread: any. */
void channel_oscillator_start(channel_oscillator *oscillator, const oscillator_plan *plan,
                              const channel_gauss *gauss, const mb_random *random);

/** Goes to a sample far away; the phase noise keeps its value. Thread: any. */
void channel_oscillator_jump(channel_oscillator *oscillator, uint64_t sample);

/** Writes count phasors exp(j phase). Thread: stream. */
void channel_oscillator_make(channel_oscillator *oscillator, size_t count, double complex *out);

/** Phase of a sample without noise, rad, unwrapped. Thread: any. */
double channel_oscillator_phase(const channel_oscillator *oscillator, uint64_t sample);

#endif
