#include "fading.h"

#include <math.h>

static bool allocate_taps(channel_fading *fading, const fading_plan *plan, const channel_gauss *gauss)
{
    size_t length = fading_fir_length(plan->rate_hz, plan->spread_hz);

    fading->interval = fading_node_interval(plan->rate_hz, plan->spread_hz);
    fading->fir = mb_allocate(length, sizeof *fading->fir);
    if (fading->fir == NULL) {
        return false;
    }
    fading_fir_design(plan->rate_hz, plan->spread_hz, fading->fir, length);
    for (unsigned k = 0; k < plan->paths; k++) {
        fading_tap *tap = &fading->tap[k];
        fading->moves[k] = k > 0 || !plan->first_steady;
        tap->gauss = gauss;
        tap->fir = fading->fir;
        tap->fir_length = length;
        tap->noise = mb_allocate(length, sizeof *tap->noise);
        if (tap->noise == NULL) {
            return false;
        }
    }
    return true;
}

bool channel_fading_allocate(channel_fading *fading, const fading_plan *plan, const channel_gauss *gauss)
{
    double second = plan->paths > 1 ? mb_db_power(plan->second_db) : 0.0;

    *fading = (channel_fading){.paths = plan->paths};
    fading->amplitude[0] = sqrt(1.0 / (1.0 + second));
    fading->amplitude[1] = sqrt(second / (1.0 + second));
    if (plan->paths > 1) {
        fading->delay_samples = (size_t)llround(plan->delay_s * plan->rate_hz);
        fading->line = mb_allocate(fading->delay_samples, sizeof *fading->line);
        if (fading->line == NULL) {
            return false;
        }
    }
    return plan->paths == 0 || plan->spread_hz == 0.0 || allocate_taps(fading, plan, gauss);
}

void channel_fading_start(channel_fading *fading, const mb_random random[2])
{
    fading->position = 0;
    fading->line_at = 0;
    for (size_t i = 0; i < fading->delay_samples; i++) {
        fading->line[i] = (mb_cf32){0.0f, 0.0f};
    }
    for (unsigned k = 0; k < fading->paths; k++) {
        if (fading->moves[k]) {
            fading_tap_start(&fading->tap[k], &random[k]);
        }
    }
}

static double complex path_gain(const channel_fading *fading, unsigned path, double at)
{
    if (path >= fading->paths) {
        return path == 0 ? 1.0 : 0.0;
    }
    double complex value = fading->moves[path] ? fading_tap_value(&fading->tap[path], at) : 1.0;
    return complex_of(fading->amplitude[path] * creal(value), fading->amplitude[path] * cimag(value));
}

/* The input delay_samples ago. */
static mb_cf32 delayed(channel_fading *fading, mb_cf32 in)
{
    if (fading->delay_samples == 0) {
        return in;
    }
    mb_cf32 out = fading->line[fading->line_at];
    fading->line[fading->line_at] = in;
    fading->line_at = fading->line_at + 1 == fading->delay_samples ? 0 : fading->line_at + 1;
    return out;
}

static void next_interval(channel_fading *fading)
{
    fading->position = 0;
    for (unsigned k = 0; k < fading->paths; k++) {
        if (fading->moves[k]) {
            fading_tap_advance(&fading->tap[k]);
        }
    }
}

/* Within one interval; the position is counted, so that it does not depend on where blocks begin. */
static void apply_part(channel_fading *fading, mb_cf32 *samples, size_t count)
{
    double scale = fading->interval > 0 ? 1.0 / (double)fading->interval : 0.0;

    for (size_t i = 0; i < count; i++) {
        double at = (double)(fading->position + i) * scale;
        double re = samples[i].re, im = samples[i].im;
        double complex gain = path_gain(fading, 0, at);
        double out_re = creal(gain) * re - cimag(gain) * im;
        double out_im = creal(gain) * im + cimag(gain) * re;
        if (fading->paths > 1) {
            mb_cf32 late = delayed(fading, samples[i]);
            gain = path_gain(fading, 1, at);
            out_re += creal(gain) * late.re - cimag(gain) * late.im;
            out_im += creal(gain) * late.im + cimag(gain) * late.re;
        }
        samples[i] = (mb_cf32){(float)out_re, (float)out_im};
    }
    fading->position += count;
}

void channel_fading_apply(channel_fading *fading, mb_cf32 *samples, size_t count)
{
    if (fading->paths == 0) {
        return;
    }
    while (count > 0) {
        if (fading->interval > 0 && fading->position == fading->interval) {
            next_interval(fading);
        }
        uint64_t left = fading->interval > 0 ? fading->interval - fading->position : count;
        size_t part = left < count ? (size_t)left : count;
        apply_part(fading, samples, part);
        samples += part;
        count -= part;
    }
}

void channel_fading_gains(const channel_fading *fading, double complex gain[2])
{
    double at = 0.0;

    if (fading->interval > 0 && fading->position > 0) {
        at = (double)(fading->position - 1) * (1.0 / (double)fading->interval);
    }
    for (unsigned k = 0; k < 2; k++) {
        gain[k] = path_gain(fading, k, at);
    }
}

void channel_fading_free(channel_fading *fading)
{
    mb_release(fading->fir);
    mb_release(fading->line);
    mb_release(fading->tap[0].noise);
    mb_release(fading->tap[1].noise);
}
