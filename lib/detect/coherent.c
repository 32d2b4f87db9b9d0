#include "mirrorband/detect.h"

#include <math.h>
#include <string.h>

#include "mirrorband/filter.h"

enum { CHUNK = 256 };

struct mb_coherent {
    mb_sideband sideband;
    mb_fir *in_phase;   /* band-pass on the in-phase arm */
    mb_fir *quadrature; /* one sideband: band-pass and quarter turn on the quadrature arm */
    float *taps;
    float *turned_taps;
    size_t delay;
    float arm_i[CHUNK], arm_q[CHUNK];
};

mb_coherent_settings mb_coherent_settings_default(void)
{
    return (mb_coherent_settings){
        .rate_hz = 16000.0,
        .low_hz = 250.0,
        .high_hz = 2750.0,
        .transition_hz = 120.0,
        .sideband = MB_SIDEBAND_BOTH,
    };
}

static mb_status check_settings(const mb_coherent_settings *s)
{
    if (mb_check_range("rate_hz", s->rate_hz, 8000.0, 192000.0, "Hz") != MB_OK ||
        mb_check_range("low_hz", s->low_hz, 50.0, 1000.0, "Hz") != MB_OK ||
        mb_check_range("high_hz", s->high_hz, 1000.0, 0.45 * s->rate_hz, "Hz") != MB_OK ||
        mb_check_range("transition_hz", s->transition_hz, 30.0, 1000.0, "Hz") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    if (s->high_hz <= s->low_hz) {
        return mb_fail(MB_ERROR_ARGUMENT, "high_hz", "high_hz must be above low_hz (%g Hz); it is %g Hz",
                       s->low_hz, s->high_hz);
    }
    if (s->sideband != MB_SIDEBAND_BOTH && s->sideband != MB_SIDEBAND_UPPER &&
        s->sideband != MB_SIDEBAND_LOWER) {
        return mb_fail(MB_ERROR_ARGUMENT, "sideband", "sideband must be one of the values of mb_sideband");
    }
    return MB_OK;
}

/*
 * One side of the spectrum is h(t) (1 + j H) of the signal; its real part is h * I -+ (H h) * Q. The quarter
 * turn H h of a band-pass h is made from the same design by turning every line of it: with h(t) = 2 l(t)
 * cos(w t) about the middle, H h = 2 l(t) sin(w t).
 */
static mb_status make_quarter_turn(mb_coherent *c, const mb_coherent_settings *s, size_t count)
{
    float *low = NULL;
    size_t low_count = 0;
    double half = 0.5 * (s->high_hz - s->low_hz), middle = 0.5 * (s->high_hz + s->low_hz);
    mb_status status = mb_design_lowpass(half + 0.5 * s->transition_hz, s->transition_hz, 60.0, s->rate_hz,
                                         &low, &low_count);

    if (status != MB_OK) {
        return status;
    }
    size_t size = low_count > count ? low_count : count;
    mb_release(c->taps);
    c->taps = mb_allocate(size, sizeof *c->taps);
    c->turned_taps = mb_allocate(size, sizeof *c->turned_taps);
    if (c->taps == NULL || c->turned_taps == NULL) {
        mb_release(low);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the detector");
    }
    double centre = 0.5 * ((double)low_count - 1.0);
    for (size_t i = 0; i < low_count; i++) {
        double angle = 2.0 * MB_PI * middle / s->rate_hz * ((double)i - centre);
        c->taps[i] = (float)(2.0 * (double)low[i] * cos(angle));
        c->turned_taps[i] = (float)(2.0 * (double)low[i] * sin(angle));
    }
    mb_release(low);
    c->delay = (low_count - 1) / 2;
    return mb_fir_create(&(mb_fir_settings){.taps = c->turned_taps, .tap_count = low_count}, &c->quadrature);
}

static mb_status make_filters(mb_coherent *c, const mb_coherent_settings *s)
{
    size_t count = 0;
    double half = 0.5 * s->transition_hz;
    mb_status status = mb_design_bandpass(s->low_hz - half, s->high_hz + half, s->transition_hz, 60.0,
                                          s->rate_hz, &c->taps, &count);

    c->delay = (count - 1) / 2;
    if (status == MB_OK && c->sideband != MB_SIDEBAND_BOTH) {
        status = make_quarter_turn(c, s, count);
        count = 2 * c->delay + 1;
    }
    if (status == MB_OK) {
        status = mb_fir_create(&(mb_fir_settings){.taps = c->taps, .tap_count = count}, &c->in_phase);
    }
    return status;
}

mb_status mb_coherent_create(const mb_coherent_settings *settings, mb_coherent **out)
{
    *out = NULL;
    if (check_settings(settings) != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_coherent *coherent = mb_allocate(1, sizeof *coherent);
    if (coherent == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the detector");
    }
    coherent->sideband = settings->sideband;
    mb_coherent_settings fitted = *settings;
    fitted.transition_hz = fmin(fitted.transition_hz, fitted.low_hz); /* there is no more room above 0 Hz */
    mb_status status = make_filters(coherent, &fitted);
    if (status != MB_OK) {
        mb_coherent_destroy(coherent);
        return status;
    }
    *out = coherent;
    return MB_OK;
}

void mb_coherent_destroy(mb_coherent *coherent)
{
    if (coherent != NULL) {
        mb_fir_destroy(coherent->in_phase);
        mb_fir_destroy(coherent->quadrature);
        mb_release(coherent->taps);
        mb_release(coherent->turned_taps);
        mb_release(coherent);
    }
}

void mb_coherent_reset(mb_coherent *coherent)
{
    mb_fir_reset(coherent->in_phase);
    if (coherent->quadrature != NULL) {
        mb_fir_reset(coherent->quadrature);
    }
}

size_t mb_coherent_delay_samples(const mb_coherent *coherent)
{
    return coherent->delay;
}

static void take_chunk(mb_coherent *c, const mb_cf32 *in, size_t n, float *out)
{
    for (size_t i = 0; i < n; i++) {
        bool finite = isfinite(in[i].re) && isfinite(in[i].im);
        c->arm_i[i] = finite ? in[i].re : 0.0f;
        c->arm_q[i] = finite ? in[i].im : 0.0f;
    }
    mb_fir_process_f32(c->in_phase, c->arm_i, n, out);
    if (c->sideband == MB_SIDEBAND_BOTH) {
        return;
    }
    float sign = c->sideband == MB_SIDEBAND_UPPER ? -1.0f : 1.0f;
    mb_fir_process_f32(c->quadrature, c->arm_q, n, c->arm_q);
    for (size_t i = 0; i < n; i++) {
        out[i] += sign * c->arm_q[i];
    }
}

void mb_coherent_process(mb_coherent *coherent, const mb_cf32 *in, size_t n, float *out)
{
    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        take_chunk(coherent, in + done, run, out + done);
        done += run;
    }
}
