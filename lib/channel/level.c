#include "level.h"

/* Shortens *run to end before `instant`, if that lies ahead. */
static void end_before(uint64_t instant, uint64_t sample, uint64_t *run)
{
    if (instant > sample && instant - sample < *run) {
        *run = instant - sample;
    }
}

double channel_level_at(const channel_level *level, uint64_t sample, uint64_t *run)
{
    *run = UINT64_MAX;
    end_before(level->step_at, sample, run);
    end_before(level->gap_from, sample, run);
    end_before(level->gap_to, sample, run);
    if (sample >= level->gap_from && sample < level->gap_to) {
        return 0.0;
    }
    return sample >= level->step_at ? level->gain * level->step_gain : level->gain;
}

void channel_level_apply(const channel_level *level, uint64_t sample, mb_cf32 *samples, size_t count)
{
    while (count > 0) {
        uint64_t run;
        double factor = channel_level_at(level, sample, &run);
        size_t part = run < count ? (size_t)run : count;
        for (size_t i = 0; i < part && factor != 1.0; i++) {
            samples[i].re = (float)(factor * samples[i].re);
            samples[i].im = (float)(factor * samples[i].im);
        }
        sample += part;
        samples += part;
        count -= part;
    }
}
