/**
 * chain.h - the rooms joined up: audio to emission, IQ to audio live or by whole recordings, and their
 * settings from a config. No file is touched here: the caller reads and writes.
 */
#ifndef MIRRORBAND_CHAIN_H
#define MIRRORBAND_CHAIN_H

#include "mirrorband/carrier.h"
#include "mirrorband/channel.h"
#include "mirrorband/config.h"
#include "mirrorband/core.h"
#include "mirrorband/detect.h"
#include "mirrorband/modulate.h"
#include "mirrorband/voice.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- transmit --------------------------------------------------------------------------------------------
 */

typedef enum mb_modulator_kind {
    MB_MODULATOR_PRODUCT,   /* ideal product, with leak and IQ error as set */
    MB_MODULATOR_EQUIVALENT /* what a physical modulator amounts to, then leak and IQ error as set */
} mb_modulator_kind;

typedef struct mb_transmit_settings {
    double audio_rate_hz; /* of the audio in, 8 kHz to 192 kHz */
    double rate_hz;   /* of the IQ out, 48 kHz to 25 MHz, at least 2.2 times high cut and offset together */
    double offset_hz; /* of the suppressed carrier in the output */
    mb_voice_settings voice; /* voice.rate_hz is set by the chain */
    mb_modulator_kind modulator;
    mb_equivalent equivalent; /* MB_MODULATOR_EQUIVALENT: from one of the models of modulate.h */
    mb_product_settings product;
} mb_transmit_settings;

typedef struct mb_transmit mb_transmit;

/** 48 kHz audio to 240 kHz IQ, ideal product. Thread: any. */
MB_API mb_transmit_settings mb_transmit_settings_default(void);

/** Settings from sections audio and transmit. Errors: ARGUMENT with the field. Thread: control. */
MB_API mb_status mb_transmit_settings_from_config(const mb_config *config, double audio_rate_hz,
                                                  double rate_hz, mb_transmit_settings *settings);

/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_transmit_create(const mb_transmit_settings *settings, mb_transmit **out);

/**
 * Takes n audio samples; returns how many IQ samples came out, at most mb_transmit_output_bound. The delay of
 * the chain is taken off at the start: the first sample out belongs to the first sample in. Thread: stream.
 */
MB_API size_t mb_transmit_process(mb_transmit *transmit, const float *audio, size_t n, mb_cf32 *out);

/** After the last audio: what is still inside, piece by piece; 0 when the output is as long as the audio. out
 * has room for mb_transmit_output_bound(t, 0) samples. Thread: stream. */
MB_API size_t mb_transmit_drain(mb_transmit *transmit, mb_cf32 *out);

MB_API size_t mb_transmit_output_bound(const mb_transmit *transmit, size_t n);
/** Time from audio in to IQ out when run live, s. Thread: any. */
MB_API double mb_transmit_delay_s(const mb_transmit *transmit);
MB_API mb_voice_levels mb_transmit_state(const mb_transmit *transmit);
MB_API void mb_transmit_reset(mb_transmit *transmit);
/** Accepts NULL. Thread: control. */
MB_API void mb_transmit_destroy(mb_transmit *transmit);

/* ---- receive ---------------------------------------------------------------------------------------------
 */

typedef struct mb_receive_settings {
    double rate_hz;          /* of the IQ in, at least 12 kHz, to 25 MHz */
    double offset_hz;        /* where to look, from the centre of the input */
    double span_hz;          /* and how far to both sides, 50 Hz to 9.6 kHz */
    double baseband_rate_hz; /* inside; raised by a whole factor where the span asks for it */
    double audio_rate_hz;    /* of the audio out, 8 kHz to 192 kHz */
    double low_hz, high_hz;  /* audio kept flat */
    mb_sideband sideband;
    double look_ahead_s; /* live only */
    mb_tracker_kind tracker;
    double loop_bandwidth_hz, damping; /* Costas loop */
    bool gain_control;
    double level_dbfs;
    bool squelch;
    double squelch_quality;
} mb_receive_settings;

/** Live reception of 48 kHz IQ. Thread: any. */
MB_API mb_receive_settings mb_receive_settings_default(void);

/** Settings from sections audio and receive (look_ahead "all" gives 0 here; see mb_look_ahead_all). Errors:
 * ARGUMENT with the field. Thread: control. */
MB_API mb_status mb_receive_settings_from_config(const mb_config *config, double rate_hz,
                                                 mb_receive_settings *settings);

/** Whether receive.look_ahead asks for the whole recording. Thread: control. */
MB_API bool mb_look_ahead_all(const mb_config *config);

typedef struct mb_receive_state {
    mb_carrier_state carrier; /* carrier_offset_hz counts from the centre of the input */
    double gain_db;           /* of the gain control; 0 while off */
    bool squelch_open;        /* true while the squelch is off */
} mb_receive_state;

/** Live reception: bounded delay, sample by sample. */
typedef struct mb_receive mb_receive;

/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_receive_create(const mb_receive_settings *settings, mb_receive **out);
/** Takes n samples; returns how many audio samples came out, at most mb_receive_output_bound. Muted (zeros)
 * while no suppressed-carrier signal is locked. One object is used for one kind of sample. Thread: stream. */
MB_API size_t mb_receive_process_cf32(mb_receive *receive, const mb_cf32 *in, size_t n, float *audio);
MB_API size_t mb_receive_process_ci16(mb_receive *receive, const mb_ci16 *in, size_t n, float *audio);
MB_API size_t mb_receive_output_bound(const mb_receive *receive, size_t n);
/** Time from IQ in to audio out, s. Thread: any. */
MB_API double mb_receive_delay_s(const mb_receive *receive);
MB_API mb_receive_state mb_receive_state_now(const mb_receive *receive);
MB_API void mb_receive_reset(mb_receive *receive);
/** Accepts NULL. Thread: control. */
MB_API void mb_receive_destroy(mb_receive *receive);

/**
 * Reception of a whole recording in two passes over the same samples: listen to all, resolve, then process
 * all again. Audio comes without delay: the first sample out belongs to the first sample in.
 */
typedef struct mb_recording mb_recording;

/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_recording_create(const mb_receive_settings *settings, mb_recording **out);
/** First pass. Errors: MEMORY. Thread: control. */
MB_API mb_status mb_recording_listen_cf32(mb_recording *recording, const mb_cf32 *in, size_t n);
MB_API mb_status mb_recording_listen_ci16(mb_recording *recording, const mb_ci16 *in, size_t n);
/** Highest magnitude of the baseband in the first pass; the audio comes near it at most. Thread: any. */
MB_API double mb_recording_peak(const mb_recording *recording);
/** Between the passes. Errors: NO_SIGNAL, MEMORY. Thread: control. */
MB_API mb_status mb_recording_resolve(mb_recording *recording);
/** Second pass: n samples in, audio out, at most mb_recording_output_bound. Thread: stream. */
MB_API size_t mb_recording_process_cf32(mb_recording *recording, const mb_cf32 *in, size_t n, float *audio);
MB_API size_t mb_recording_process_ci16(mb_recording *recording, const mb_ci16 *in, size_t n, float *audio);
/** After the last sample: what is still inside, piece by piece; 0 when all is out. audio has room for
 * mb_recording_output_bound(r, 0) samples. Thread: stream. */
MB_API size_t mb_recording_drain(mb_recording *recording, float *audio);
MB_API size_t mb_recording_output_bound(const mb_recording *recording, size_t n);
/**
 * For measurements, instead of the audio in the second pass: the derotated baseband, at
 * mb_recording_baseband_rate_hz, carrier at 0 Hz and message on the real axis; at most
 * mb_recording_output_bound samples. Thread: stream.
 */
MB_API size_t mb_recording_derotate_cf32(mb_recording *recording, const mb_cf32 *in, size_t n, mb_cf32 *out);
MB_API double mb_recording_baseband_rate_hz(const mb_recording *recording);
/** Delay of the derotated baseband and of the track against the input, s. Thread: any. */
MB_API double mb_recording_baseband_delay_s(const mb_recording *recording);
/** Track after resolve; time_s counts from the first sample of the input, carrier_offset_hz from its centre.
 * Thread: control. */
MB_API size_t mb_recording_point_count(const mb_recording *recording);
MB_API mb_track_point mb_recording_point(const mb_recording *recording, size_t index);
/** Summary after resolve; mean offset over active speech. Thread: control. */
MB_API mb_receive_state mb_recording_state(const mb_recording *recording);
/** Accepts NULL. Thread: control. */
MB_API void mb_recording_destroy(mb_recording *recording);

/* ---- channel ---------------------------------------------------------------------------------------------
 */

/** Settings from section channel. signal_power: measured mean square over active speech, used where
 * channel.signal_level is auto. Errors: ARGUMENT with the field. Thread: control. */
MB_API mb_status mb_channel_settings_from_config(const mb_config *config, double rate_hz, uint64_t seed,
                                                 double signal_power, mb_channel_settings *settings);

#ifdef __cplusplus
}
#endif

#endif
