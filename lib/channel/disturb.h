/** disturb.h - what is added to the signal on the way: a tone, noise, impulses. */
#ifndef CHANNEL_DISTURB_H
#define CHANNEL_DISTURB_H

#include "gauss.h"

/** White noise of given power over the whole rate. */
typedef struct channel_noise {
    double sigma; /* of each rail */
    const channel_gauss *gauss;
    mb_random random;
} channel_noise;

/** Adds noise to count samples. Thread: stream. */
void channel_noise_add(channel_noise *noise, mb_cf32 *samples, size_t count);

/** Impulses of one sample at Poisson instants, of equal size and random phase. */
typedef struct channel_impulses {
    double amplitude;
    double mean_interval; /* samples */
    double next;          /* instant of the next one, samples from the start */
    uint64_t sample;      /* the next one to be processed */
    uint64_t hits;
    mb_random random;
} channel_impulses;

/** Starts at sample 0. Thread: stream. */
void channel_impulses_start(channel_impulses *impulses, const mb_random *random);

/** Adds what falls into count samples. Thread: stream. */
void channel_impulses_add(channel_impulses *impulses, mb_cf32 *samples, size_t count);

#endif
