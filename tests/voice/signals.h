/** signals.h - signals through the voice stage and figures of what comes out, for the voice tests. */
#ifndef TESTS_VOICE_SIGNALS_H
#define TESTS_VOICE_SIGNALS_H

#include "check.h"
#include "mirrorband/filter.h"
#include "mirrorband/voice.h"

/** Runs a fresh stage over count samples; in may be out. */
static inline void voice_run(const mb_voice_settings *settings, const float *in, size_t count, float *out)
{
    mb_voice *voice = NULL;

    assert_ok(mb_voice_create(settings, &voice));
    mb_voice_process(voice, in, count, out);
    mb_voice_destroy(voice);
}

static inline double mean_square(const float *samples, size_t count)
{
    double sum = 0.0;

    for (size_t i = 0; i < count; i++) {
        sum += (double)samples[i] * (double)samples[i];
    }
    return sum / (double)count;
}

static inline double greatest(const float *samples, size_t count)
{
    double most = 0.0;

    for (size_t i = 0; i < count; i++) {
        most = fmax(most, fabs((double)samples[i]));
    }
    return most;
}

/** Greatest magnitude between samples too: interpolated by 8 with a linear-phase filter flat to 0.4 of the
 * rate (pass-band error of a 100 dB design: 1e-5). */
static inline double true_peak(const float *samples, size_t count, double rate_hz)
{
    enum { TIMES = 8 };
    mb_fir_settings settings = {0};
    mb_fir *fir = NULL;
    float *taps = NULL, *fine = test_calloc(count * TIMES, sizeof *fine);

    assert_ok(
        mb_design_lowpass(0.5 * rate_hz, 0.2 * rate_hz, 100.0, TIMES * rate_hz, &taps, &settings.tap_count));
    settings.taps = taps;
    assert_ok(mb_fir_create(&settings, &fir));
    mb_release(taps);
    for (size_t i = 0; i < count; i++) {
        fine[i * TIMES] = (float)TIMES * samples[i];
    }
    mb_fir_process_f32(fir, fine, count * TIMES, fine);
    mb_fir_destroy(fir);
    double most = greatest(fine, count * TIMES);
    test_free(fine);
    return most;
}

/** What a steady tone leaves beside itself within low_hz..high_hz: root of its power over the tone's, in
 * percent. Fits the tone by least squares over the record and takes the spectrum of the rest. */
static inline double tone_residue_percent(const float *samples, size_t count, double tone_hz, double rate_hz,
                                          double *amplitude)
{
    double cc = 0.0, cs = 0.0, ss = 0.0, xc = 0.0, xs = 0.0, residue = 0.0;

    for (size_t i = 0; i < count; i++) {
        double angle = 2.0 * MB_PI * tone_hz * (double)i / rate_hz;
        double c = cos(angle), s = sin(angle), x = (double)samples[i];
        cc += c * c, cs += c * s, ss += s * s, xc += x * c, xs += x * s;
    }
    double determinant = cc * ss - cs * cs;
    double in_phase = (xc * ss - xs * cs) / determinant, quadrature = (xs * cc - xc * cs) / determinant;
    for (size_t i = 0; i < count; i++) {
        double angle = 2.0 * MB_PI * tone_hz * (double)i / rate_hz;
        double rest = (double)samples[i] - in_phase * cos(angle) - quadrature * sin(angle);
        residue += rest * rest;
    }
    *amplitude = hypot(in_phase, quadrature);
    return 100.0 * sqrt(residue / (double)count / (0.5 * *amplitude * *amplitude));
}

/** Frequency below which a share of the power lies, and power from a frequency upwards over all, in dB:
 * frames of 8192 under a Blackman-Harris window (sidelobes -92 dB), half overlapped. */
static inline void spectrum_figures(const float *samples, size_t count, double rate_hz, double share,
                                    double beyond_hz, double *share_hz, double *beyond_dbc)
{
    enum { FRAME = 8192 };
    mb_cf32 *frame = test_calloc(FRAME, sizeof *frame);
    double *power = test_calloc(FRAME / 2, sizeof *power), total = 0.0, beyond = 0.0, below = 0.0;
    mb_fft *fft = NULL;

    assert_ok(mb_fft_create(FRAME, false, &fft));
    for (size_t start = 0; start + FRAME <= count; start += FRAME / 2) {
        for (size_t i = 0; i < FRAME; i++) {
            double angle = 2.0 * MB_PI * (double)i / FRAME;
            double window =
                0.35875 - 0.48829 * cos(angle) + 0.14128 * cos(2.0 * angle) - 0.01168 * cos(3.0 * angle);
            frame[i] = (mb_cf32){(float)(window * (double)samples[start + i]), 0.0f};
        }
        mb_fft_process(fft, frame, frame);
        for (size_t bin = 0; bin < FRAME / 2; bin++) {
            power[bin] +=
                (double)frame[bin].re * (double)frame[bin].re + (double)frame[bin].im * (double)frame[bin].im;
        }
    }
    for (size_t bin = 0; bin < FRAME / 2; bin++) {
        total += power[bin];
        beyond += (double)bin * rate_hz / FRAME >= beyond_hz ? power[bin] : 0.0;
    }
    size_t edge = 0;
    for (; edge < FRAME / 2 && below < share * total; edge++) {
        below += power[edge];
    }
    *share_hz = (double)edge * rate_hz / FRAME;
    *beyond_dbc = mb_power_db(beyond / total);
    mb_fft_destroy(fft);
    test_free(power);
    test_free(frame);
}

#endif
