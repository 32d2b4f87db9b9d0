/** look_ahead.h - gain that comes down before it must: sliding minimum smoothed by a window (voice room). */
#ifndef MB_VOICE_LOOK_AHEAD_H
#define MB_VOICE_LOOK_AHEAD_H

#include "mirrorband/core.h"

/**
 * For a wanted gain t[n] gives g[n] = sum_k w[k] min(t[n-k-L+1] .. t[n-k]), k = 0..L-1, w >= 0, sum w = 1.
 * Every minimum in the sum covers t[n-L+1], so g[n] <= t[n-L+1]: applied L-1 samples late it never exceeds
 * what was asked for.
 */
typedef struct mb_look_ahead {
    size_t length;    /* L */
    size_t newest;    /* slot of the newest minimum in the ring */
    double *window;   /* w, Kaiser */
    double *minima;   /* ring of L minima, written twice so that the newest L lie in one piece */
    double *queue;    /* rising candidates of the minimum, a ring of L */
    uint64_t *queued; /* index of each candidate */
    size_t head, used;
    uint64_t count; /* samples so far */
} mb_look_ahead;

/** Allocates for windows of length samples (at least 2). Errors: MEMORY. */
mb_status mb_look_ahead_start(mb_look_ahead *ahead, size_t length);

/** Takes the wanted gain of the newest sample, returns the gain for the sample length - 1 before. Stream. */
double mb_look_ahead_next(mb_look_ahead *ahead, double wanted);

/** As if the wanted gain had been `gain` for ever. */
void mb_look_ahead_clear(mb_look_ahead *ahead, double gain);

void mb_look_ahead_stop(mb_look_ahead *ahead);

#endif
