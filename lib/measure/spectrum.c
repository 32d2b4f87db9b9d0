#include "mirrorband/filter.h"
#include "mirrorband/measure.h"

#include "window.h"

#include <math.h>
#include <string.h>

enum { SMALLEST_STRETCH = 16 };

struct mb_spectrum {
    mb_spectrum_settings settings;
    mb_window_shape shape;
    size_t hop;  /* samples from one stretch to the next */
    size_t fill; /* samples waiting */
    float *window;
    mb_cf32 *waiting; /* the stretch being filled */
    mb_cf32 *work;
    double *sum; /* power of every bin summed over the stretches, in the order of the transform */
    mb_fft *fft;
    uint64_t stretches, samples, non_finite;
};

mb_spectrum_settings mb_spectrum_settings_default(void)
{
    return (mb_spectrum_settings){.rate_hz = 48000.0,
                                  .length = 4096,
                                  .window = MB_WINDOW_KAISER,
                                  .sidelobe_db = 115.0,
                                  .overlap = 0.75};
}

static mb_status check(const mb_spectrum_settings *settings)
{
    mb_status status = mb_check_range("rate_hz", settings->rate_hz, 1e-3, 1e9, "Hz");

    if (status == MB_OK) {
        status = mb_check_range("length", (double)settings->length, 16.0, 4194304.0, "samples");
    }
    if (status == MB_OK && (settings->length & (settings->length - 1)) != 0) {
        status = mb_fail(MB_ERROR_ARGUMENT, "length", "length must be a power of two; it is %zu",
                         settings->length);
    }
    if (status == MB_OK) {
        status = mb_check_range("window", settings->window, MB_WINDOW_KAISER, MB_WINDOW_RECTANGULAR, "");
    }
    if (status == MB_OK) {
        status = mb_check_range("sidelobe_db", settings->sidelobe_db, 40.0, 140.0, "dB");
    }
    if (status == MB_OK) {
        status = mb_check_range("overlap", settings->overlap, 0.0, 0.9, "");
    }
    return status;
}

static mb_status allocate(mb_spectrum *spectrum)
{
    size_t length = spectrum->settings.length;

    spectrum->window = mb_allocate(length, sizeof *spectrum->window);
    spectrum->waiting = mb_allocate(length, sizeof *spectrum->waiting);
    spectrum->work = mb_allocate(length, sizeof *spectrum->work);
    spectrum->sum = mb_allocate(length, sizeof *spectrum->sum);
    if (spectrum->window == NULL || spectrum->waiting == NULL || spectrum->work == NULL ||
        spectrum->sum == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a spectrum of %zu bins", length);
    }
    return mb_fft_create(length, false, &spectrum->fft);
}

mb_status mb_spectrum_create(const mb_spectrum_settings *settings, mb_spectrum **out)
{
    *out = NULL;
    mb_status status = check(settings);
    if (status != MB_OK) {
        return status;
    }
    mb_spectrum *spectrum = mb_allocate(1, sizeof *spectrum);
    if (spectrum == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a spectrum");
    }
    spectrum->settings = *settings;
    status = allocate(spectrum);
    if (status != MB_OK) {
        mb_spectrum_destroy(spectrum);
        return status;
    }
    size_t again = (size_t)((double)settings->length * settings->overlap);
    spectrum->hop = settings->length - again;
    spectrum->shape =
        mb_window_fill(settings->window, settings->sidelobe_db, settings->length, spectrum->window);
    *out = spectrum;
    return MB_OK;
}

void mb_spectrum_reset(mb_spectrum *spectrum)
{
    spectrum->fill = 0;
    spectrum->stretches = spectrum->samples = spectrum->non_finite = 0;
    memset(spectrum->sum, 0, spectrum->settings.length * sizeof *spectrum->sum);
}

void mb_spectrum_destroy(mb_spectrum *spectrum)
{
    if (spectrum == NULL) {
        return;
    }
    mb_fft_destroy(spectrum->fft);
    mb_release(spectrum->window);
    mb_release(spectrum->waiting);
    mb_release(spectrum->work);
    mb_release(spectrum->sum);
    mb_release(spectrum);
}

static double magnitude_squared(mb_cf32 x)
{
    return (double)x.re * (double)x.re + (double)x.im * (double)x.im;
}

static void take_stretch(mb_spectrum *spectrum)
{
    size_t length = spectrum->settings.length;

    for (size_t i = 0; i < length; i++) {
        spectrum->work[i].re = spectrum->waiting[i].re * spectrum->window[i];
        spectrum->work[i].im = spectrum->waiting[i].im * spectrum->window[i];
    }
    mb_fft_process(spectrum->fft, spectrum->work, spectrum->work);
    for (size_t i = 0; i < length; i++) {
        spectrum->sum[i] += magnitude_squared(spectrum->work[i]);
    }
    spectrum->stretches++;
    spectrum->fill = length - spectrum->hop;
    memmove(spectrum->waiting, spectrum->waiting + spectrum->hop, spectrum->fill * sizeof *spectrum->waiting);
}

static void take(mb_spectrum *spectrum, mb_cf32 sample)
{
    spectrum->waiting[spectrum->fill++] = sample;
    spectrum->samples++;
    if (spectrum->fill == spectrum->settings.length) {
        take_stretch(spectrum);
    }
}

void mb_spectrum_process_cf32(mb_spectrum *spectrum, const mb_cf32 *in, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        bool good = isfinite(in[i].re) && isfinite(in[i].im);
        spectrum->non_finite += !good;
        take(spectrum, good ? in[i] : (mb_cf32){0.0f, 0.0f});
    }
}

void mb_spectrum_process_f32(mb_spectrum *spectrum, const float *in, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        bool good = isfinite(in[i]);
        spectrum->non_finite += !good;
        take(spectrum, (mb_cf32){good ? in[i] : 0.0f, 0.0f});
    }
}

mb_spectrum_info mb_spectrum_state(const mb_spectrum *spectrum)
{
    const mb_spectrum_settings *settings = &spectrum->settings;
    double step_hz = settings->rate_hz / (double)settings->length;
    bool partial = spectrum->stretches == 0 && spectrum->fill >= SMALLEST_STRETCH;
    double widening = partial ? (double)settings->length / (double)spectrum->fill : 1.0;

    return (mb_spectrum_info){.length = settings->length,
                              .rate_hz = settings->rate_hz,
                              .step_hz = step_hz,
                              .noise_width_hz = step_hz * spectrum->shape.noise_bins * widening,
                              .lobe_hz = step_hz * spectrum->shape.lobe_bins * widening,
                              .stretches = spectrum->stretches,
                              .samples = spectrum->samples,
                              .non_finite = spectrum->non_finite};
}

/* Before the first stretch is full: a window as long as what there is, the rest of the stretch zero. */
static mb_status partial_power(const mb_spectrum *spectrum, double *power)
{
    size_t length = spectrum->settings.length, fill = spectrum->fill;
    float *window = mb_allocate(fill, sizeof *window);

    if (window == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a window of %zu samples", fill);
    }
    mb_window_shape shape =
        mb_window_fill(spectrum->settings.window, spectrum->settings.sidelobe_db, fill, window);
    for (size_t i = 0; i < length; i++) {
        float weight = i < fill ? window[i] : 0.0f;
        spectrum->work[i].re = i < fill ? spectrum->waiting[i].re * weight : 0.0f;
        spectrum->work[i].im = i < fill ? spectrum->waiting[i].im * weight : 0.0f;
    }
    mb_release(window);
    mb_fft_process(spectrum->fft, spectrum->work, spectrum->work);
    for (size_t i = 0; i < length; i++) {
        power[(i + length / 2) % length] =
            magnitude_squared(spectrum->work[i]) / ((double)length * shape.square_sum);
    }
    return MB_OK;
}

mb_status mb_spectrum_power(const mb_spectrum *spectrum, double *power)
{
    size_t length = spectrum->settings.length;

    if (spectrum->stretches == 0 && spectrum->fill < SMALLEST_STRETCH) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "", "a spectrum needs at least %d samples; there are %zu",
                       SMALLEST_STRETCH, spectrum->fill);
    }
    if (spectrum->stretches == 0) {
        return partial_power(spectrum, power);
    }
    double scale = 1.0 / ((double)length * spectrum->shape.square_sum * (double)spectrum->stretches);
    for (size_t i = 0; i < length; i++) {
        power[(i + length / 2) % length] = spectrum->sum[i] * scale;
    }
    return MB_OK;
}
