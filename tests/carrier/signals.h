/**
 * signals.h - messages and suppressed-carrier signals made of seeded random numbers, for the tests of the
 * carrier, detect and chain rooms.
 */
#ifndef TESTS_CARRIER_SIGNALS_H
#define TESTS_CARRIER_SIGNALS_H

#include "check.h"
#include "mirrorband/filter.h"

#define SIGNAL_RATE_HZ     16000.0
#define SIGNAL_LOW_HZ      300.0
#define SIGNAL_HIGH_HZ     2700.0
#define SIGNAL_BAND_HZ     (2.0 * SIGNAL_HIGH_HZ) /* in which SNR is meant */
#define SIGNAL_VOICE_LEVEL 0.1                    /* root mean square of a voice while it speaks */

/** Samples in a time at SIGNAL_RATE_HZ. */
static inline size_t signal_samples(double seconds)
{
    return (size_t)lround(seconds * SIGNAL_RATE_HZ);
}

static inline double signal_power(const float *samples, size_t count)
{
    double sum = 0.0;

    for (size_t i = 0; i < count; i++) {
        sum += (double)samples[i] * (double)samples[i];
    }
    return sum / (double)count;
}

/** Band-limits in place to 300-2700 Hz; the transient of the filter is left in. */
static inline void signal_band_limit(float *samples, size_t count, double rate_hz)
{
    mb_fir_settings settings = {0};
    mb_fir *fir = NULL;
    float *taps = NULL;

    assert_ok(mb_design_bandpass(SIGNAL_LOW_HZ + 50.0, SIGNAL_HIGH_HZ - 50.0, 100.0, 60.0, rate_hz, &taps,
                                 &settings.tap_count));
    settings.taps = taps;
    assert_ok(mb_fir_create(&settings, &fir));
    mb_fir_process_f32(fir, samples, count, samples);
    mb_fir_destroy(fir);
    mb_release(taps);
}

static inline void signal_scale(float *samples, size_t count, double factor)
{
    for (size_t i = 0; i < count; i++) {
        samples[i] = (float)(factor * (double)samples[i]);
    }
}

/** White Gaussian message within 300-2700 Hz, mean square 1. */
static inline void signal_white(float *out, size_t count, uint64_t seed)
{
    mb_random random;

    mb_random_seed(&random, seed, 0);
    for (size_t i = 0; i < count; i++) {
        out[i] = (float)mb_random_normal(&random);
    }
    signal_band_limit(out, count, SIGNAL_RATE_HZ);
    signal_scale(out, count, 1.0 / sqrt(signal_power(out, count)));
}

/* A resonance of the vocal tract, 80 Hz wide: y = x + 2 r cos(w) y1 - r^2 y2. */
typedef struct signal_formant {
    double y1, y2;
} signal_formant;

static inline double signal_resonate(signal_formant *f, double x, double hz, double rate_hz)
{
    double r = exp(-MB_PI * 80.0 / rate_hz);
    double y = x + 2.0 * r * cos(2.0 * MB_PI * hz / rate_hz) * f->y1 - r * r * f->y2;

    f->y2 = f->y1;
    f->y1 = y;
    return (1.0 - r) * y;
}

/**
 * A synthetic voice at rate_hz: pulses of a moving pitch through three formants that change with each
 * syllable of 0.22 s, with some breath noise, 300-2700 Hz, SIGNAL_VOICE_LEVEL. Every seventh syllable is
 * left out.
 */
static inline void signal_voice_at(float *out, size_t count, double rate_hz, double pitch_hz, uint64_t seed)
{
    static const double tracts[5][3] = {
        {730, 1090, 2440}, {270, 2290, 2500}, {300, 870, 2240}, {530, 1840, 2480}, {570, 840, 2410}};
    signal_formant formants[3] = {{0.0, 0.0}};
    size_t syllable = (size_t)(0.22 * rate_hz);
    double turn = 0.0, moved = 1.0;
    const double *tract = tracts[0];
    mb_random random;

    mb_random_seed(&random, seed, 1);
    for (size_t i = 0; i < count; i++) {
        if (i % syllable == 0) {
            tract = tracts[mb_random_bits(&random) % 5];
            moved = 0.85 + 0.3 * mb_random_uniform(&random);
        }
        double part = (double)(i % syllable) / (double)syllable;
        turn += pitch_hz * moved * (1.0 + 0.12 * sin(MB_PI * part)) / rate_hz;
        double pulse = turn >= 1.0 ? 1.0 : 0.0;
        turn -= pulse;
        double x = (pulse + 0.01 * mb_random_normal(&random)) * sin(MB_PI * part);
        x = i / syllable % 7 == 6 ? 0.0 : x;
        double y = 0.0;
        for (size_t k = 0; k < 3; k++) {
            y += signal_resonate(&formants[k], x, tract[k], rate_hz);
        }
        out[i] = (float)y;
    }
    signal_band_limit(out, count, rate_hz);
    signal_scale(out, count, SIGNAL_VOICE_LEVEL * sqrt(6.0 / 7.0) / sqrt(signal_power(out, count)));
}

/** The same at SIGNAL_RATE_HZ. */
static inline void signal_voice(float *out, size_t count, double pitch_hz, uint64_t seed)
{
    signal_voice_at(out, count, SIGNAL_RATE_HZ, pitch_hz, seed);
}

/** Silence from one time to another, with edges of 10 ms. */
static inline void signal_pause(float *samples, double from_s, double to_s)
{
    size_t from = signal_samples(from_s), to = signal_samples(to_s), edge = signal_samples(0.01);

    for (size_t i = from; i < to; i++) {
        size_t depth = i - from < to - 1 - i ? i - from : to - 1 - i;
        double keep = depth < edge ? 0.5 + 0.5 * cos(MB_PI * (double)depth / (double)edge) : 0.0;
        samples[i] = (float)(keep * (double)samples[i]);
    }
}

/** Carrier of a test signal. */
typedef struct signal_carrier {
    double offset_hz;
    double drift_hz_s;
    double phase_rad; /* at the first sample */
} signal_carrier;

static inline double signal_phase(const signal_carrier *carrier, double sample)
{
    double t = sample / SIGNAL_RATE_HZ;

    return carrier->phase_rad + 2.0 * MB_PI * (carrier->offset_hz * t + 0.5 * carrier->drift_hz_s * t * t);
}

/** (message + full_carrier) exp(j phase). */
static inline void signal_am(const float *message, double full_carrier, size_t count,
                             const signal_carrier *carrier, mb_cf32 *out)
{
    for (size_t i = 0; i < count; i++) {
        double m = (double)message[i] + full_carrier, phase = signal_phase(carrier, (double)i);
        out[i] = (mb_cf32){(float)(m * cos(phase)), (float)(m * sin(phase))};
    }
}

/** Suppressed-carrier double sideband: message exp(j phase). */
static inline void signal_dsb(const float *message, size_t count, const signal_carrier *carrier, mb_cf32 *out)
{
    signal_am(message, 0.0, count, carrier, out);
}

/** The upper sideband alone; count must be a power of two. */
static inline void signal_ssb(const float *message, size_t count, const signal_carrier *carrier, mb_cf32 *out)
{
    mb_fft *forward = NULL, *back = NULL;

    assert_ok(mb_fft_create(count, false, &forward));
    assert_ok(mb_fft_create(count, true, &back));
    for (size_t i = 0; i < count; i++) {
        out[i] = (mb_cf32){message[i] / (float)count, 0.0f};
    }
    mb_fft_process(forward, out, out);
    memset(out + count / 2, 0, count / 2 * sizeof *out);
    mb_fft_process(back, out, out);
    for (size_t i = 0; i < count; i++) {
        double c = cos(signal_phase(carrier, (double)i)), s = sin(signal_phase(carrier, (double)i));
        double re = 2.0 * (double)out[i].re, im = 2.0 * (double)out[i].im;
        out[i] = (mb_cf32){(float)(re * c - im * s), (float)(re * s + im * c)};
    }
    mb_fft_destroy(forward);
    mb_fft_destroy(back);
}

/** Adds white noise so that signal_power over the noise in SIGNAL_BAND_HZ is snr_db. */
static inline void signal_add_noise(mb_cf32 *samples, size_t count, double power, double snr_db,
                                    uint64_t seed)
{
    double sigma = sqrt(0.5 * power * mb_db_power(-snr_db) * SIGNAL_RATE_HZ / SIGNAL_BAND_HZ);
    mb_random random;

    mb_random_seed(&random, seed, 2);
    for (size_t i = 0; i < count; i++) {
        samples[i].re += (float)(sigma * mb_random_normal(&random));
        samples[i].im += (float)(sigma * mb_random_normal(&random));
    }
}

/** A voice with noise as a whole: power for the SNR is that of the voice while it speaks. */
static inline void signal_noisy_voice(const float *message, size_t count, const signal_carrier *carrier,
                                      double snr_db, uint64_t seed, mb_cf32 *out)
{
    signal_dsb(message, count, carrier, out);
    signal_add_noise(out, count, SIGNAL_VOICE_LEVEL * SIGNAL_VOICE_LEVEL, snr_db, seed);
}

/** Correlation coefficient of message[from..to) with the in-phase arm `delay` samples later. */
static inline double signal_likeness(const float *message, const mb_cf32 *out, size_t from, size_t to,
                                     size_t delay)
{
    double mm = 0.0, oo = 0.0, mo = 0.0;

    for (size_t i = from; i < to; i++) {
        double m = (double)message[i], o = (double)out[i + delay].re;
        mm += m * m, oo += o * o, mo += m * o;
    }
    return mo / sqrt(fmax(mm * oo, 1e-60));
}

/** Power of the quadrature arm over that of the in-phase arm, dB. */
static inline double signal_quadrature_db(const mb_cf32 *out, size_t from, size_t to)
{
    double i2 = 0.0, q2 = 0.0;

    for (size_t i = from; i < to; i++) {
        i2 += (double)out[i].re * (double)out[i].re;
        q2 += (double)out[i].im * (double)out[i].im;
    }
    return mb_power_db(fmax(q2, 1e-60) / fmax(i2, 1e-60));
}

/** a - b brought to within half of the period. */
static inline double signal_difference(double a, double b, double period)
{
    return a - b - period * nearbyint((a - b) / period);
}

#endif
