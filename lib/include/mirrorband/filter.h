/**
 * filter.h - filters and changes of rate: designs, FIR filters, the Fourier transform, the oscillator,
 * resampling, and the fast path from wideband to baseband and back.
 */
#ifndef MIRRORBAND_FILTER_H
#define MIRRORBAND_FILTER_H

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/** What a filter counted since it was made. */
typedef struct mb_filter_counts {
    uint64_t non_finite; /* input samples that were infinite or no number, taken as zero */
} mb_filter_counts;

/* ---- Fourier transform -----------------------------------------------------------------------------------
 */

/** Complex transform of one length (FFTW, single precision, estimated plan: the same bits every time). */
typedef struct mb_fft mb_fft;

/** length: 1 to 2^26. Errors: ARGUMENT, MEMORY. Thread: control (one planner lock for all). */
MB_API mb_status mb_fft_create(size_t length, bool inverse, mb_fft **out);

/** Transforms `length` samples, unnormalised; in may be out. Thread: stream. */
MB_API void mb_fft_process(mb_fft *fft, const mb_cf32 *in, mb_cf32 *out);

/** Accepts NULL. Thread: control. */
MB_API void mb_fft_destroy(mb_fft *fft);

/* ---- designs ---------------------------------------------------------------------------------------------
 */

/** Shape parameter of a Kaiser window for a stop-band attenuation. Source: Kaiser, ISCAS 1974. Thread: any.
 */
MB_API double mb_kaiser_beta(double attenuation_db);

/** Odd number of taps for a transition width in Hz at a rate in Hz. Source: as above. Thread: any. */
MB_API size_t mb_kaiser_length(double attenuation_db, double transition_hz, double rate_hz);

/** Symmetric Kaiser window of `count` values. Thread: any. */
MB_API void mb_kaiser_window(size_t count, double beta, double *window);

/**
 * Linear-phase low-pass, -6 dB at cutoff_hz, gain 1 at 0 Hz, designed in double precision (liquid-dsp designs
 * in single). *taps is to be given back with mb_release. Errors: ARGUMENT (cutoff_hz, transition_hz,
 * attenuation_db, rate_hz), MEMORY. Thread: control.
 */
MB_API mb_status mb_design_lowpass(double cutoff_hz, double transition_hz, double attenuation_db,
                                   double rate_hz, float **taps, size_t *count);

/** Linear-phase band-pass, -6 dB at low_hz and high_hz, gain 1 between. As mb_design_lowpass.
 * Thread: control. */
MB_API mb_status mb_design_bandpass(double low_hz, double high_hz, double transition_hz,
                                    double attenuation_db, double rate_hz, float **taps, size_t *count);

/* ---- FIR filter ------------------------------------------------------------------------------------------
 */

typedef struct mb_fir_settings {
    const float *taps; /* copied */
    size_t tap_count;  /* 1 to 2^20 */
} mb_fir_settings;

/** FIR filter with real taps for real or complex samples; one object is used for one kind of sample. */
typedef struct mb_fir mb_fir;

/** Errors: ARGUMENT, MEMORY. Thread: control. */
MB_API mb_status mb_fir_create(const mb_fir_settings *settings, mb_fir **out);
/** n in, n out; in may be out. Non-finite input counts as zero. Thread: stream. */
MB_API void mb_fir_process_f32(mb_fir *fir, const float *in, size_t n, float *out);
MB_API void mb_fir_process_cf32(mb_fir *fir, const mb_cf32 *in, size_t n, mb_cf32 *out);
/** Delay of symmetric taps: (tap_count - 1) / 2. Thread: any. */
MB_API size_t mb_fir_delay_samples(const mb_fir *fir);
/** Thread: stream. */
MB_API mb_filter_counts mb_fir_state(const mb_fir *fir);
/** Back to how it was made, counts excepted. Thread: stream. */
MB_API void mb_fir_reset(mb_fir *fir);
/** Accepts NULL. Thread: control. */
MB_API void mb_fir_destroy(mb_fir *fir);

/* ---- oscillator ------------------------------------------------------------------------------------------
 */

/** Oscillator with a phase of 64 bits of a turn: no drift, no dead zone at small steps. Set to {0} to start.
 */
typedef struct mb_oscillator {
    uint64_t phase; /* 2^64 is a turn */
    uint64_t step;  /* per sample */
} mb_oscillator;

/** Sets the frequency, -rate/2 to rate/2; the phase goes on. Thread: any. */
MB_API void mb_oscillator_set(mb_oscillator *oscillator, double frequency_hz, double rate_hz);

/** out = in x exp(+j phase), spurs below -120 dBc; in may be out. Thread: stream. */
MB_API void mb_oscillator_rotate(mb_oscillator *oscillator, const mb_cf32 *in, size_t n, mb_cf32 *out);

/* ---- resampler: any rate to any rate ---------------------------------------------------------------------
 */

typedef struct mb_resampler_settings {
    double rate_in_hz;     /* 1 Hz to 1 GHz, exact to 1 mHz */
    double rate_out_hz;    /* likewise */
    double passband_hz;    /* flat up to here; 0: 0.45 of the lower rate */
    double attenuation_db; /* of images and aliases, 40 to 120 dB */
} mb_resampler_settings;

/**
 * Windowed ideal low-pass, evaluated at places kept in integers, so that days of streaming do not drift.
 * Output 0 is at the time of input 0, seen through a delay of mb_resampler_delay_s; the first input makes it.
 * Between passband_hz and the lower rate less passband_hz the gain falls: what folds there stays out of the
 * passband. Where the ratio of the rates is simple each place has taps of its own, else they are interpolated
 * linearly between so many places that the error stays below attenuation_db. Method: R. E. Crochiere and L.
 * R. Rabiner, Multirate Digital Signal Processing, 1983, section 2.4; Kaiser's window.
 */
typedef struct mb_resampler mb_resampler;

/** Thread: any. */
MB_API mb_resampler_settings mb_resampler_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_resampler_create(const mb_resampler_settings *settings, mb_resampler **out);
/** Takes all n samples; returns how many came out, at most mb_resampler_output_bound. Thread: stream. */
MB_API size_t mb_resampler_process_f32(mb_resampler *resampler, const float *in, size_t n, float *out);
MB_API size_t mb_resampler_process_cf32(mb_resampler *resampler, const mb_cf32 *in, size_t n, mb_cf32 *out);
/** Most samples that n inputs can give. Thread: any. */
MB_API size_t mb_resampler_output_bound(const mb_resampler *resampler, size_t n);
/** Time by which the output lags, s. Thread: any. */
MB_API double mb_resampler_delay_s(const mb_resampler *resampler);
/** Thread: stream. */
MB_API mb_filter_counts mb_resampler_state(const mb_resampler *resampler);
/** Back to how it was made, counts excepted. Thread: stream. */
MB_API void mb_resampler_reset(mb_resampler *resampler);
/** Accepts NULL. Thread: control. */
MB_API void mb_resampler_destroy(mb_resampler *resampler);

/* ---- decimator: wideband to baseband ---------------------------------------------------------------------
 */

typedef struct mb_decimator_settings {
    double rate_in_hz;     /* of the wideband samples */
    double rate_out_hz;    /* of the baseband, at most rate_in_hz */
    double offset_hz;      /* this frequency of the wideband goes to 0 */
    double passband_hz;    /* half width, flat within 0.05 dB */
    double attenuation_db; /* of all that would fall into the passband, 40 to 100 dB */
} mb_decimator_settings;

/**
 * Wideband is touched once: one short complex filter, rotated to the wanted frequency, decimates by a large
 * factor (three boxes whose zeros are spread over the bands that fold onto the wanted one), the mixing that
 * is left is done at the low rate with an exact phase, and a resampler that also levels the passband makes
 * the exact rate. Output 0 is at the time of input 0, seen through a delay of mb_decimator_delay_s. Between
 * passband_hz and rate_out_hz - passband_hz the gain falls, and what folds there stays out of the passband.
 * With equal rates it only mixes, without delay. Method: L. Lo Presti, IEEE Trans. CAS-II 47 (2000) 1232, for
 * the rotated zeros.
 */
typedef struct mb_decimator mb_decimator;

/** Thread: any. */
MB_API mb_decimator_settings mb_decimator_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_decimator_create(const mb_decimator_settings *settings, mb_decimator **out);
/** Takes all n samples; returns how many came out. One object is used for one kind of sample. Thread: stream.
 */
MB_API size_t mb_decimator_process_cf32(mb_decimator *decimator, const mb_cf32 *in, size_t n, mb_cf32 *out);
/** The same for 16-bit samples; full scale 32768 becomes 1. Thread: stream. */
MB_API size_t mb_decimator_process_ci16(mb_decimator *decimator, const mb_ci16 *in, size_t n, mb_cf32 *out);
/** Most samples that n inputs can give. Thread: any. */
MB_API size_t mb_decimator_output_bound(const mb_decimator *decimator, size_t n);
/** Time by which the output lags, s. Thread: any. */
MB_API double mb_decimator_delay_s(const mb_decimator *decimator);
/** Thread: stream. */
MB_API mb_filter_counts mb_decimator_state(const mb_decimator *decimator);
/** Back to how it was made, counts excepted. Thread: stream. */
MB_API void mb_decimator_reset(mb_decimator *decimator);
/** Accepts NULL. Thread: control. */
MB_API void mb_decimator_destroy(mb_decimator *decimator);

/* ---- interpolator: baseband to wideband ------------------------------------------------------------------
 */

typedef struct mb_interpolator_settings {
    double rate_in_hz;     /* of the baseband */
    double rate_out_hz;    /* of the wideband, at least rate_in_hz */
    double offset_hz;      /* 0 of the baseband goes to this frequency */
    double passband_hz;    /* half width, flat within 0.05 dB */
    double attenuation_db; /* of images, 40 to 100 dB */
} mb_interpolator_settings;

/**
 * A resampler makes 48 to 96 kHz (or more, where the passband is wide), half-band filters double the rate as
 * often as it takes, each only as long as the images of the passband ask for, and an oscillator moves it to
 * offset_hz. Output 0 is at the time of input 0, seen through a delay of mb_interpolator_delay_s. The
 * half-band filters are the midpoint interpolators of Lagrange, flat at both ends. Where rate_in_hz is
 * rate_out_hz it only mixes.
 */
typedef struct mb_interpolator mb_interpolator;

/** Thread: any. */
MB_API mb_interpolator_settings mb_interpolator_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_interpolator_create(const mb_interpolator_settings *settings, mb_interpolator **out);
/** Takes all n samples; returns how many came out. Thread: stream. */
MB_API size_t mb_interpolator_process(mb_interpolator *interpolator, const mb_cf32 *in, size_t n,
                                      mb_cf32 *out);
/** Most samples that n inputs can give. Thread: any. */
MB_API size_t mb_interpolator_output_bound(const mb_interpolator *interpolator, size_t n);
/** Time by which the output lags, s. Thread: any. */
MB_API double mb_interpolator_delay_s(const mb_interpolator *interpolator);
/** Thread: stream. */
MB_API mb_filter_counts mb_interpolator_state(const mb_interpolator *interpolator);
/** Back to how it was made, counts excepted. Thread: stream. */
MB_API void mb_interpolator_reset(mb_interpolator *interpolator);
/** Accepts NULL. Thread: control. */
MB_API void mb_interpolator_destroy(mb_interpolator *interpolator);

#ifdef __cplusplus
}
#endif

#endif
