#include "mirrorband/filter.h"

#include <math.h>

#include "design.h"

double mb_kaiser_beta(double attenuation_db)
{
    if (attenuation_db > 50.0) {
        return 0.1102 * (attenuation_db - 8.7);
    }
    if (attenuation_db > 21.0) {
        return 0.5842 * pow(attenuation_db - 21.0, 0.4) + 0.07886 * (attenuation_db - 21.0);
    }
    return 0.0;
}

size_t mb_kaiser_length(double attenuation_db, double transition_hz, double rate_hz)
{
    double width = 2.0 * MB_PI * transition_hz / rate_hz;
    double count = ceil((fmax(attenuation_db, 8.0) - 7.95) / (2.285 * width)) + 1.0;

    return (size_t)count | 1u;
}

double mb_bessel_i0(double x)
{
    double term = 1.0, sum = 1.0;

    for (int k = 1; term > 1e-18 * sum; k++) {
        term *= 0.25 * x * x / ((double)k * (double)k);
        sum += term;
    }
    return sum;
}

void mb_kaiser_window(size_t count, double beta, double *window)
{
    double middle = 0.5 * ((double)count - 1.0), scale = 1.0 / mb_bessel_i0(beta);

    for (size_t i = 0; i < count; i++) {
        double x = middle > 0.0 ? ((double)i - middle) / middle : 0.0;
        window[i] = mb_bessel_i0(beta * sqrt(fmax(0.0, 1.0 - x * x))) * scale;
    }
}

static mb_status check_design(double transition_hz, double attenuation_db, double rate_hz)
{
    if (mb_check_range("rate_hz", rate_hz, 1e-3, 1e12, "Hz") != MB_OK ||
        mb_check_range("transition_hz", transition_hz, 2e-6 * rate_hz, 0.5 * rate_hz, "Hz") != MB_OK ||
        mb_check_range("attenuation_db", attenuation_db, 21.0, 160.0, "dB") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    return MB_OK;
}

/* Ideal band-pass from low to high (turns per sample) under a Kaiser window; low 0 makes a low-pass of
 * gain 1. */
static mb_status windowed_band(double low, double high, double attenuation_db, size_t count, float **taps)
{
    double *window = mb_allocate(count, sizeof *window);
    float *made = mb_allocate(count, sizeof *made);
    double middle = 0.5 * ((double)count - 1.0), sum = 0.0;

    *taps = NULL;
    if (window == NULL || made == NULL) {
        mb_release(window);
        mb_release(made);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a filter of %zu taps", count);
    }
    mb_kaiser_window(count, mb_kaiser_beta(attenuation_db), window);
    for (size_t i = 0; i < count; i++) {
        double t = (double)i - middle;
        double ideal = 2.0 * (high - low);
        if (t != 0.0) {
            ideal = (sin(2.0 * MB_PI * high * t) - sin(2.0 * MB_PI * low * t)) / (MB_PI * t);
        }
        window[i] *= ideal;
        sum += window[i];
    }
    for (size_t i = 0; i < count; i++) {
        made[i] = (float)(low > 0.0 ? window[i] : window[i] / sum);
    }
    mb_release(window);
    *taps = made;
    return MB_OK;
}

mb_status mb_design_lowpass(double cutoff_hz, double transition_hz, double attenuation_db, double rate_hz,
                            float **taps, size_t *count)
{
    *taps = NULL;
    *count = 0;
    if (check_design(transition_hz, attenuation_db, rate_hz) != MB_OK ||
        mb_check_range("cutoff_hz", cutoff_hz, 1e-7 * rate_hz, 0.5 * rate_hz, "Hz") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    *count = mb_kaiser_length(attenuation_db, transition_hz, rate_hz);
    return windowed_band(0.0, cutoff_hz / rate_hz, attenuation_db, *count, taps);
}

mb_status mb_design_bandpass(double low_hz, double high_hz, double transition_hz, double attenuation_db,
                             double rate_hz, float **taps, size_t *count)
{
    *taps = NULL;
    *count = 0;
    if (check_design(transition_hz, attenuation_db, rate_hz) != MB_OK ||
        mb_check_range("low_hz", low_hz, 1e-7 * rate_hz, 0.5 * rate_hz, "Hz") != MB_OK ||
        mb_check_range("high_hz", high_hz, low_hz, 0.5 * rate_hz, "Hz") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    *count = mb_kaiser_length(attenuation_db, transition_hz, rate_hz);
    return windowed_band(low_hz / rate_hz, high_hz / rate_hz, attenuation_db, *count, taps);
}
