/**
 * assess.h - measurements joined: an emission or a received signal by its IQ samples alone, received audio
 * against its message, ideal detection with the truth, and one picture of it all. No input file is touched
 * here: the caller reads, twice, and hands the samples over. Definitions: docs/method-measure.md.
 */
#ifndef MIRRORBAND_ASSESS_H
#define MIRRORBAND_ASSESS_H

#include "mirrorband/chain.h"
#include "mirrorband/measure.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- IQ samples, blind ----------------------------------------------------------------------------------
 */

typedef struct mb_assess_iq_settings {
    mb_receive_settings receive; /* rate of the samples, where to look for the carrier, the audio band */
    double half_width_hz; /* what lies within +- this of the carrier belongs to the signal, 500 to 20000;
                             narrowed where the band ends sooner; default 4000 */
    double resolution_hz; /* of the spectra, 2 to 100; default 10 */
    double tone_low_hz;   /* of a two-tone test, default 700; both 0: no such test */
    double tone_high_hz;  /* default 1900 */
    bool picture;         /* keep what mb_assess_picture draws */
} mb_assess_iq_settings;

/** Figures of IQ samples. What needs a carrier is NAN when none was found. */
typedef struct mb_assess_iq_result {
    bool found;                  /* a suppressed-carrier signal was found */
    mb_emission_result emission; /* about the carrier found; else about receive.offset_hz, where powers and
                                    occupied bandwidth hold and the rest means nothing */
    double half_width_hz;        /* as used */
    double carrier_offset_hz;    /* of the missing carrier from the centre, mean over active speech */
    double carrier_drift_hz_per_s;
    double lock_quality;   /* (Pi-Pq)/(Pi+Pq), mean over active speech */
    double snr_db;         /* estimate: both sidebands over the noise in twice the audio bandwidth */
    double activity;       /* share of the time with speech, ITU-T P.56 on the envelope less its noise */
    double sidebands_dbfs; /* power of both sidebands above the noise, mean */
    double sidebands_active_dbfs; /* the same over active speech */
    double carrier_dbc;           /* carrier line over both sidebands, active speech; a bound (at most) when
                                     emission.carrier_found is false */
    double carrier_mean_dbc;      /* carrier line over the mean power of both sidebands */
    double carrier_pep_db;        /* carrier line over PEP */
    bool has_truth;               /* truth was handed over */
    double truth_offset_hz;       /* mean over the active speech where the offset was found */
    double offset_error_hz;       /* found less truth, mean over that time */
    double offset_rms_error_hz;   /* over that time */
    bool has_two_tone;            /* two tones stand out */
    mb_two_tone_result two_tone;
} mb_assess_iq_result;

typedef struct mb_assess_iq mb_assess_iq;

/** 48 kHz, reception as by default, +-4 kHz, 10 Hz, no two-tone test, no picture. Thread: any. */
MB_API mb_assess_iq_settings mb_assess_iq_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_assess_iq_create(const mb_assess_iq_settings *settings, mb_assess_iq **out);
/** First pass. Errors: MEMORY. Thread: control. */
MB_API mb_status mb_assess_iq_listen(mb_assess_iq *assess, const mb_cf32 *in, size_t n);
/**
 * Between the passes. Errors: NO_SIGNAL (no suppressed-carrier signal; the second pass may follow all the
 * same and gives the figures that need none), MEMORY. Thread: control.
 */
MB_API mb_status mb_assess_iq_resolve(mb_assess_iq *assess);
/**
 * Second pass: the same samples again. The figures are taken after taking the drift off: the samples are
 * turned back by the track of the carrier, straight lines between its points, about its mean offset. Ignored
 * before resolve. Thread: stream.
 */
MB_API void mb_assess_iq_process(mb_assess_iq *assess, const mb_cf32 *in, size_t n);
/** After resolve: one row of the truth, in order of time. Rows out of order or not finite are skipped.
 * Thread: stream. */
MB_API void mb_assess_iq_truth(mb_assess_iq *assess, double time_s, double carrier_offset_hz);
/** Works out the figures. Errors: NO_SIGNAL (silence, or less than 0.25 s), MEMORY. Thread: control. */
MB_API mb_status mb_assess_iq_finish(const mb_assess_iq *assess, mb_assess_iq_result *result);
/** Accepts NULL. Thread: control. */
MB_API void mb_assess_iq_destroy(mb_assess_iq *assess);

/**
 * Draws the spectra of the upper and the mirrored lower sideband over each other, the phase line (in-phase
 * against quadrature) and the carrier offset over time, against the truth where there is one. Without a
 * carrier found: the spectrum alone. subtitle: one line under the heading, or NULL. Errors: ARGUMENT (made
 * without .picture), NO_SIGNAL (nothing taken), FILE, MEMORY. Thread: control.
 */
MB_API mb_status mb_assess_picture(const mb_assess_iq *assess, const mb_assess_iq_result *result,
                                   const char *subtitle, const char *path);

/* ---- audio against its message --------------------------------------------------------------------------
 */

typedef struct mb_assess_audio_settings {
    double message_rate_hz; /* 6 kHz to 192 kHz */
    double audio_rate_hz;   /* likewise */
    double max_delay_s;     /* audio may come early or late by this, 0.01 to 4; default 1 */
    double skip_s;          /* not scored at the start, 0 to 3600; default 0 */
} mb_assess_audio_settings;

/** Which of the two is handed over. */
typedef enum mb_assess_lane {
    MB_ASSESS_MESSAGE, /* what was sent */
    MB_ASSESS_AUDIO,   /* what was heard */
    MB_ASSESS_NEITHER  /* both have ended */
} mb_assess_lane;

/** Output SNR, delay and polarity of audio against its message: mb_score at 8 kHz for streams of any rate. */
typedef struct mb_assess_audio mb_assess_audio;

/** 48 kHz message, 16 kHz audio, 1 s, nothing skipped. Thread: any. */
MB_API mb_assess_audio_settings mb_assess_audio_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_assess_audio_create(const mb_assess_audio_settings *settings, mb_assess_audio **out);
/** Which lane to feed next so that both stay in step; NEITHER ends the pass. Thread: stream. */
MB_API mb_assess_lane mb_assess_audio_next(const mb_assess_audio *assess);
/** Takes n samples of a lane, at most 0.5 s; nothing after its end. Errors: ARGUMENT when this lane is more
 * than 2 s ahead of the other. Thread: control. */
MB_API mb_status mb_assess_audio_push(mb_assess_audio *assess, mb_assess_lane lane, const float *in,
                                      size_t n);
/** Says that a lane has ended; silence follows until the other ends. Thread: stream. */
MB_API void mb_assess_audio_end(mb_assess_audio *assess, mb_assess_lane lane);
/** Ends the first pass; the same two streams are then to be handed over again. Errors: NO_SIGNAL (one of them
 * is silent). Thread: control. */
MB_API mb_status mb_assess_audio_aligned(mb_assess_audio *assess);
/** Ends the second pass. Errors: NO_SIGNAL (nothing left to score). Thread: control. */
MB_API mb_status mb_assess_audio_finish(mb_assess_audio *assess, mb_score_result *result);
/** Accepts NULL. Thread: control. */
MB_API void mb_assess_audio_destroy(mb_assess_audio *assess);

/* ---- ideal detection of IQ samples ----------------------------------------------------------------------
 */

typedef struct mb_assess_ideal_settings {
    double rate_hz;   /* of the samples, 12 kHz to 25 MHz */
    double offset_hz; /* mean offset of the carrier by the truth, +- half the rate less 3 kHz */
    double low_hz;    /* audio kept flat, as of the receiver it is the yardstick of; default 250 */
    double high_hz;   /* default 2750 */
} mb_assess_ideal_settings;

/** IQ samples of any rate and the true carrier phase in, audio as an ideal receiver makes it out. */
typedef struct mb_assess_ideal mb_assess_ideal;

/** 48 kHz, 0 Hz, the audio band of reception. Thread: any. */
MB_API mb_assess_ideal_settings mb_assess_ideal_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_assess_ideal_create(const mb_assess_ideal_settings *settings, mb_assess_ideal **out);
/** Rate of the audio: 16 kHz, or that of the samples if it is lower. Thread: any. */
MB_API double mb_assess_ideal_audio_rate_hz(const mb_assess_ideal *ideal);
/**
 * Offers rows of the truth in order of time, at least two rows ahead of the samples; returns how many were
 * taken (room for 4096 that lie ahead). Thread: stream.
 */
MB_API size_t mb_assess_ideal_truth(mb_assess_ideal *ideal, const mb_phase_point *points, size_t count);
/** Says that no more rows come: the phase runs on. Thread: stream. */
MB_API void mb_assess_ideal_truth_end(mb_assess_ideal *ideal);
/**
 * Takes n samples; *made tells how many of audio came out, at most mb_assess_ideal_bound(n). The first
 * belongs to the first sample in. Errors: ARGUMENT (the truth is more than a second behind the samples).
 * Thread: control.
 */
MB_API mb_status mb_assess_ideal_process(mb_assess_ideal *ideal, const mb_cf32 *in, size_t n, float *out,
                                         size_t *made);
/** After the last sample: what is still inside, piece by piece; *made is 0 when all is out. out has room for
 * mb_assess_ideal_bound(0). Errors: as process. Thread: control. */
MB_API mb_status mb_assess_ideal_drain(mb_assess_ideal *ideal, float *out, size_t *made);
MB_API size_t mb_assess_ideal_bound(const mb_assess_ideal *ideal, size_t n);
/** Back to the first sample, without truth. Thread: stream. */
MB_API void mb_assess_ideal_reset(mb_assess_ideal *ideal);
/** Accepts NULL. Thread: control. */
MB_API void mb_assess_ideal_destroy(mb_assess_ideal *ideal);

#ifdef __cplusplus
}
#endif

#endif
