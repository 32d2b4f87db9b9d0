#include "look_ahead.h"

#include "mirrorband/filter.h"

enum { LANES = 8 };

/* Sidelobes of the gain's spectrum; 1 - g of a limited voice is small, so this leaves margin below -70 dBc.
 */
static const double window_sidelobe_db = 70.0;

mb_status mb_look_ahead_start(mb_look_ahead *ahead, size_t length)
{
    double sum = 0.0;

    *ahead = (mb_look_ahead){.length = length};
    ahead->window = mb_allocate(length, sizeof *ahead->window);
    ahead->minima = mb_allocate(2 * length, sizeof *ahead->minima);
    ahead->queue = mb_allocate(length, sizeof *ahead->queue);
    ahead->queued = mb_allocate(length, sizeof *ahead->queued);
    if (ahead->window == NULL || ahead->minima == NULL || ahead->queue == NULL || ahead->queued == NULL) {
        mb_look_ahead_stop(ahead);
        return mb_fail(MB_ERROR_MEMORY, "look_ahead_s", "no memory for a look-ahead of %zu samples", length);
    }
    mb_kaiser_window(length, mb_kaiser_beta(window_sidelobe_db), ahead->window);
    for (size_t i = 0; i < length; i++) {
        sum += ahead->window[i];
    }
    for (size_t i = 0; i < length; i++) {
        ahead->window[i] /= sum;
    }
    return MB_OK;
}

static size_t wrapped(const mb_look_ahead *ahead, size_t slot)
{
    return slot >= ahead->length ? slot - ahead->length : slot;
}

/* Least of the last L values: candidates that a later, smaller value makes useless are dropped. */
static double sliding_minimum(mb_look_ahead *ahead, double wanted)
{
    if (ahead->used > 0 && ahead->queued[ahead->head] + ahead->length <= ahead->count) {
        ahead->head = wrapped(ahead, ahead->head + 1);
        ahead->used--;
    }
    while (ahead->used > 0 && ahead->queue[wrapped(ahead, ahead->head + ahead->used - 1)] >= wanted) {
        ahead->used--;
    }
    size_t slot = wrapped(ahead, ahead->head + ahead->used);
    ahead->queue[slot] = wanted;
    ahead->queued[slot] = ahead->count++;
    ahead->used++;
    return ahead->queue[ahead->head];
}

/* Weighted sum in eight explicit lanes: the same bits whether or not the compiler makes vectors of them. */
static double weigh(const double *values, const double *weights, size_t count)
{
    double lane[LANES] = {0.0};
    size_t i = 0;

    for (; i + LANES <= count; i += LANES) {
        for (size_t j = 0; j < LANES; j++) {
            lane[j] += values[i + j] * weights[i + j];
        }
    }
    for (size_t j = 0; i < count; i++, j++) {
        lane[j] += values[i] * weights[i];
    }
    return ((lane[0] + lane[1]) + (lane[2] + lane[3])) + ((lane[4] + lane[5]) + (lane[6] + lane[7]));
}

double mb_look_ahead_next(mb_look_ahead *ahead, double wanted)
{
    double least = sliding_minimum(ahead, wanted);

    ahead->newest = wrapped(ahead, ahead->newest + 1);
    ahead->minima[ahead->newest] = least;
    ahead->minima[ahead->newest + ahead->length] = least;
    return weigh(ahead->minima + ahead->newest + 1, ahead->window, ahead->length);
}

void mb_look_ahead_clear(mb_look_ahead *ahead, double gain)
{
    ahead->newest = 0;
    ahead->head = ahead->used = 0;
    ahead->count = 0;
    for (size_t i = 0; i < 2 * ahead->length; i++) {
        ahead->minima[i] = gain;
    }
}

void mb_look_ahead_stop(mb_look_ahead *ahead)
{
    mb_release(ahead->window);
    mb_release(ahead->minima);
    mb_release(ahead->queue);
    mb_release(ahead->queued);
    *ahead = (mb_look_ahead){0};
}
