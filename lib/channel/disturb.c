#include "disturb.h"

#include <math.h>

void channel_noise_add(channel_noise *noise, mb_cf32 *samples, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        samples[i].re += (float)(noise->sigma * channel_gauss_draw(noise->gauss, &noise->random));
        samples[i].im += (float)(noise->sigma * channel_gauss_draw(noise->gauss, &noise->random));
    }
}

/* Time to the next event of a Poisson process. */
static double interval(channel_impulses *impulses)
{
    return -log(1.0 - mb_random_uniform(&impulses->random)) * impulses->mean_interval;
}

void channel_impulses_start(channel_impulses *impulses, const mb_random *random)
{
    impulses->random = *random;
    impulses->sample = 0;
    impulses->hits = 0;
    impulses->next = interval(impulses);
}

void channel_impulses_add(channel_impulses *impulses, mb_cf32 *samples, size_t count)
{
    double end = (double)(impulses->sample + count);

    while (impulses->next < end) {
        size_t at = (size_t)((uint64_t)impulses->next - impulses->sample);
        double angle = 2.0 * MB_PI * mb_random_uniform(&impulses->random);
        samples[at].re += (float)(impulses->amplitude * cos(angle));
        samples[at].im += (float)(impulses->amplitude * sin(angle));
        impulses->next += interval(impulses);
        impulses->hits++;
    }
    impulses->sample += count;
}
