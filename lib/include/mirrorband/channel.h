/**
 * channel.h - what happens between two stations: seeded impairments of complex samples, with the truth of
 * what was done. Definitions, order and sources: docs/method-channel.md.
 *
 * All impairments work at any rate from 8 kHz to 20 MHz and are defined so that their effect on the signal
 * does not depend on the rate. Levels are relative to signal_power, which the caller knows or measures.
 */
#ifndef MIRRORBAND_CHANNEL_H
#define MIRRORBAND_CHANNEL_H

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/** One channel: n samples in, n samples out, no delay. */
typedef struct mb_channel mb_channel;

/** Strong foreign signal. */
typedef enum mb_interferer {
    MB_INTERFERER_NONE = 0,
    MB_INTERFERER_TONE = 1 /* steady carrier of random phase */
} mb_interferer;

/**
 * Settings of mb_channel in the order in which the impairments act. Ranges in brackets; the default of each
 * impairment is "none".
 */
typedef struct mb_channel_settings {
    double rate_hz;            /* of the samples [8e3, 20e6] */
    uint64_t seed;             /* each impairment draws from its own stream of this seed */
    double signal_power;       /* mean square of the incoming signal over active speech [1e-12, 1e3] */
    double audio_bandwidth_hz; /* highest frequency of the message [100, rate/2]; default 2700 */
    double message_low_hz;     /* lowest frequency of the message [0, audio_bandwidth_hz); default 300 */
    double carrier_hz;         /* where the suppressed carrier is in the incoming samples [-rate/2, rate/2] */

    double leak_dbc;       /* carrier leak over signal_power [-200, 40], or -INFINITY: none */
    double leak_phase_rad; /* phase of the leak against the suppressed carrier [-2 pi, 2 pi] */

    unsigned paths;           /* 0 no fading, 1 one path, 2 two paths; average power of their sum is 1 */
    double delay_s;           /* of path 2 after path 1 [0, 0.1], rounded to a whole sample */
    double doppler_spread_hz; /* 2 sigma of the Gaussian Doppler spectrum [1e-4, 100]; 0: paths stand still */
    double second_path_db;    /* average power of path 2 over path 1 [-100, 100] */
    bool first_path_steady;   /* path 1 does not fade */

    double offset_hz;                /* shift in frequency at the first sample [-rate/2, rate/2] */
    double drift_hz_per_s;           /* change of the shift [-1e4, 1e4] */
    double phase_rad;                /* at the first sample [-1e3, 1e3] */
    bool random_phase;               /* adds a phase drawn uniformly from a full turn */
    double phase_noise_linewidth_hz; /* full width at half maximum of the line (Wiener phase) [0, rate/100] */

    double gain_db;         /* constant; noise, interferer and impulses follow it [-200, 200] */
    double level_step_at_s; /* from here on ... [0, 1e9] */
    double level_step_db;   /* ... the level is this much higher [-200, 200] */
    double gap_at_s;        /* from here on ... [0, 1e9] */
    double gap_length_s;    /* ... for so long there are zeros [0, 1e9]; 0: no gap */
    bool events_keep_noise; /* true (default): step and gap act on the signal alone, as a transmitter does;
                               false: on interferer, noise and impulses too, as a receiver's gain or lost
                               samples do */

    mb_interferer interferer;
    double interferer_offset_hz; /* from the centre of the samples [-rate/2, rate/2] */
    double interferer_db;        /* power over signal_power (with gain_db) [-200, 200] */

    double noise_snr_db; /* signal_power (with gain_db) over the noise power in 2 x audio_bandwidth_hz
                            [-100, 200], or INFINITY: none. White over the whole rate */

    double impulse_rate_hz; /* average number per second, Poisson [0, rate/10] */
    double impulse_db;      /* peak power of one impulse, seen in 2 x audio_bandwidth_hz, over signal_power
                               (with gain_db) [-200, 200] */

    double iq_gain_db;      /* gain of the quadrature rail over the in-phase rail [-20, 20] */
    double iq_phase_deg;    /* how far the rails are from 90 degrees apart [-80, 80] */
    double dc_dbfs;         /* constant added, of full scale 1.0 [-200, 20], or -INFINITY: none */
    double dc_phase_rad;    /* its direction; 0 = in-phase rail [-2 pi, 2 pi] */
    double clip_level;      /* each rail is limited to +-this [1e-6, 1e6], or INFINITY: none */
    unsigned quantise_bits; /* each rail to so many bits, full scale 1.0 [2, 24]; 0: none */
} mb_channel_settings;

/** What was really done to one sample. */
typedef struct mb_truth {
    uint64_t sample;          /* index since the start, from 0 */
    double time_s;            /* sample / rate */
    double carrier_phase_rad; /* what a coherent detector should use, unwrapped: phase of carrier_hz and of
                                 the oscillator (offset, drift, phase, phase noise) plus the best single phase
                                 of the fading, see mb_fading_phase */
    double carrier_offset_hz; /* carrier_hz + offset_hz + drift: frequency of the suppressed carrier from the
                                 centre, without phase noise and fading */
    double gain_db;           /* gain and level step; -400 in a gap */
    double fading_db;         /* power gain of the fading for a message with a flat spectrum */
    double path_re[2];        /* gains of the paths as seen at the suppressed carrier: path 2 includes the */
    double path_im[2];        /* turn of its delay at carrier_hz. Without fading 1 and 0 */
} mb_truth;

/** Receives the truth; called inside mb_channel_process: must not allocate, lock or block in a live chain. */
typedef void (*mb_truth_callback)(void *user, const mb_truth *truth);

/** What a channel has seen so far, and what it made of its settings. */
typedef struct mb_channel_counts {
    uint64_t samples;    /* processed */
    uint64_t non_finite; /* input samples that were NaN or infinite, taken as zero */
    uint64_t clipped;    /* output samples limited by clip_level or by the quantiser's range */
    uint64_t impulses;   /* that hit */
    double delay_s;      /* of path 2, as rounded to a sample */
    double phase_rad;    /* of the oscillator at the first sample, random part included */
} mb_channel_counts;

/** A channel that changes nothing: 48 kHz, signal_power 1, every impairment off. Thread: any. */
MB_API mb_channel_settings mb_channel_settings_default(void);

/**
 * Makes the channel; the caller destroys it. Errors: ARGUMENT with the name of the field that is out of its
 * range, MEMORY. Thread: control.
 */
MB_API mb_status mb_channel_create(const mb_channel_settings *settings, mb_channel **out);

/**
 * count samples to count samples (in-place allowed). Order: leak, fading, oscillator, gain with step and gap,
 * interferer, noise, impulses, (step and gap of the receiver), IQ imbalance, DC, clipping, quantisation.
 * Equal settings give equal output, bit for bit, however the input is cut into blocks. Thread: stream.
 */
MB_API void mb_channel_process(mb_channel *channel, const mb_cf32 *in, size_t count, mb_cf32 *out);

/** Back to the first sample of the same realisation; callback and settings stay. Thread: stream. */
MB_API void mb_channel_reset(mb_channel *channel);

/** Accepts NULL. Thread: control. */
MB_API void mb_channel_destroy(mb_channel *channel);

/** Delay of the output: 0. Thread: any. */
MB_API size_t mb_channel_delay_samples(const mb_channel *channel);

/** Counters since the start or the last reset. Thread: stream. */
MB_API mb_channel_counts mb_channel_state(const mb_channel *channel);

/** Truth of the sample processed last; before the first one, that of sample 0 to come. Thread: stream. */
MB_API mb_truth mb_channel_truth(const mb_channel *channel);

/**
 * From now on calls back with the truth of every sample whose index is a multiple of every_samples (sample 0
 * first), inside mb_channel_process. callback NULL or every_samples 0: no more. Thread: stream.
 */
MB_API void mb_channel_set_truth_callback(mb_channel *channel, uint64_t every_samples,
                                          mb_truth_callback callback, void *user);

/* ---- fading -------------------------------------------------------------------------------------------- */

/**
 * Delay and spread of a named two-path channel of ITU-R F.1487 Annex 3: "low-quiet", "low-moderate",
 * "low-disturbed", "mid-quiet", "mid-moderate", "mid-disturbed", "mid-near-vertical", "high-quiet",
 * "high-moderate", "high-disturbed"; and "gentle" (0.5 ms, 0.05 Hz; ours, with second_path_db -12).
 * Either pointer may be NULL. Errors: ARGUMENT, field "fading", with the names. Thread: control.
 */
MB_API mb_status mb_fading_preset(const char *name, double *delay_s, double *spread_hz);

/** Names of the presets, index from 0; NULL behind the last. Thread: any. */
MB_API const char *mb_fading_preset_name(size_t index);

/**
 * Sets paths, delay_s, doppler_spread_hz and second_path_db to those of a preset ("none": no fading).
 * Errors: as mb_fading_preset; the settings are then unchanged. Thread: control.
 */
MB_API mb_status mb_channel_settings_fading(mb_channel_settings *settings, const char *name);

/**
 * Best single phase for coherent detection of a real message with a flat spectrum from low_hz to high_hz that
 * came over two paths with complex gains (re, im) and delay_s between them. It maximises the power of the
 * in-phase arm: half the argument of a^2 + b^2 + 2ab c, with c the mean of cos(2 pi f delay) over the
 * spectrum; of the two solutions the one nearest to arg(a + b), so that low frequencies keep their sign.
 * Returns radians in (-pi, pi]. Thread: any.
 */
MB_API double mb_fading_phase(const double path_re[2], const double path_im[2], double delay_s, double low_hz,
                              double high_hz);

#ifdef __cplusplus
}
#endif

#endif
