/** parts.h - the inside of a channel. */
#ifndef CHANNEL_PARTS_H
#define CHANNEL_PARTS_H

#include "mirrorband/channel.h"

#include "disturb.h"
#include "fading.h"
#include "front.h"
#include "level.h"
#include "oscillator.h"

/* Work goes on in parts that end where the index is a multiple of this: the fading phase is unwrapped there.
 */
enum { CHANNEL_PART = 64 };

struct mb_channel {
    mb_channel_settings settings;
    channel_gauss gauss;

    double leak;
    channel_oscillator leak_carrier;
    channel_fading fading;
    bool turns; /* the oscillator does something */
    channel_oscillator oscillator;
    channel_level level;  /* on the signal */
    channel_level events; /* on everything, behind the impulses */
    double tone;
    channel_oscillator tone_carrier;
    channel_noise noise;
    channel_impulses impulses;
    channel_front front;

    uint64_t sample; /* the next one */
    uint64_t non_finite;
    double complex phasor[CHANNEL_PART];

    double complex delay_turn; /* of path 2 at carrier_hz */
    double spectrum_mean;      /* mean of cos(2 pi f delay) over the message */
    double fading_rad;         /* unwrapped, at the end of the last whole part */
    uint64_t truth_every;
    mb_truth_callback truth_callback;
    void *truth_user;
};

/** Checks every field. Thread: control. */
mb_status channel_check(const mb_channel_settings *settings);

/** Prepares what the truth needs, once; and for sample 0. Thread: stream. */
void channel_truth_prepare(mb_channel *channel);
void channel_truth_start(mb_channel *channel);

/** Called when a part has been processed: unwraps and calls back. Thread: stream. */
void channel_truth_follow(mb_channel *channel);

/** How many of count samples may be processed before channel_truth_follow. Thread: stream. */
size_t channel_truth_room(const mb_channel *channel, size_t count);

#endif
