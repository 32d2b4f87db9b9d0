/** gauss.h - Gaussian numbers by the ziggurat method, about three times as fast as mb_random_normal. */
#ifndef CHANNEL_GAUSS_H
#define CHANNEL_GAUSS_H

#include "mirrorband/core.h"

enum { GAUSS_LAYERS = 256 };

/** Layers of equal area under exp(-x^2/2): right edges, falling, and the density there. */
typedef struct channel_gauss {
    double edge[GAUSS_LAYERS + 1];
    double density[GAUSS_LAYERS + 1];
} channel_gauss;

/** Fills the tables. Thread: any. */
void channel_gauss_prepare(channel_gauss *gauss);

/** What channel_gauss_draw does when a number falls outside the core of its layer. Thread: stream. */
double channel_gauss_edge(const channel_gauss *gauss, mb_random *random, uint64_t bits);

/** Position of a draw in its layer, uniform in [0, 1). */
static inline double channel_gauss_position(uint64_t bits)
{
    return (double)(int64_t)(bits >> 11) * 0x1.0p-53;
}

/** Gaussian with mean 0 and variance 1. Thread: stream. */
static inline double channel_gauss_draw(const channel_gauss *gauss, mb_random *random)
{
    uint64_t bits = mb_random_bits(random);
    size_t layer = bits & (GAUSS_LAYERS - 1);
    double x = channel_gauss_position(bits) * gauss->edge[layer];

    if (x >= gauss->edge[layer + 1]) {
        x = channel_gauss_edge(gauss, random, bits);
    }
    /* not a choice between x and -x, which a processor guesses wrong half of the time */
    return x * (double)(1 - 2 * (int)(bits / GAUSS_LAYERS & 1));
}

#endif
