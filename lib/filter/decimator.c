#include "mirrorband/filter.h"

#include <math.h>

#include "first_stage.h"
#include "resampler.h"

enum { CHUNK = 4096 };

struct mb_decimator {
    size_t factor;
    mb_first_stage *stage;    /* NULL when the factor is 1 */
    mb_oscillator oscillator; /* mixes when there is no stage that does */
    mb_resampler *resampler;  /* NULL when the rates are equal */
    uint64_t non_finite;
    double delay_s;
    mb_cf32 *middle; /* between the two; CHUNK + 1 samples */
};

mb_decimator_settings mb_decimator_settings_default(void)
{
    return (mb_decimator_settings){.rate_in_hz = 240000.0,
                                   .rate_out_hz = 16000.0,
                                   .offset_hz = 0.0,
                                   .passband_hz = 3700.0,
                                   .attenuation_db = 80.0};
}

static mb_status check(const mb_decimator_settings *s)
{
    if (mb_check_range("rate_in_hz", s->rate_in_hz, 100.0, 2e8, "Hz") != MB_OK ||
        mb_check_range("rate_out_hz", s->rate_out_hz, 100.0, s->rate_in_hz, "Hz") != MB_OK ||
        mb_check_range("offset_hz", s->offset_hz, -0.5 * s->rate_in_hz, 0.5 * s->rate_in_hz, "Hz") != MB_OK ||
        mb_check_range("passband_hz", s->passband_hz, 0.01 * s->rate_out_hz, 0.49 * s->rate_out_hz, "Hz") !=
            MB_OK ||
        mb_check_range("attenuation_db", s->attenuation_db, 40.0, 100.0, "dB") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    return MB_OK;
}

static mb_status add_stage(mb_decimator *made, const mb_decimator_settings *settings)
{
    made->factor = mb_first_stage_factor(settings);
    if (made->factor < 2) {
        made->factor = 1;
        mb_oscillator_set(&made->oscillator, -settings->offset_hz, settings->rate_in_hz);
        return MB_OK;
    }
    mb_status status = mb_first_stage_create(settings, made->factor, &made->stage);
    if (status == MB_OK) {
        made->delay_s = mb_first_stage_delay(made->stage) / settings->rate_in_hz;
    }
    return status;
}

static mb_status add_resampler(mb_decimator *made, const mb_decimator_settings *settings)
{
    uint64_t in = (uint64_t)llrint(1000.0 * settings->rate_in_hz);
    uint64_t out = (uint64_t)llrint(1000.0 * settings->rate_out_hz) * made->factor;

    if (in == out && made->stage == NULL) {
        return MB_OK;
    }
    mb_resampler_plan plan = {.in = in,
                              .out = out,
                              .rate_in_hz = settings->rate_in_hz / (double)made->factor,
                              .rate_out_hz = settings->rate_out_hz,
                              .passband_hz = settings->passband_hz,
                              .attenuation_db = settings->attenuation_db,
                              .curvature_s2 =
                                  made->stage != NULL ? mb_first_stage_curvature(made->stage) : 0.0};
    mb_status status = mb_resampler_make(&plan, &made->resampler);
    if (status == MB_OK) {
        made->delay_s += mb_resampler_delay_s(made->resampler);
    }
    return status;
}

mb_status mb_decimator_create(const mb_decimator_settings *settings, mb_decimator **out)
{
    *out = NULL;
    if (check(settings) != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_decimator *made = mb_allocate(1, sizeof *made);
    mb_cf32 *middle = mb_allocate(CHUNK + 1, sizeof *middle);
    if (made == NULL || middle == NULL) {
        mb_release(made);
        mb_release(middle);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a decimator");
    }
    made->middle = middle;
    mb_status status = add_stage(made, settings);
    status = status == MB_OK ? add_resampler(made, settings) : status;
    if (status != MB_OK) {
        mb_decimator_destroy(made);
        return status;
    }
    *out = made;
    return MB_OK;
}

void mb_decimator_destroy(mb_decimator *decimator)
{
    if (decimator != NULL) {
        mb_first_stage_destroy(decimator->stage);
        mb_resampler_destroy(decimator->resampler);
        mb_release(decimator->middle);
        mb_release(decimator);
    }
}

void mb_decimator_reset(mb_decimator *decimator)
{
    if (decimator->stage != NULL) {
        mb_first_stage_reset(decimator->stage);
    }
    if (decimator->resampler != NULL) {
        mb_resampler_reset(decimator->resampler);
    }
    decimator->oscillator.phase = 0;
}

size_t mb_decimator_output_bound(const mb_decimator *decimator, size_t n)
{
    size_t middle = decimator->stage != NULL ? n / decimator->factor + 1 : n;

    return decimator->resampler != NULL ? mb_resampler_output_bound(decimator->resampler, middle) : middle;
}

double mb_decimator_delay_s(const mb_decimator *decimator)
{
    return decimator->delay_s;
}

mb_filter_counts mb_decimator_state(const mb_decimator *decimator)
{
    uint64_t in_stage = decimator->stage != NULL ? mb_first_stage_non_finite(decimator->stage) : 0;

    return (mb_filter_counts){decimator->non_finite + in_stage};
}

/* The samples in `middle` to the rate of the output. */
static size_t finish(mb_decimator *decimator, size_t count, mb_cf32 *out)
{
    if (decimator->resampler != NULL) {
        return mb_resampler_process_cf32(decimator->resampler, decimator->middle, count, out);
    }
    for (size_t i = 0; i < count; i++) {
        out[i] = decimator->middle[i];
    }
    return count;
}

/* Without a first stage: the samples in `middle` are mixed where they are. */
static void mix(mb_decimator *decimator, size_t count)
{
    decimator->non_finite += mb_scrub_cf32(decimator->middle, count);
    mb_oscillator_rotate(&decimator->oscillator, decimator->middle, count, decimator->middle);
}

size_t mb_decimator_process_cf32(mb_decimator *decimator, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK, count = run;
        if (decimator->stage != NULL) {
            count = mb_first_stage_cf32(decimator->stage, in + done, run, decimator->middle);
        } else {
            for (size_t i = 0; i < run; i++) {
                decimator->middle[i] = in[done + i];
            }
            mix(decimator, run);
        }
        made += finish(decimator, count, out + made);
        done += run;
    }
    return made;
}

size_t mb_decimator_process_ci16(mb_decimator *decimator, const mb_ci16 *in, size_t n, mb_cf32 *out)
{
    const float scale = 1.0f / 32768.0f;
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK, count = run;
        if (decimator->stage != NULL) {
            count = mb_first_stage_ci16(decimator->stage, in + done, run, decimator->middle);
        } else {
            for (size_t i = 0; i < run; i++) {
                decimator->middle[i] =
                    (mb_cf32){(float)in[done + i].re * scale, (float)in[done + i].im * scale};
            }
            mix(decimator, run);
        }
        made += finish(decimator, count, out + made);
        done += run;
    }
    return made;
}
