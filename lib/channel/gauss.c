#include "gauss.h"

#include <math.h>

/*
 * Marsaglia and Tsang, "The ziggurat method for generating random variables", J. Statistical Software 5(8),
 * 2000, with 256 layers. Layer bits, sign and position come from different bits of one 64-bit number, so that
 * they are independent. TAIL_START is the root r of
 *   r f(r) + integral of f beyond r = area,  256 layers of that area closing at f = 1,  f(x) = exp(-x^2/2),
 * and AREA that area.
 */
static const double TAIL_START = 3.6541528853610088;
static const double AREA = 0.00492867323399;

static double density(double x)
{
    return exp(-0.5 * x * x);
}

void channel_gauss_prepare(channel_gauss *gauss)
{
    /* layer 0 holds the tail too: as wide as a rectangle of the same area would be */
    gauss->edge[0] = AREA / density(TAIL_START);
    gauss->edge[1] = TAIL_START;
    for (size_t i = 2; i < GAUSS_LAYERS; i++) {
        double above = AREA / gauss->edge[i - 1] + density(gauss->edge[i - 1]);
        gauss->edge[i] = sqrt(-2.0 * log(above));
    }
    gauss->edge[GAUSS_LAYERS] = 0.0;
    for (size_t i = 0; i <= GAUSS_LAYERS; i++) {
        gauss->density[i] = density(gauss->edge[i]);
    }
}

/* Beyond TAIL_START (Marsaglia, 1964): an exponential distance, kept with the chance that makes it Gaussian.
 */
static double tail(mb_random *random)
{
    double distance, chance;

    do {
        distance = -log(1.0 - mb_random_uniform(random)) / TAIL_START;
        chance = -log(1.0 - mb_random_uniform(random));
    } while (2.0 * chance < distance * distance);
    return TAIL_START + distance;
}

double channel_gauss_edge(const channel_gauss *gauss, mb_random *random, uint64_t bits)
{
    for (;;) {
        size_t layer = bits & (GAUSS_LAYERS - 1);
        double x = channel_gauss_position(bits) * gauss->edge[layer];
        if (x < gauss->edge[layer + 1]) {
            return x;
        }
        if (layer == 0) {
            return tail(random);
        }
        double low = gauss->density[layer], high = gauss->density[layer + 1];
        if (low + (high - low) * mb_random_uniform(random) < density(x)) {
            return x;
        }
        bits = mb_random_bits(random);
    }
}
