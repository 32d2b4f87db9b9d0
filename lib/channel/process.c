#include "parts.h"

#include <string.h>

static void add_carrier(channel_oscillator *carrier, double amplitude, double complex *phasor,
                        mb_cf32 *samples, size_t count)
{
    channel_oscillator_make(carrier, count, phasor);
    for (size_t i = 0; i < count; i++) {
        samples[i].re += (float)(amplitude * creal(phasor[i]));
        samples[i].im += (float)(amplitude * cimag(phasor[i]));
    }
}

static void turn(channel_oscillator *oscillator, double complex *phasor, mb_cf32 *samples, size_t count)
{
    channel_oscillator_make(oscillator, count, phasor);
    for (size_t i = 0; i < count; i++) {
        double re = samples[i].re, im = samples[i].im;
        samples[i].re = (float)(re * creal(phasor[i]) - im * cimag(phasor[i]));
        samples[i].im = (float)(re * cimag(phasor[i]) + im * creal(phasor[i]));
    }
}

/* Up to CHANNEL_PART samples in place. */
static void process_part(mb_channel *channel, mb_cf32 *samples, size_t count)
{
    if (channel->leak > 0.0) {
        add_carrier(&channel->leak_carrier, channel->leak, channel->phasor, samples, count);
    }
    channel_fading_apply(&channel->fading, samples, count);
    if (channel->turns) {
        turn(&channel->oscillator, channel->phasor, samples, count);
    }
    channel_level_apply(&channel->level, channel->sample, samples, count);
    if (channel->tone > 0.0) {
        add_carrier(&channel->tone_carrier, channel->tone, channel->phasor, samples, count);
    }
    if (channel->noise.sigma > 0.0) {
        channel_noise_add(&channel->noise, samples, count);
    }
    if (channel->impulses.mean_interval > 0.0) {
        channel_impulses_add(&channel->impulses, samples, count);
    }
    channel_level_apply(&channel->events, channel->sample, samples, count);
    channel_front_apply(&channel->front, samples, count);
}

void mb_channel_process(mb_channel *channel, const mb_cf32 *in, size_t count, mb_cf32 *out)
{
    while (count > 0) {
        size_t part = channel_truth_room(channel, count);
        if (out != in) {
            memcpy(out, in, part * sizeof *out);
        }
        channel->non_finite += mb_scrub_cf32(out, part);
        process_part(channel, out, part);
        channel->sample += part;
        channel_truth_follow(channel);
        in += part;
        out += part;
        count -= part;
    }
}
