#include "doubler.h"

#include <math.h>
#include <string.h>

/* Weight of the samples at +-(i + 1/2) for the value between them: the polynomial through 2 pairs samples. */
static double weight(size_t pairs, size_t i)
{
    double place = (double)i + 0.5, product = 1.0;

    for (size_t j = 0; j < pairs; j++) {
        double node = (double)j + 0.5;
        product *= -node / (-place - node); /* the node on the other side */
        product *= j == i ? 1.0 : node / (node - place);
    }
    return product;
}

size_t mb_doubler_pairs(double passband_hz, double rate_in_hz, double attenuation_db)
{
    double angle = MB_PI * (1.0 - passband_hz / rate_in_hz), most = pow(10.0, -attenuation_db / 20.0);

    for (size_t pairs = 1; pairs <= MB_DOUBLER_PAIRS; pairs++) {
        double gain = 0.5;
        for (size_t i = 0; i < pairs; i++) {
            gain += weight(pairs, i) * cos((double)(2 * i + 1) * angle);
        }
        if (fabs(gain) <= most) {
            return pairs;
        }
    }
    return 0;
}

mb_status mb_doubler_make(size_t pairs, size_t room, mb_doubler *doubler)
{
    *doubler = (mb_doubler){.pairs = pairs, .kept = 2 * pairs - 1, .room = room};
    for (size_t i = 0; i < pairs; i++) {
        doubler->taps[i] = (float)weight(pairs, i);
    }
    doubler->past = mb_allocate(doubler->kept + room, sizeof *doubler->past);
    if (doubler->past == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu samples", doubler->kept + room);
    }
    return MB_OK;
}

void mb_doubler_clear(mb_doubler *doubler)
{
    mb_release(doubler->past);
    doubler->past = NULL;
}

void mb_doubler_reset(mb_doubler *doubler)
{
    memset(doubler->past, 0, doubler->kept * sizeof *doubler->past);
}

/* Outputs for n new samples; inlined for a constant number of pairs, so that short ones need no loop. */
static inline void fill(const mb_doubler *doubler, size_t pairs, size_t n, mb_cf32 *out)
{
    for (size_t k = 0; k < n; k++) {
        const mb_cf32 *left = doubler->past + k + pairs - 1, *right = left + 1;
        float re = 0.0f, im = 0.0f;
        for (size_t i = 0; i < pairs; i++) {
            re += doubler->taps[i] * (left[-(ptrdiff_t)i].re + right[i].re);
            im += doubler->taps[i] * (left[-(ptrdiff_t)i].im + right[i].im);
        }
        out[2 * k] = left[0];
        out[2 * k + 1] = (mb_cf32){re, im};
    }
}

void mb_doubler_process(mb_doubler *doubler, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    memcpy(doubler->past + doubler->kept, in, n * sizeof *in);
    switch (doubler->pairs) {
    case 1:
        fill(doubler, 1, n, out);
        break;
    case 2:
        fill(doubler, 2, n, out);
        break;
    case 3:
        fill(doubler, 3, n, out);
        break;
    default:
        fill(doubler, doubler->pairs, n, out);
        break;
    }
    memmove(doubler->past, doubler->past + n, doubler->kept * sizeof *doubler->past);
}
