#include "mirrorband/filter.h"

#include <math.h>
#include <string.h>

#include "doubler.h"
#include "resampler.h"

/* CHUNK inputs go to the base rate at once, BATCH of these through all doublers, which keeps them in the
 * cache. */
enum { CHUNK = 256, BATCH = 16, MOST_DOUBLERS = 16 };

struct mb_interpolator {
    mb_resampler *resampler; /* NULL when the base rate is the rate of the input */
    mb_doubler doubler[MOST_DOUBLERS];
    size_t doublers;
    mb_oscillator oscillator;
    uint64_t non_finite;
    double delay_s;
    mb_cf32 *base;    /* samples at the base rate */
    mb_cf32 *work[2]; /* between doublers */
};

mb_interpolator_settings mb_interpolator_settings_default(void)
{
    return (mb_interpolator_settings){.rate_in_hz = 48000.0,
                                      .rate_out_hz = 240000.0,
                                      .offset_hz = 0.0,
                                      .passband_hz = 3000.0,
                                      .attenuation_db = 90.0};
}

static mb_status check(const mb_interpolator_settings *s)
{
    double half_hz = 0.5 * s->rate_out_hz;

    if (mb_check_range("rate_in_hz", s->rate_in_hz, 100.0, 2e8, "Hz") != MB_OK ||
        mb_check_range("rate_out_hz", s->rate_out_hz, s->rate_in_hz, 2e8, "Hz") != MB_OK ||
        mb_check_range("offset_hz", s->offset_hz, -half_hz, half_hz, "Hz") != MB_OK ||
        mb_check_range("passband_hz", s->passband_hz, 0.001 * s->rate_in_hz, 0.49 * s->rate_in_hz, "Hz") !=
            MB_OK ||
        mb_check_range("attenuation_db", s->attenuation_db, 40.0, 100.0, "dB") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    return MB_OK;
}

/* The most doublings that leave a base rate of 48 kHz, not below that of the input, and images the first
 * doubler can hold off. */
static size_t count_doublers(const mb_interpolator_settings *s)
{
    double base_hz = s->rate_out_hz;
    size_t count = 0;

    while (count < MOST_DOUBLERS && 0.5 * base_hz >= fmax(48000.0, s->rate_in_hz) &&
           mb_doubler_pairs(s->passband_hz, 0.5 * base_hz, s->attenuation_db + 3.0) > 0) {
        base_hz *= 0.5;
        count++;
    }
    return count;
}

static mb_status add_resampler(mb_interpolator *made, const mb_interpolator_settings *s)
{
    uint64_t in = (uint64_t)llrint(1000.0 * s->rate_in_hz) << made->doublers;
    uint64_t out = (uint64_t)llrint(1000.0 * s->rate_out_hz);
    mb_resampler_plan plan = {.in = in,
                              .out = out,
                              .rate_in_hz = s->rate_in_hz,
                              .rate_out_hz = ldexp(s->rate_out_hz, -(int)made->doublers),
                              .passband_hz = s->passband_hz,
                              .attenuation_db = s->attenuation_db + 3.0};

    if (in == out) {
        return MB_OK;
    }
    mb_status status = mb_resampler_make(&plan, &made->resampler);
    if (status == MB_OK) {
        made->delay_s += mb_resampler_delay_s(made->resampler);
    }
    return status;
}

static mb_status add_doublers(mb_interpolator *made, const mb_interpolator_settings *s)
{
    mb_status status = MB_OK;

    for (size_t i = 0; i < made->doublers && status == MB_OK; i++) {
        double rate_hz = ldexp(s->rate_out_hz, (int)i - (int)made->doublers);
        size_t pairs = mb_doubler_pairs(s->passband_hz, rate_hz, s->attenuation_db + 3.0);
        status = mb_doubler_make(pairs, (size_t)BATCH << i, &made->doubler[i]);
        made->delay_s += (double)pairs / rate_hz;
    }
    return status;
}

static mb_status add_buffers(mb_interpolator *made)
{
    size_t count = made->resampler != NULL ? mb_resampler_output_bound(made->resampler, CHUNK) : CHUNK;

    made->base = mb_allocate(count, sizeof *made->base);
    made->work[0] = mb_allocate((size_t)BATCH << made->doublers, sizeof *made->work[0]);
    made->work[1] = mb_allocate((size_t)BATCH << made->doublers, sizeof *made->work[1]);
    if (made->base == NULL || made->work[0] == NULL || made->work[1] == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for an interpolator");
    }
    return MB_OK;
}

mb_status mb_interpolator_create(const mb_interpolator_settings *settings, mb_interpolator **out)
{
    *out = NULL;
    if (check(settings) != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_interpolator *made = mb_allocate(1, sizeof *made);
    if (made == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for an interpolator");
    }
    made->doublers = count_doublers(settings);
    mb_oscillator_set(&made->oscillator, settings->offset_hz, settings->rate_out_hz);
    mb_status status = add_resampler(made, settings);
    status = status == MB_OK ? add_doublers(made, settings) : status;
    status = status == MB_OK ? add_buffers(made) : status;
    if (status != MB_OK) {
        mb_interpolator_destroy(made);
        return status;
    }
    *out = made;
    return MB_OK;
}

void mb_interpolator_destroy(mb_interpolator *interpolator)
{
    if (interpolator == NULL) {
        return;
    }
    for (size_t i = 0; i < interpolator->doublers; i++) {
        mb_doubler_clear(&interpolator->doubler[i]);
    }
    mb_resampler_destroy(interpolator->resampler);
    mb_release(interpolator->base);
    mb_release(interpolator->work[0]);
    mb_release(interpolator->work[1]);
    mb_release(interpolator);
}

void mb_interpolator_reset(mb_interpolator *interpolator)
{
    for (size_t i = 0; i < interpolator->doublers; i++) {
        mb_doubler_reset(&interpolator->doubler[i]);
    }
    if (interpolator->resampler != NULL) {
        mb_resampler_reset(interpolator->resampler);
    }
    interpolator->oscillator.phase = 0;
}

size_t mb_interpolator_output_bound(const mb_interpolator *interpolator, size_t n)
{
    size_t base = interpolator->resampler != NULL ? mb_resampler_output_bound(interpolator->resampler, n) : n;

    return base << interpolator->doublers;
}

double mb_interpolator_delay_s(const mb_interpolator *interpolator)
{
    return interpolator->delay_s;
}

mb_filter_counts mb_interpolator_state(const mb_interpolator *interpolator)
{
    uint64_t inside =
        interpolator->resampler != NULL ? mb_resampler_state(interpolator->resampler).non_finite : 0;

    return (mb_filter_counts){interpolator->non_finite + inside};
}

/* A batch at the base rate through all doublers and to its frequency. */
static size_t raise_batch(mb_interpolator *interpolator, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    for (size_t i = 0; i < interpolator->doublers; i++) {
        mb_cf32 *to = i + 1 == interpolator->doublers ? out : interpolator->work[i % 2];
        mb_doubler_process(&interpolator->doubler[i], in, n, to);
        in = to;
        n *= 2;
    }
    mb_oscillator_rotate(&interpolator->oscillator, in, n, out);
    return n;
}

/* Inputs to the base rate. */
static size_t to_base(mb_interpolator *interpolator, const mb_cf32 *in, size_t n)
{
    if (interpolator->resampler != NULL) {
        return mb_resampler_process_cf32(interpolator->resampler, in, n, interpolator->base);
    }
    memcpy(interpolator->base, in, n * sizeof *in);
    interpolator->non_finite += mb_scrub_cf32(interpolator->base, n);
    return n;
}

size_t mb_interpolator_process(mb_interpolator *interpolator, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        size_t count = to_base(interpolator, in + done, run);
        for (size_t at = 0; at < count; at += BATCH) {
            size_t batch = count - at < BATCH ? count - at : BATCH;
            made += raise_batch(interpolator, interpolator->base + at, batch, out + made);
        }
        done += run;
    }
    return made;
}
