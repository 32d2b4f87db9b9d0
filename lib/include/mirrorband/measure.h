/**
 * measure.h - figures of an emission and of received audio, and the theory they are held against.
 *
 * Levels: dBFS is relative to a complex sample of magnitude 1 (or a real one of 1), as mean square; dBc is
 * relative to the power of both sidebands. docs/method-measure.md defines every figure with its source.
 * Accumulators give the same figures whatever the block cuts.
 */
#ifndef MIRRORBAND_MEASURE_H
#define MIRRORBAND_MEASURE_H

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- active speech level ------------------------------------------------------------------------------- */

/**
 * Active speech level after ITU-T P.56 (12/2011) method B: two cascaded exponential smoothers of 0.03 s on
 * the envelope, hangover 0.2 s, margin 15.9 dB, thresholds at powers of two (2^-40 to 2^23 of full scale, so
 * that the level of the recording does not matter).
 */
typedef struct mb_speech_meter mb_speech_meter;

typedef struct mb_speech_meter_result {
    double active_level_db; /* mean square over active speech, dB re 1.0; -400 when nothing was active */
    double activity;        /* share of the time that is active, 0 to 1 */
    double rms_db;          /* mean square over all samples, dB re 1.0; -400 for silence */
    double peak;            /* largest magnitude, linear */
    uint64_t samples;
    uint64_t non_finite; /* samples that were NaN or infinite, taken as zero */
} mb_speech_meter_result;

/** rate_hz: 1000 to 1e8. Errors: ARGUMENT (rate_hz), MEMORY. Thread: control. */
MB_API mb_status mb_speech_meter_create(double rate_hz, mb_speech_meter **out);
/** Takes count real samples. Thread: stream. */
MB_API void mb_speech_meter_process_f32(mb_speech_meter *meter, const float *in, size_t count);
/** Takes count complex samples by their magnitude: of m(t) exp(j phase) that is |m(t)|. Thread: stream. */
MB_API void mb_speech_meter_process_cf32(mb_speech_meter *meter, const mb_cf32 *in, size_t count);
/** The level so far; may be asked at any point. Active power is mb_db_power(active_level_db). Thread: stream.
 */
MB_API mb_speech_meter_result mb_speech_meter_state(const mb_speech_meter *meter);
/** Forgets everything taken. Thread: stream. */
MB_API void mb_speech_meter_reset(mb_speech_meter *meter);
/** Accepts NULL. Thread: control. */
MB_API void mb_speech_meter_destroy(mb_speech_meter *meter);

/* ---- averaged spectrum --------------------------------------------------------------------------------- */

/** Mean power spectrum of overlapping windowed stretches (P. D. Welch, 1967). */
typedef struct mb_spectrum mb_spectrum;

typedef enum mb_window_kind {
    MB_WINDOW_KAISER,          /* sidelobes as asked for; settled by sidelobe_db */
    MB_WINDOW_BLACKMAN_HARRIS, /* four terms, sidelobes -92 dB */
    MB_WINDOW_HANN,
    MB_WINDOW_RECTANGULAR
} mb_window_kind;

typedef struct mb_spectrum_settings {
    double rate_hz;        /* > 0 to 1e9 */
    size_t length;         /* samples of a stretch = number of bins, a power of two, 16 to 4194304 */
    mb_window_kind window; /* default MB_WINDOW_KAISER */
    double sidelobe_db;    /* of the Kaiser window, 40 to 140 dB below its peak; default 115 */
    double overlap;        /* share of a stretch used again in the next, 0 to 0.9; default 0.75 */
} mb_spectrum_settings;

typedef struct mb_spectrum_info {
    size_t length;         /* number of bins */
    double rate_hz;        /* as set */
    double step_hz;        /* rate / length */
    double noise_width_hz; /* equivalent noise bandwidth of a bin */
    double lobe_hz;        /* half width of the main lobe, first null */
    uint64_t stretches; /* complete stretches averaged; 0: the power is that of what there is, zero padded */
    uint64_t samples;   /* samples taken */
    uint64_t non_finite;
} mb_spectrum_info;

/** 48 kHz, 4096 bins, Kaiser 115 dB, overlap 0.75. Thread: any. */
MB_API mb_spectrum_settings mb_spectrum_settings_default(void);
/** Errors: ARGUMENT (field named), MEMORY. Thread: control. */
MB_API mb_status mb_spectrum_create(const mb_spectrum_settings *settings, mb_spectrum **out);
/** Takes count complex samples. Thread: stream. */
MB_API void mb_spectrum_process_cf32(mb_spectrum *spectrum, const mb_cf32 *in, size_t count);
/** Takes count real samples (both halves of the spectrum mirror each other). Thread: stream. */
MB_API void mb_spectrum_process_f32(mb_spectrum *spectrum, const float *in, size_t count);
/** Thread: any. */
MB_API mb_spectrum_info mb_spectrum_state(const mb_spectrum *spectrum);
/**
 * Writes info.length mean powers, bin i at (i - length/2) * step_hz. All bins together add up to the mean
 * square of the samples; a line of power P adds up to P over +-lobe_hz; a density D per Hz is D * step_hz a
 * bin. Errors: NO_SIGNAL with fewer than 16 samples, MEMORY. Thread: control.
 */
MB_API mb_status mb_spectrum_power(const mb_spectrum *spectrum, double *power);
/** Forgets everything taken. Thread: stream. */
MB_API void mb_spectrum_reset(mb_spectrum *spectrum);
/** Accepts NULL. Thread: control. */
MB_API void mb_spectrum_destroy(mb_spectrum *spectrum);

/* ---- figures of an emission ---------------------------------------------------------------------------- */

/**
 * Figures of a suppressed-carrier double-sideband emission from its complex samples, in bounded memory at any
 * rate: a fine spectrum of the neighbourhood, a wide one of the whole band, and one of under 1 Hz around the
 * missing carrier. Sidelobes of all windows and the stop bands of the decimators lie below -110 dB.
 */
typedef struct mb_emission mb_emission;

typedef struct mb_emission_settings {
    double rate_hz;           /* 12000 to 64e6 */
    double carrier_offset_hz; /* where the missing carrier is, within +-1 Hz (derotate first if it drifts);
                                 default 0 */
    double half_width_hz; /* what lies within +- this belongs to the signal, 500 to 20000 and below 0.45 rate;
                             4000 */
    double resolution_hz; /* widest noise bandwidth of a bin of the fine spectrum, 2 to 100; default 10 */
} mb_emission_settings;

typedef struct mb_emission_result {
    uint64_t samples;
    uint64_t non_finite;
    double duration_s;
    double mean_power_dbfs;   /* of everything in the band */
    double pep_dbfs;          /* peak envelope power: highest |sample|^2 (47 CFR 97.3(b)) */
    double active_level_dbfs; /* ITU-T P.56 on the envelope of the neighbourhood of the signal */
    double activity;          /* share of the time that is active */

    bool carrier_found;            /* false: nothing stands out, the suppressions are lower bounds */
    double carrier_offset_hz;      /* of the line if found, else as set */
    double carrier_suppression_db; /* mean power of both sidebands over that of the carrier line (= -dBc) */
    double carrier_suppression_active_db; /* the same with the sideband power over active speech */
    double carrier_suppression_pep_db;    /* PEP over the carrier line */

    double occupied_99_hz;        /* 0.5 % of the power below, 0.5 % above (RR 1.153) */
    double occupied_99_signal_hz; /* the same of what lies within half_width_hz, less the noise: for noisy
                                     recordings */
    double occupied_low_hz;       /* its edges, relative to the missing carrier */
    double occupied_high_hz;
    double bandwidth_26db_hz; /* power outside is 26 dB below the power inside, half of it on each side */
    double
        bandwidth_26db_level_hz; /* outermost points where the density in 100 Hz is 26 dB below its highest */

    double
        noise_dbfs_per_hz; /* density of the noise between half_width_hz and the end of the fine spectrum */
    double upper_dbfs;     /* power of the upper sideband above the noise, up to half_width_hz, without the
                              carrier line */
    double lower_dbfs;
    double balance_db; /* upper over lower */

    double out_of_band_dbc;           /* all power beyond +-half_width_hz */
    double out_of_band_line_dbc;      /* the highest power there within out_of_band_line_width_hz */
    double out_of_band_line_hz;       /* where, relative to the missing carrier */
    double out_of_band_line_width_hz; /* 100 Hz, or the resolution of the wide spectrum if that is wider */
} mb_emission_result;

/** Fills the defaults named above for 48 kHz. Thread: any. */
MB_API mb_emission_settings mb_emission_settings_default(void);
/** Errors: ARGUMENT (field named), MEMORY. Thread: control. */
MB_API mb_status mb_emission_create(const mb_emission_settings *settings, mb_emission **out);
/** Takes count samples. Thread: stream. */
MB_API void mb_emission_process(mb_emission *emission, const mb_cf32 *in, size_t count);
/**
 * Works out the figures of everything taken so far; more may follow.
 * Errors: NO_SIGNAL (silence, or less than 0.25 s), MEMORY. Thread: control.
 */
MB_API mb_status mb_emission_finish(const mb_emission *emission, mb_emission_result *result);
/** The fine spectrum, 0 Hz at the missing carrier; belongs to the emission. For pictures. Thread: control. */
MB_API const mb_spectrum *mb_emission_fine(const mb_emission *emission);
/** The spectrum of the whole band, 0 Hz at the centre of the samples; NULL when the fine one covers it.
 * Thread: control. */
MB_API const mb_spectrum *mb_emission_wide(const mb_emission *emission);
/** Forgets everything taken. Thread: stream. */
MB_API void mb_emission_reset(mb_emission *emission);
/** Accepts NULL. Thread: control. */
MB_API void mb_emission_destroy(mb_emission *emission);

/* ---- tones --------------------------------------------------------------------------------------------- */

/** Levels of products are relative to one of the two tones (mean of both); re PEP of the pair they are 6.02
 * dB lower. */
typedef struct mb_two_tone_result {
    double tone_dbfs[2];    /* power of each tone, both signs of frequency together */
    double second_order_db; /* highest of f2-f1, f1+f2, 2 f1, 2 f2 */
    double third_order_db;  /* highest of |2 f1-f2|, 2 f2-f1, 2 f1+f2, 2 f2+f1, 3 f1, 3 f2 */
    double fifth_order_db;  /* highest of |3 f1-2 f2|, 3 f2-2 f1 */
    double highest_db;      /* highest line of any kind but the tones and the carrier */
    double highest_hz;      /* where */
} mb_two_tone_result;

/**
 * Intermodulation of two audio tones (700 and 1900 Hz by common practice) from a spectrum of audio, or of a
 * double-sideband emission with its missing carrier at 0 Hz: lines are taken at both signs of each frequency.
 * Errors: ARGUMENT (low_hz, high_hz: in order, apart by 4 lobes, inside the spectrum), NO_SIGNAL, MEMORY.
 * Thread: control.
 */
MB_API mb_status mb_two_tone(const mb_spectrum *spectrum, double low_hz, double high_hz,
                             mb_two_tone_result *result);

typedef struct mb_sinad_result {
    double frequency_hz; /* of the tone found: the highest line */
    double tone_dbfs;    /* mean square of the tone */
    double sinad_db;     /* all power in the band over what is not the tone */
    double snr_db;       /* tone over what is neither tone nor harmonic */
    double thd_db;       /* harmonics 2 to 10 within the band, relative to the tone */
} mb_sinad_result;

/**
 * Signal over noise and distortion of one tone in real audio, within low_hz to high_hz.
 * Errors: ARGUMENT (low_hz, high_hz), NO_SIGNAL, MEMORY. Thread: control.
 */
MB_API mb_status mb_sinad(const mb_spectrum *spectrum, double low_hz, double high_hz,
                          mb_sinad_result *result);

/* ---- received audio against its message ---------------------------------------------------------------- */

/**
 * Output SNR: what of the audio the best FIR of at most fir_span_s makes of the message, over the rest; one
 * gain and one polarity for the whole recording. Two passes over the same two streams, in bounded memory:
 * mb_score_align... mb_score_aligned, then mb_score_fit... mb_score_finish. Message and audio come in step;
 * NULL in place of one says that it has ended, and what has no partner is not scored. Both are limited to
 * 250-2800 Hz here.
 */
typedef struct mb_score mb_score;

typedef struct mb_score_settings {
    double rate_hz;     /* of both streams, 6000 to 16000; default 8000 */
    double max_delay_s; /* audio may come early or late by this, 0.01 to 4; default 1 */
    double fir_span_s;  /* 0.0005 to 0.006; default 0.006 = 49 taps at 8 kHz */
    double skip_s;      /* of the aligned streams not scored at the start, 0 to 3600; default 0 */
    double segment_s;   /* stretches for polarity and segment figures, 0.2 to 10; default 1 */
} mb_score_settings;

typedef struct mb_score_result {
    double snr_db;            /* output SNR */
    double delay_s;           /* the audio lags the message by this */
    double segment_median_db; /* SNR over active segments, gain and polarity free in each, FIR 2 ms; NAN if
                                 none */
    double segment_worst_db;
    uint64_t segments;         /* active segments */
    uint64_t polarity_changes; /* between one active segment and the next */
    double scored_s;           /* length scored */
    double gain_db;            /* power of the fitted part over that of the message */
    uint64_t non_finite;
} mb_score_result;

/** Fills the defaults named above. Thread: any. */
MB_API mb_score_settings mb_score_settings_default(void);
/** Errors: ARGUMENT (field named), MEMORY. Thread: control. */
MB_API mb_status mb_score_create(const mb_score_settings *settings, mb_score **out);
/** First pass: takes count samples of each (NULL: that one has ended). Thread: stream. */
MB_API void mb_score_align(mb_score *score, const float *message, const float *audio, size_t count);
/** Ends the first pass: finds the delay. Errors: NO_SIGNAL (message or audio silent). Thread: control. */
MB_API mb_status mb_score_aligned(mb_score *score);
/** Second pass: the same samples again. Ignored before mb_score_aligned. Thread: stream. */
MB_API void mb_score_fit(mb_score *score, const float *message, const float *audio, size_t count);
/** Ends the second pass. Errors: NO_SIGNAL (nothing left to score, or silent there). Thread: control. */
MB_API mb_status mb_score_finish(mb_score *score, mb_score_result *result);
/** Ready for a first pass again. Thread: stream. */
MB_API void mb_score_reset(mb_score *score);
/** Accepts NULL. Thread: control. */
MB_API void mb_score_destroy(mb_score *score);

/* ---- ideal detection ----------------------------------------------------------------------------------- */

/** Coherent detection with the true carrier phase: the yardstick of every receiver here. */
typedef struct mb_ideal mb_ideal;

/** One row of a truth: the unwrapped carrier phase at a time after the first sample. */
typedef struct mb_phase_point {
    double time_s;
    double phase_rad;
} mb_phase_point;

typedef struct mb_ideal_settings {
    double rate_hz; /* of the complex samples, 1000 to 64e6; default 16000 */
    bool linear;    /* straight lines between the points instead of a cubic through them; default false */
} mb_ideal_settings;

/** 16 kHz, cubic. Thread: any. */
MB_API mb_ideal_settings mb_ideal_settings_default(void);
/** Errors: ARGUMENT (field named), MEMORY. Thread: control. */
MB_API mb_status mb_ideal_create(const mb_ideal_settings *settings, mb_ideal **out);
/**
 * Offers points in rising order of time; returns how many were taken (room for 4096 that lie ahead). Points
 * that are not finite or not later than the last are skipped. Thread: stream.
 */
MB_API size_t mb_ideal_track(mb_ideal *ideal, const mb_phase_point *points, size_t count);
/** Says that no more points come: the phase runs on at its last slope. Thread: stream. */
MB_API void mb_ideal_track_end(mb_ideal *ideal);
/**
 * Detects up to count samples into out (real, in-phase arm); returns how many, fewer when the track does not
 * reach further (the cubic needs two points ahead). Thread: stream.
 */
MB_API size_t mb_ideal_process(mb_ideal *ideal, const mb_cf32 *in, size_t count, float *out);
/** Samples that were NaN or infinite, taken as zero. Thread: stream. */
MB_API uint64_t mb_ideal_non_finite(const mb_ideal *ideal);
/** Back to the first sample, without points. Thread: stream. */
MB_API void mb_ideal_reset(mb_ideal *ideal);
/** Accepts NULL. Thread: control. */
MB_API void mb_ideal_destroy(mb_ideal *ideal);

/* ---- theory -------------------------------------------------------------------------------------------- */

/** One-sided noise bandwidth, Hz, of a second-order type-2 loop (F. M. Gardner). Thread: any. */
MB_API double mb_theory_loop_bandwidth_hz(double natural_rad_s, double damping);
/** Natural frequency, rad/s, of the loop with that noise bandwidth. Thread: any. */
MB_API double mb_theory_natural_rad_s(double loop_bandwidth_hz, double damping);
/**
 * Phase variance, rad^2, of a Costas or squaring loop: (N0 BL/P)(1 + N0 B/(2P)) (Proakis and Salehi).
 * carrier_to_density_hz: P/N0, P the mean power of the signal; prefilter_hz: B, two-sided width before the
 * loop. Thread: any.
 */
MB_API double mb_theory_costas_variance(double carrier_to_density_hz, double loop_bandwidth_hz,
                                        double prefilter_hz);
/** Squaring loss, a factor up to 1: 1/(1 + N0 B/(2P)). Thread: any. */
MB_API double mb_theory_squaring_loss(double carrier_to_density_hz, double prefilter_hz);
/** Variance, rad^2, of the phase of one block of seconds, estimated as half the argument of the sum of
 * squares; snr: linear, in prefilter_hz. Thread: any. */
MB_API double mb_theory_block_variance(double snr, double prefilter_hz, double seconds);
/** Lock quality (Pi-Pq)/(Pi+Pq) = cos(2 phase error) snr/(1+snr), snr linear. Thread: any. */
MB_API double mb_theory_lock_quality(double phase_error_rad, double snr);
/** Modified Bessel function I0(x) exp(-|x|). Thread: any. */
MB_API double mb_theory_bessel_i0_scaled(double x);
/** Phase variance, rad^2, of a first-order loop at loop SNR rho > 0 (Tikhonov density; Viterbi 1963). Thread:
 * any. */
MB_API double mb_theory_tikhonov_variance(double rho);
/** Mean time, s, to the first slip of a first-order loop: pi^2 rho I0(rho)^2/(2 BL) (Viterbi 1963). Thread:
 * any. */
MB_API double mb_theory_slip_time_s(double rho, double loop_bandwidth_hz);
/** Cramer-Rao bound of frequency, variance in (rad/sample)^2, of one complex tone of unknown phase in count
 * samples; snr: tone power over complex noise power (Rife and Boorstyn 1974). Thread: any. */
MB_API double mb_theory_frequency_bound(double snr, double count);
/** The same for the phase at the first sample, rad^2, frequency unknown. Thread: any. */
MB_API double mb_theory_phase_bound(double snr, double count);
/** Power of the in-phase arm at a phase error, dB: 20 log cos. Thread: any. */
MB_API double mb_theory_phase_error_db(double phase_error_rad);
/** Power of the quadrature arm over the in-phase arm, dB: 20 log tan. Thread: any. */
MB_API double mb_theory_quadrature_db(double phase_error_rad);
/** Fluctuation power re mean of the in-phase arm under a Gaussian phase error of small rms: s^4/2, dB.
 * Thread: any. */
MB_API double mb_theory_phase_jitter_db(double rms_rad);
/** Image rejection, dB, of an IQ gain and phase error; +infinity without error. Thread: any. */
MB_API double mb_theory_image_rejection_db(double gain_db, double phase_deg);
/** SNR, dB, of an ideal quantiser for a full-scale sine: 20 N log 2 + 10 log 1.5 (Bennett 1948). Thread: any.
 */
MB_API double mb_theory_quantiser_db(int bits);
/** PEP over mean power, dB, of full AM by one tone of modulation index 0 to 1. Thread: any. */
MB_API double mb_theory_am_pep_db(double index);
/** PEP over mean power, dB, of suppressed-carrier double sideband by tones equal tones whose crests meet: 2
 * N. Thread: any. */
MB_API double mb_theory_dsb_pep_db(int tones);
/** Necessary bandwidth, Hz: twice the highest modulating frequency (ITU-R SM.1138, A3E). Thread: any. */
MB_API double mb_theory_necessary_hz(double highest_hz);
/** Bandwidth as three digits and a letter (47 CFR 2.202(b)): 5400 -> "5K40". out: 5 chars. Errors: ARGUMENT
 * (bandwidth_hz: 0.001 to 999e9). Thread: control. */
MB_API mb_status mb_theory_bandwidth_text(double bandwidth_hz, char out[5]);
/** Emission designator of double-sideband telephony: 2700 -> "5K40A3E". out: 8 chars. Errors: ARGUMENT
 * (highest_hz). Thread: control. */
MB_API mb_status mb_theory_designator(double highest_hz, char out[8]);

#ifdef __cplusplus
}
#endif

#endif
