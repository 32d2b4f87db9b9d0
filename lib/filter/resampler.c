#include "resampler.h"

#include <math.h>
#include <string.h>

#include "kernels/kernels.h"
#include "resampler_table.h"

enum { CHUNK = 256 };

struct mb_resampler {
    const mb_kernels *kernels;
    mb_phase_table table;
    double delay_s;
    uint64_t in, out;     /* rates without a common divisor; an output lies in / out inputs after the last */
    uint64_t whole, part; /* in / out and the remainder */
    uint64_t wait;        /* inputs before the one that makes the next output */
    uint64_t fraction;    /* its place after that input, in units of 1 / out of an input */
    uint64_t non_finite;
    float *re, *im; /* the last padded - 1 samples and a chunk behind them */
};

static uint64_t common_divisor(uint64_t a, uint64_t b)
{
    while (b != 0) {
        uint64_t rest = a % b;
        a = b;
        b = rest;
    }
    return a;
}

uint64_t mb_most_outputs(uint64_t inputs, uint64_t in, uint64_t out)
{
    uint64_t whole = inputs / in, rest = inputs % in;

    return whole * out + (uint64_t)ceil((double)rest * (double)out / (double)in) + 1;
}

mb_status mb_resampler_make(const mb_resampler_plan *plan, mb_resampler **out)
{
    mb_resampler_plan reduced = *plan;
    uint64_t divisor = common_divisor(plan->in, plan->out);

    *out = NULL;
    if (plan->in == 0 || plan->out == 0) {
        return mb_fail(MB_ERROR_ARGUMENT, "rate_out_hz", "a rate must be above 0 Hz");
    }
    reduced.in /= divisor;
    reduced.out /= divisor;
    mb_resampler *made = mb_allocate(1, sizeof *made);
    if (made == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a resampler");
    }
    mb_status status = mb_phase_table_make(&reduced, &made->table);
    if (status == MB_OK) {
        made->re = mb_allocate(made->table.padded + CHUNK, sizeof *made->re);
        made->im = mb_allocate(made->table.padded + CHUNK, sizeof *made->im);
        if (made->re == NULL || made->im == NULL) {
            status = mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu samples", made->table.padded + CHUNK);
        }
    }
    if (status != MB_OK) {
        mb_resampler_destroy(made);
        return status;
    }
    made->kernels = mb_kernels_best();
    made->in = reduced.in;
    made->out = reduced.out;
    made->whole = reduced.in / reduced.out;
    made->part = reduced.in % reduced.out;
    made->delay_s = 0.5 * (double)made->table.span / plan->rate_in_hz;
    *out = made;
    return MB_OK;
}

mb_resampler_settings mb_resampler_settings_default(void)
{
    return (mb_resampler_settings){
        .rate_in_hz = 48000.0, .rate_out_hz = 16000.0, .passband_hz = 0.0, .attenuation_db = 100.0};
}

mb_status mb_resampler_create(const mb_resampler_settings *settings, mb_resampler **out)
{
    double lower_hz = fmin(settings->rate_in_hz, settings->rate_out_hz);
    double passband_hz = settings->passband_hz == 0.0 ? 0.45 * lower_hz : settings->passband_hz;

    *out = NULL;
    if (mb_check_range("rate_in_hz", settings->rate_in_hz, 1.0, 1e9, "Hz") != MB_OK ||
        mb_check_range("rate_out_hz", settings->rate_out_hz, 1.0, 1e9, "Hz") != MB_OK ||
        mb_check_range("passband_hz", passband_hz, 1e-3 * lower_hz, 0.499 * lower_hz, "Hz") != MB_OK ||
        mb_check_range("attenuation_db", settings->attenuation_db, 40.0, 120.0, "dB") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_resampler_plan plan = {.in = (uint64_t)llrint(1000.0 * settings->rate_in_hz),
                              .out = (uint64_t)llrint(1000.0 * settings->rate_out_hz),
                              .rate_in_hz = settings->rate_in_hz,
                              .rate_out_hz = settings->rate_out_hz,
                              .passband_hz = passband_hz,
                              .attenuation_db = settings->attenuation_db};
    return mb_resampler_make(&plan, out);
}

void mb_resampler_destroy(mb_resampler *resampler)
{
    if (resampler != NULL) {
        mb_release(resampler->table.taps);
        mb_release(resampler->re);
        mb_release(resampler->im);
        mb_release(resampler);
    }
}

void mb_resampler_reset(mb_resampler *resampler)
{
    size_t length = resampler->table.padded + CHUNK;

    memset(resampler->re, 0, length * sizeof *resampler->re);
    memset(resampler->im, 0, length * sizeof *resampler->im);
    resampler->wait = 0;
    resampler->fraction = 0;
}

size_t mb_resampler_output_bound(const mb_resampler *resampler, size_t n)
{
    return (size_t)mb_most_outputs(n, resampler->in, resampler->out);
}

double mb_resampler_delay_s(const mb_resampler *resampler)
{
    return resampler->delay_s;
}

mb_filter_counts mb_resampler_state(const mb_resampler *resampler)
{
    return (mb_filter_counts){resampler->non_finite};
}

/* One output of one rail whose newest sample is at samples[padded - 1]. */
static float output(const mb_resampler *r, const float *samples)
{
    const mb_phase_table *table = &r->table;

    if (!table->blended) {
        return r->kernels->dot(table->taps + r->fraction * table->padded, samples, table->padded);
    }
    uint64_t place = r->fraction * table->phases;
    const float *taps = table->taps + place / r->out * table->padded;
    float share = (float)((double)(place % r->out) / (double)r->out);
    float before = r->kernels->dot(taps, samples, table->padded);
    float after = r->kernels->dot(taps + table->padded, samples, table->padded);
    return before + share * (after - before);
}

/* Moves on to the next output. */
static void advance(mb_resampler *r)
{
    r->wait += r->whole;
    r->fraction += r->part;
    if (r->fraction >= r->out) {
        r->fraction -= r->out;
        r->wait++;
    }
}

/* Drops the oldest `run` samples of a rail. */
static void shift(const mb_resampler *r, float *rail, size_t run)
{
    memmove(rail, rail + run, (r->table.padded - 1) * sizeof *rail);
}

size_t mb_resampler_process_f32(mb_resampler *resampler, const float *in, size_t n, float *out)
{
    size_t made = 0, past = resampler->table.padded - 1;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        memcpy(resampler->re + past, in + done, run * sizeof *in);
        resampler->non_finite += mb_scrub_f32(resampler->re + past, run);
        for (; resampler->wait < run; advance(resampler)) {
            out[made++] = output(resampler, resampler->re + resampler->wait);
        }
        resampler->wait -= run;
        shift(resampler, resampler->re, run);
        done += run;
    }
    return made;
}

/* Splits samples into the rails behind those of the past. */
static void take(mb_resampler *r, const mb_cf32 *in, size_t run)
{
    float *re = r->re + r->table.padded - 1, *im = r->im + r->table.padded - 1;

    for (size_t i = 0; i < run; i++) {
        bool finite = isfinite(in[i].re) && isfinite(in[i].im);
        re[i] = finite ? in[i].re : 0.0f;
        im[i] = finite ? in[i].im : 0.0f;
        r->non_finite += finite ? 0 : 1;
    }
}

size_t mb_resampler_process_cf32(mb_resampler *resampler, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        take(resampler, in + done, run);
        for (; resampler->wait < run; advance(resampler)) {
            float re = output(resampler, resampler->re + resampler->wait);
            float im = output(resampler, resampler->im + resampler->wait);
            out[made++] = (mb_cf32){re, im};
        }
        resampler->wait -= run;
        shift(resampler, resampler->re, run);
        shift(resampler, resampler->im, run);
        done += run;
    }
    return made;
}
