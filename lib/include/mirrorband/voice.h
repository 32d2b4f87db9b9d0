/**
 * voice.h - transmit audio: band limit, level, compression and peak limit of the message, at one rate.
 *
 * band limit -> slow level -> syllabic compressor -> look-ahead limiter. The last three are one gain, found
 * ahead of time and smoothed by one window, so that the message is multiplied once and the products of the
 * changing gain fall off as fast as the window's spectrum. docs/method-modulation.md has the derivations.
 */
#ifndef MIRRORBAND_VOICE_H
#define MIRRORBAND_VOICE_H

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/** The transmit audio stage. */
typedef struct mb_voice mb_voice;

/** Settings of mb_voice; ranges in brackets. */
typedef struct mb_voice_settings {
    double rate_hz; /* sample rate in and out [16000, 192000] */
    double low_hz;  /* lower edge of the message, -6 dB [100, 1000] */
    double high_hz; /* upper edge of the message, -6 dB [low_hz + 500, min(6000, 0.4 rate_hz)] */
    double peak;    /* bound of |message|, between samples too, of full scale [0.001, 1]; default -1 dBFS */
    bool conditioning;               /* false: band limit, gain_db, and the limiter as a mere guard */
    double gain_db;                  /* fixed gain when conditioning is off [-60, 60] */
    double drive_db;                 /* peaks of strong syllables before the limiter, over `peak` [-20, 20] */
    double level_s;                  /* time constant of the slow level control [0.1, 30] */
    double max_gain_db;              /* ceiling of the whole gain before the limiter [0, 60] */
    double compression_ratio;        /* syllabic compressor, dB in per dB out [1, 20] */
    double compression_threshold_db; /* lower end of compression, re strong syllables [-60, 0] */
    double attack_s;                 /* compressor, towards less gain [0.001, 1] */
    double release_s;                /* compressor, towards more gain [0.01, 5] */
    double look_ahead_s;             /* how far the gain sees ahead; length of its window [0.002, 0.015]; from
                                        2.4 / low_hz on, its changes leave no carrier at 0 Hz */
} mb_voice_settings;

/** What the stage knows of itself; levels of the input after the band limit. */
typedef struct mb_voice_levels {
    double gain_db;         /* gain in force at the last output sample */
    double limiting_db;     /* how much of it the limiter took off, >= 0 */
    double speech_level_db; /* peak level of strong syllables, dBFS (slow level control) */
    double noise_level_db;  /* peak level of the background in pauses, dBFS */
    double peak;            /* greatest |output sample| since the start or the last reset */
    uint64_t non_finite;    /* input samples that were NaN or infinite, taken as zero */
} mb_voice_levels;

/** 48 kHz, 300-2700 Hz, peak 0.891 (-1 dBFS), conditioning on. Thread: any. */
MB_API mb_voice_settings mb_voice_settings_default(void);

/**
 * Makes the stage; the caller destroys it. Errors: ARGUMENT with the field that is out of its range, MEMORY.
 * Thread: control.
 */
MB_API mb_status mb_voice_create(const mb_voice_settings *settings, mb_voice **out);

/**
 * Takes count samples (full scale 1; beyond 8 they are clipped to 8) and makes count samples, delayed by
 * mb_voice_delay_samples. Never above settings.peak, between samples too: the limiter multiplies by the
 * sliding minimum of the gain needed, smoothed by a non-negative window of the same length and sum 1, so it
 * cannot overshoot, and between samples a signal of highest frequency F is at most 1/cos(pi F/rate) above its
 * samples. in may be out. Thread: stream.
 */
MB_API void mb_voice_process(mb_voice *voice, const float *in, size_t count, float *out);

/** Exact delay of the output in samples, conditioning on or off; by default 1082, 22.5 ms. Thread: any. */
MB_API size_t mb_voice_delay_samples(const mb_voice *voice);

/** State after the last sample processed. Thread: stream. */
MB_API mb_voice_levels mb_voice_state(const mb_voice *voice);

/** Back to the state just after creation. Thread: stream. */
MB_API void mb_voice_reset(mb_voice *voice);

/** Accepts NULL. Thread: control. */
MB_API void mb_voice_destroy(mb_voice *voice);

#ifdef __cplusplus
}
#endif

#endif
