/** level.h - what changes the level with time: gain, one step, one gap. */
#ifndef CHANNEL_LEVEL_H
#define CHANNEL_LEVEL_H

#include "mirrorband/core.h"

/** Amplitude factors over time. Instants in samples from the start. */
typedef struct channel_level {
    double gain;
    double step_gain;
    uint64_t step_at;
    uint64_t gap_from, gap_to; /* equal: no gap */
} channel_level;

/** Factor of a sample, and how many samples from there on have the same one. Thread: any. */
double channel_level_at(const channel_level *level, uint64_t sample, uint64_t *run);

/** Applies the factors to count samples of which the first has the given index. Thread: stream. */
void channel_level_apply(const channel_level *level, uint64_t sample, mb_cf32 *samples, size_t count);

#endif
