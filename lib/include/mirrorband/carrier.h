/**
 * carrier.h - finding and following a carrier that is not there.
 *
 * A suppressed-carrier double-sideband signal m(t) exp(j phase(t)) has a real message, so its square has a
 * line at twice the carrier offset. Everything here takes complex baseband near the carrier and works from
 * that. Phase is known only to a multiple of pi: the polarity is arbitrary at the start and kept from then
 * on.
 */
#ifndef MIRRORBAND_CARRIER_H
#define MIRRORBAND_CARRIER_H

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- sighting: is there a suppressed carrier in this stretch, and where? ---------------------------------
 */

/** What one look at a stretch of baseband shows. */
typedef struct mb_sighting {
    double offset_hz; /* of the best candidate, from the centre of the baseband */
    double phase_rad; /* carrier phase at the middle of the stretch, modulo pi */
    double coherence; /* |sum w x^2| / sum w |x|^2, 0 to 1: share of the power that mirrors */
    double purity; /* coherence over what the noise floor beside the voice leaves possible; 1 = all mirrors */
    double centre_share; /* share of the power within 0.8 low_cut of the carrier, where a voice has none */
    double occupied;     /* share of the power in the band that stands above its noise floor */
    double snr_db;       /* estimate: power that mirrors over the rest, both in 2 x high_cut */
    bool accepted;       /* passes all thresholds for this length: a suppressed-carrier voice */
} mb_sighting;

typedef struct mb_sighting_settings {
    double rate_hz;       /* of the baseband, 8 kHz to 96 kHz */
    double length_s;      /* of the stretch looked at, 0.1 to 2 s */
    double span_hz;       /* looks within +- this of the centre, 10 Hz to 0.2 rate */
    double low_cut_hz;    /* lowest frequency of the message, 50 to 1000 Hz */
    double high_cut_hz;   /* highest frequency of the message, 1000 Hz to 0.45 rate */
    double coherence_min; /* thresholds of `accepted` */
    double purity_min;
    double centre_share_max;
} mb_sighting_settings;

typedef struct mb_sighter mb_sighter;

/** Settings for 16 kHz, 0.2 s, +-1 kHz, 300 to 2700 Hz. Thread: any. */
MB_API mb_sighting_settings mb_sighting_settings_default(void);

/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_sighter_create(const mb_sighting_settings *settings, mb_sighter **out);

/** Samples in one stretch. Thread: any. */
MB_API size_t mb_sighter_length(const mb_sighter *sighter);

/**
 * Looks at mb_sighter_length samples. The highest line of the squared signal within 2 span gives the
 * candidate (its height is the sum of m^2, which no pitch line exceeds, by Cauchy and Schwarz). Three tests
 * then tell a suppressed-carrier voice from all else: coherence (noise stays below about sqrt(2
 * ln(lines/p)/samples) with false-alarm probability p), purity (one sideband alone or a neighbour does not
 * mirror), and an empty centre (a carrier, or one sideband mirrored about its own pitch lines, is not empty
 * there). Thread: stream.
 */
MB_API mb_sighting mb_sighter_look(mb_sighter *sighter, const mb_cf32 *samples);

/**
 * The same tests for a carrier at offset_hz, whatever else there is. Where they are not passed, *elsewhere is
 * the best candidate of the span, as mb_sighter_look finds it; else it is not looked for. Thread: stream.
 */
MB_API mb_sighting mb_sighter_look_at(mb_sighter *sighter, const mb_cf32 *samples, double offset_hz,
                                      mb_sighting *elsewhere);

/** Accepts NULL. Thread: control. */
MB_API void mb_sighter_destroy(mb_sighter *sighter);

/* ---- Kalman filter of phase, frequency and drift ---------------------------------------------------------
 */

/** Estimate of the carrier at one instant, with its covariance (order phase, frequency, drift). */
typedef struct mb_phase_state {
    double phase_rad;
    double frequency_rad_s;
    double drift_rad_s2;
    double covariance[6]; /* pp, pf, pd, ff, fd, dd */
} mb_phase_state;

/** Random walks the oscillator is taken to do, as variance per second. */
typedef struct mb_phase_noise {
    double phase_rad2_s;
    double frequency_rad2_s3;
    double drift_rad2_s5;
} mb_phase_noise;

/** Moves the state by dt seconds (negative: back). Thread: stream. */
MB_API void mb_phase_predict(mb_phase_state *state, const mb_phase_noise *noise, double dt_s);

/** Takes in a phase measured with the given variance; innovation = measured - predicted phase. Thread:
 * stream. */
MB_API void mb_phase_update(mb_phase_state *state, double innovation_rad, double variance_rad2);

/**
 * One step back of the Rauch-Tung-Striebel smoother: from the filtered state at one instant and the smoothed
 * state dt later to the smoothed state of the first. Source: Rauch, Tung and Striebel, AIAA Journal 3 (1965).
 * Thread: stream.
 */
MB_API void mb_phase_smooth(mb_phase_state *filtered, const mb_phase_noise *noise, double dt_s,
                            const mb_phase_state *later);

/* ---- recovery: baseband in, derotated baseband out -------------------------------------------------------
 */

typedef enum mb_carrier_mode {
    MB_CARRIER_SEARCH, /* nothing found yet; output is muted */
    MB_CARRIER_LOCKED, /* following the sidebands */
    MB_CARRIER_HOLD,   /* the voice pauses; carried on by the last frequency and drift */
    MB_CARRIER_LOST    /* what was followed is no longer there; searching again, output muted */
} mb_carrier_mode;

/** Name of a mode in words. Thread: any. */
MB_API const char *mb_carrier_mode_text(mb_carrier_mode mode);

typedef enum mb_tracker_kind { MB_TRACKER_KALMAN, MB_TRACKER_COSTAS } mb_tracker_kind;

typedef struct mb_recovery_settings {
    double rate_hz;           /* of the baseband, 12 kHz to 48 kHz */
    double span_hz;           /* searches within +- this */
    double low_cut_hz;        /* of the message */
    double high_cut_hz;       /* of the message */
    double look_ahead_s;      /* fixed lag of the smoother, 0 to 5 s */
    mb_tracker_kind tracker;  /* Kalman tracker, or a textbook Costas loop behind the same interface */
    double loop_bandwidth_hz; /* of the Costas loop, one-sided noise bandwidth, 0.1 to 500 Hz */
    double damping;           /* of the Costas loop, 0.3 to 3 */
    mb_phase_noise noise;     /* oscillator model of the Kalman tracker */
    double drift_sigma_hz_s;  /* spread of the drift expected at the start, 0 to 100 Hz/s */
} mb_recovery_settings;

/** What the recovery knows now. */
typedef struct mb_carrier_state {
    mb_carrier_mode mode;
    double time_s;            /* of the sample last taken in, from the start or the last reset */
    double carrier_offset_hz; /* from the centre of the baseband */
    double drift_hz_s;
    double phase_sigma_rad; /* standard deviation of the phase in the tracker's own view */
    double lock_quality;    /* (P_i - P_q)/(P_i + P_q) over active speech of about 0.3 s */
    double snr_db;          /* estimate over active speech, noise in 2 x high_cut */
    double in_phase_dbfs;   /* power of the arms in the last block */
    double quadrature_dbfs;
    double active_s;         /* time with tracked voice so far */
    uint64_t locks;          /* times it went from search or lost to locked */
    uint64_t holds;          /* pauses carried over */
    bool polarity_uncertain; /* a pause was too long to be sure of the polarity behind it */
} mb_carrier_state;

typedef struct mb_recovery mb_recovery;

/** Settings of live reception: 16 kHz, +-1 kHz, 300 to 2700 Hz, 60 ms. Thread: any. */
MB_API mb_recovery_settings mb_recovery_settings_default(void);

/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_recovery_create(const mb_recovery_settings *settings, mb_recovery **out);

/**
 * n samples in, n out, rotated so that the message is real; out lags by mb_recovery_delay_samples. Zeros
 * while nothing is locked. in may be out. Non-finite input counts as zero. Thread: stream.
 */
MB_API void mb_recovery_process(mb_recovery *recovery, const mb_cf32 *in, size_t n, mb_cf32 *out);

/** Samples by which the output lags the input. Thread: any. */
MB_API size_t mb_recovery_delay_samples(const mb_recovery *recovery);

/** State after the last sample processed. Thread: stream. */
MB_API mb_carrier_state mb_recovery_state(const mb_recovery *recovery);

/** Back to the start. Thread: stream. */
MB_API void mb_recovery_reset(mb_recovery *recovery);

/** Accepts NULL. Thread: control. */
MB_API void mb_recovery_destroy(mb_recovery *recovery);

/* ---- smoother: the whole recording, in two passes --------------------------------------------------------
 */

/** One instant of a finished carrier track, every mb_smoother_step_s from time 0. */
typedef struct mb_track_point {
    double time_s;
    double phase_rad; /* unwrapped */
    double carrier_offset_hz;
    double phase_sigma_rad;
    double lock_quality;
    double snr_db;
    double in_phase_dbfs;
    double quadrature_dbfs;
    mb_carrier_mode mode;
} mb_track_point;

typedef struct mb_smoother mb_smoother;

/**
 * The same settings; look_ahead_s is not used. Grows by about 110 bytes per 10 ms taken in (40 MB an hour).
 * Errors: ARGUMENT with the field, MEMORY. Thread: control.
 */
MB_API mb_status mb_smoother_create(const mb_recovery_settings *settings, mb_smoother **out);

/** First pass: takes in the recording. May allocate. Errors: MEMORY. Thread: control. */
MB_API mb_status mb_smoother_listen(mb_smoother *smoother, const mb_cf32 *in, size_t n);

/**
 * Between the passes: joins the stretches of voice over their pauses (the multiple of pi that fits the
 * frequency and drift on both sides best) and smooths forward and back. Errors: NO_SIGNAL when no
 * suppressed-carrier voice was found. Thread: control.
 */
MB_API mb_status mb_smoother_resolve(mb_smoother *smoother);

/** Second pass: the same samples again, rotated, without delay; in may be out. Thread: stream. */
MB_API void mb_smoother_rotate(mb_smoother *smoother, const mb_cf32 *in, size_t n, mb_cf32 *out);

/** Starts the second pass again. Thread: stream. */
MB_API void mb_smoother_rewind(mb_smoother *smoother);

/** Points of the track after resolve. Thread: any after resolve. */
MB_API size_t mb_smoother_point_count(const mb_smoother *smoother);
MB_API mb_track_point mb_smoother_point(const mb_smoother *smoother, size_t index);

/** Time between track points. Thread: any. */
MB_API double mb_smoother_step_s(const mb_smoother *smoother);

/** Summary after resolve: mean offset over active speech, quality, SNR estimate, counts. Thread: any. */
MB_API mb_carrier_state mb_smoother_state(const mb_smoother *smoother);

/** Accepts NULL. Thread: control. */
MB_API void mb_smoother_destroy(mb_smoother *smoother);

/* ---- Costas loop -----------------------------------------------------------------------------------------
 */

typedef struct mb_costas_settings {
    double rate_hz;
    double loop_bandwidth_hz; /* one-sided noise bandwidth, 0.1 Hz to rate/50 */
    double damping;           /* 0.3 to 3 */
    double offset_hz;         /* where the loop starts */
    double offset_limit_hz;   /* clamp of the frequency about 0; 0 = none */
    double energy_time_s;     /* averaging of the energy the error is normalised by, 1 ms to 1 s */
    double gate; /* holds while the energy is below gate x its quiet floor and does not mirror; 0 = never */
} mb_costas_settings;

typedef struct mb_costas_state {
    double carrier_offset_hz;
    double phase_rad;
    double lock_quality;
    bool holding;
} mb_costas_state;

typedef struct mb_costas mb_costas;

/** Loop of 5 Hz. Thread: any. */
MB_API mb_costas_settings mb_costas_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_costas_create(const mb_costas_settings *settings, mb_costas **out);
/**
 * Second-order Costas loop: error I*Q over the averaged energy, small-BT gains of loop bandwidth and damping
 * (Gardner, Phaselock Techniques). n in, n out, no delay. in may be out. Thread: stream.
 */
MB_API void mb_costas_process(mb_costas *costas, const mb_cf32 *in, size_t n, mb_cf32 *out);
/** Sets phase and frequency, as an acquisition found them. Thread: stream. */
MB_API void mb_costas_steer(mb_costas *costas, double phase_rad, double offset_hz);
MB_API mb_costas_state mb_costas_state_get(const mb_costas *costas);
MB_API void mb_costas_reset(mb_costas *costas);
/** Accepts NULL. Thread: control. */
MB_API void mb_costas_destroy(mb_costas *costas);

#ifdef __cplusplus
}
#endif

#endif
