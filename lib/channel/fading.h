/** fading.h - paths whose gains are complex Gaussian processes with a Gaussian Doppler spectrum. */
#ifndef CHANNEL_FADING_H
#define CHANNEL_FADING_H

#include "complex_parts.h"
#include "gauss.h"

/**
 * One tap: complex white noise at a low rate (64 to 128 times the spread) through a FIR of Gaussian shape,
 * then a cubic through four of its outputs for every sample between the middle two.
 */
typedef struct fading_tap {
    size_t fir_length;
    const double *fir;       /* shared by the taps, sum of squares 1 */
    double complex *noise;   /* the last fir_length draws, as a ring */
    size_t noise_at;         /* the oldest of them */
    double complex node[4];  /* outputs at the low rate, oldest first */
    double complex cubic[4]; /* between node 1 and 2, by powers of the position 0..1 */
    const channel_gauss *gauss;
    mb_random random;
} fading_tap;

/** Samples from one node to the next at a given rate and spread; the low rate is rate over this. */
uint64_t fading_node_interval(double rate_hz, double spread_hz);

/** Length of the FIR for node_interval. */
size_t fading_fir_length(double rate_hz, double spread_hz);

/** Fills the FIR: exp(-(pi spread t)^2), scaled to a sum of squares of 1. */
void fading_fir_design(double rate_hz, double spread_hz, double *fir, size_t length);

/** Fills noise and nodes, so that the first output is as random as any; random is taken over by value. */
void fading_tap_start(fading_tap *tap, const mb_random *random);

/** The next output at the low rate. Thread: stream. */
double complex fading_tap_node(fading_tap *tap);

/** Moves on by one node: afterwards `cubic` holds for the next interval. Thread: stream. */
void fading_tap_advance(fading_tap *tap);

/** Value of the cubic at a position 0..1. */
static inline double complex fading_tap_value(const fading_tap *tap, double at)
{
    const double *c = (const double *)tap->cubic;

    return complex_of(c[0] + at * (c[2] + at * (c[4] + at * c[6])),
                      c[1] + at * (c[3] + at * (c[5] + at * c[7])));
}

/** Two paths, the second behind a delay line. */
typedef struct channel_fading {
    unsigned paths;
    double amplitude[2]; /* root of the average power of each path */
    bool moves[2];
    fading_tap tap[2];
    double *fir;
    uint64_t interval; /* samples from node to node; 0: nothing moves */
    uint64_t position; /* of the next sample in its interval */
    mb_cf32 *line;     /* the last delay_samples inputs, as a ring */
    size_t delay_samples;
    size_t line_at;
} channel_fading;

/** What the fading is made of. */
typedef struct fading_plan {
    unsigned paths;
    bool first_steady;
    double rate_hz, spread_hz, delay_s, second_db;
} fading_plan;

/** Allocates; false when memory cannot be had (channel_fading_free gives back the rest). Thread: control. */
bool channel_fading_allocate(channel_fading *fading, const fading_plan *plan, const channel_gauss *gauss);

/** Back to sample 0 with one stream of random numbers a path. Thread: stream. */
void channel_fading_start(channel_fading *fading, const mb_random random[2]);

/** count samples in place. Thread: stream. */
void channel_fading_apply(channel_fading *fading, mb_cf32 *samples, size_t count);

/** Gains of the paths at the sample processed last (before the first: at sample 0). Thread: stream. */
void channel_fading_gains(const channel_fading *fading, double complex gain[2]);

/** Gives the memory back. Thread: control. */
void channel_fading_free(channel_fading *fading);

#endif
