#include "fading.h"

#include <math.h>

/* The low rate is at least this many times the spread: the cubic then errs by less than -110 dB. */
static const double NODES_PER_SPREAD = 64.0;
/* The FIR ends where it has fallen to exp(-25). */
static const double FIR_SPAN = 5.0;

uint64_t fading_node_interval(double rate_hz, double spread_hz)
{
    double interval = floor(rate_hz / (NODES_PER_SPREAD * spread_hz));

    return interval < 1.0 ? 1 : (uint64_t)interval;
}

/* pi spread / low rate: the FIR is exp(-(this * n)^2) at node n from its middle. */
static double fir_scale(double rate_hz, double spread_hz)
{
    return MB_PI * spread_hz * (double)fading_node_interval(rate_hz, spread_hz) / rate_hz;
}

size_t fading_fir_length(double rate_hz, double spread_hz)
{
    return 2 * (size_t)ceil(FIR_SPAN / fir_scale(rate_hz, spread_hz)) + 1;
}

/* A Gaussian power spectrum of sigma = spread/2 asks for the amplitude response exp(-f^2/(4 sigma^2)) =
 * exp(-f^2/spread^2), whose transform is exp(-(pi spread t)^2). */
void fading_fir_design(double rate_hz, double spread_hz, double *fir, size_t length)
{
    double scale = fir_scale(rate_hz, spread_hz), energy = 0.0;

    for (size_t i = 0; i < length; i++) {
        double x = scale * ((double)i - 0.5 * (double)(length - 1));
        fir[i] = exp(-x * x);
        energy += fir[i] * fir[i];
    }
    for (size_t i = 0; i < length; i++) {
        fir[i] /= sqrt(energy);
    }
}

/* Complex Gaussian with E|z|^2 = 1. */
static double complex draw(fading_tap *tap)
{
    double re = channel_gauss_draw(tap->gauss, &tap->random);
    double im = channel_gauss_draw(tap->gauss, &tap->random);

    return complex_of(re * sqrt(0.5), im * sqrt(0.5));
}

double complex fading_tap_node(fading_tap *tap)
{
    double complex sum = 0.0;

    tap->noise[tap->noise_at] = draw(tap);
    tap->noise_at = (tap->noise_at + 1) % tap->fir_length;
    size_t to_end = tap->fir_length - tap->noise_at;
    for (size_t i = 0; i < to_end; i++) {
        sum += tap->fir[i] * tap->noise[tap->noise_at + i];
    }
    for (size_t i = to_end; i < tap->fir_length; i++) {
        sum += tap->fir[i] * tap->noise[i - to_end];
    }
    return sum;
}

/* Lagrange's cubic through the nodes at -1, 0, 1, 2, by powers of the position between 0 and 1. */
static void fit_cubic(fading_tap *tap)
{
    const double complex *y = tap->node;

    tap->cubic[0] = y[1];
    tap->cubic[1] = y[2] - y[0] / 3.0 - y[1] / 2.0 - y[3] / 6.0;
    tap->cubic[2] = (y[0] + y[2]) / 2.0 - y[1];
    tap->cubic[3] = (y[3] - y[0]) / 6.0 + (y[1] - y[2]) / 2.0;
}

void fading_tap_advance(fading_tap *tap)
{
    for (int i = 0; i < 3; i++) {
        tap->node[i] = tap->node[i + 1];
    }
    tap->node[3] = fading_tap_node(tap);
    fit_cubic(tap);
}

void fading_tap_start(fading_tap *tap, const mb_random *random)
{
    tap->random = *random;
    tap->noise_at = 0;
    for (size_t i = 0; i < tap->fir_length; i++) {
        tap->noise[i] = draw(tap);
    }
    for (int i = 0; i < 4; i++) {
        tap->node[i] = fading_tap_node(tap);
    }
    fit_cubic(tap);
}
