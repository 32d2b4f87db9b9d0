#include "first_stage.h"

#include <math.h>
#include <string.h>

#include "kernels/kernels.h"

enum { BOXES = 3, CHUNK = 4096, GRAIN = MB_SHORT_LANES };

struct mb_first_stage {
    const mb_kernels *kernels;
    size_t factor;
    size_t span;   /* taps that count: 3 factor - 2 */
    size_t padded; /* with zeros before the oldest sample, a multiple of GRAIN */
    size_t wait;   /* inputs before the one that makes the next output */
    double curvature_s2;
    float *taps_re, *taps_im;               /* each part twice, oldest sample first */
    mb_ci16 *short_taps_re, *short_taps_im; /* as mb_kernels.dot_ci16 wants them */
    float short_scale;
    mb_oscillator oscillator; /* the mixing that is left, at the low rate */
    uint64_t non_finite;
    mb_cf32 *past; /* the last padded - 1 samples and a chunk behind them, of either kind */
};

/* Near k r, r being the rate behind it, a box of D samples has the slope (pi / D) / sin(pi k / D) / r, the
 * steepest at k = 1; three spread as Chebyshev's nodes leak at most a quarter of (slope B)^3 within B of it.
 * The rate is kept above 14 B too, where 1 + curvature f^2 levels the passband to 0.01 dB. */
static bool holds(const mb_decimator_settings *settings, double factor)
{
    double leak = pow(10.0, -(settings->attenuation_db + 6.0) / 20.0);
    double steepness = (MB_PI / factor) / sin(MB_PI / factor);
    double least_hz = settings->passband_hz * fmax(14.0, steepness / cbrt(4.0 * leak));

    return settings->rate_in_hz / factor >= fmax(least_hz, settings->rate_out_hz);
}

size_t mb_first_stage_factor(const mb_decimator_settings *settings)
{
    double factor = floor(settings->rate_in_hz / settings->rate_out_hz);

    while (factor >= 2.0 && !holds(settings, factor)) {
        factor -= 1.0;
    }
    return (size_t)fmax(1.0, factor);
}

double mb_first_stage_delay(const mb_first_stage *stage)
{
    return 0.5 * (double)(stage->span - 1);
}

double mb_first_stage_curvature(const mb_first_stage *stage)
{
    return stage->curvature_s2;
}

uint64_t mb_first_stage_non_finite(const mb_first_stage *stage)
{
    return stage->non_finite;
}

void mb_first_stage_reset(mb_first_stage *stage)
{
    memset(stage->past, 0, (stage->padded + CHUNK) * sizeof *stage->past);
    stage->wait = 0;
    stage->oscillator.phase = 0;
}

void mb_first_stage_destroy(mb_first_stage *stage)
{
    if (stage != NULL) {
        mb_release(stage->taps_re);
        mb_release(stage->taps_im);
        mb_release(stage->short_taps_re);
        mb_release(stage->short_taps_im);
        mb_release(stage->past);
        mb_release(stage);
    }
}

/* Two boxes whose zeros are moved by +angle and -angle in a row: at n they overlap in c samples, and the sum
 * of exp(j angle (2 i - n)) over these is sin(c angle) / sin(angle). */
static double box_pair(size_t n, size_t factor, double angle)
{
    if (n > 2 * factor - 2) {
        return 0.0;
    }
    size_t overlap = n < factor ? n + 1 : 2 * factor - 1 - n;
    return sin((double)overlap * angle) / sin(angle);
}

/* The third box runs over the pair as a sum. Gain 1 at 0 Hz. */
static void fill_prototype(size_t factor, double angle, double *taps, size_t span)
{
    double run = 0.0, sum = 0.0;

    for (size_t n = 0; n < span; n++) {
        run += box_pair(n, factor, angle) - (n < factor ? 0.0 : box_pair(n - factor, factor, angle));
        taps[n] = run;
        sum += run;
    }
    for (size_t n = 0; n < span; n++) {
        taps[n] /= sum;
    }
}

/* Gain of symmetric taps at a frequency in radians per sample. */
static double gain(const double *taps, size_t span, double angle)
{
    double sum = 0.0, middle = 0.5 * (double)(span - 1);

    for (size_t n = 0; n < span; n++) {
        sum += taps[n] * cos(angle * ((double)n - middle));
    }
    return sum;
}

/* Largest modulus of a 16-bit tap. A lane sums `terms` products of full-scale samples in 32 bits, each at
 * most 2^15 sqrt(2) times the modulus: short filters may have larger taps than MB_SHORT_TAP, which means less
 * rounding. */
static double largest_short_tap(size_t padded)
{
    size_t terms = (padded < MB_SHORT_SEGMENT ? padded : MB_SHORT_SEGMENT) / MB_SHORT_LANES;

    return fmin(32766.0, 46339.0 / (double)terms - 1.0);
}

/* Rotates the prototype to the frequency of `step`; the newest sample is the last of the taps. */
static void fill_taps(mb_first_stage *stage, const double *prototype, uint64_t step)
{
    double most = 0.0;

    for (size_t n = 0; n < stage->span; n++) {
        most = fmax(most, fabs(prototype[n]));
    }
    double short_gain = largest_short_tap(stage->padded) / most;
    stage->short_scale = (float)(1.0 / (32768.0 * short_gain));
    for (size_t n = 0; n < stage->span; n++) {
        double angle = 2.0 * MB_PI * 0x1.0p-64 * (double)(int64_t)(step * n);
        double re = prototype[n] * cos(angle), im = prototype[n] * sin(angle);
        int16_t short_re = (int16_t)lrint(re * short_gain), short_im = (int16_t)lrint(im * short_gain);
        size_t at = stage->padded - 1 - n;
        stage->taps_re[2 * at] = stage->taps_re[2 * at + 1] = (float)re;
        stage->taps_im[2 * at] = stage->taps_im[2 * at + 1] = (float)im;
        stage->short_taps_re[at] = (mb_ci16){short_re, (int16_t)-short_im};
        stage->short_taps_im[at] = (mb_ci16){short_im, short_re};
    }
}

/* Designs the filter and the curvature that the next one has to make up for. */
static mb_status design(mb_first_stage *stage, const mb_decimator_settings *settings)
{
    double *prototype = mb_allocate(stage->span, sizeof *prototype);
    double edge = 2.0 * MB_PI * settings->passband_hz / settings->rate_in_hz;
    mb_oscillator full = {0, 0};

    if (prototype == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu taps", stage->span);
    }
    mb_oscillator_set(&full, settings->offset_hz, settings->rate_in_hz);
    fill_prototype(stage->factor, edge * sqrt(0.75), prototype, stage->span);
    fill_taps(stage, prototype, full.step);
    stage->oscillator.step = (uint64_t)0 - full.step * stage->factor;
    double at_edge = gain(prototype, stage->span, edge);
    stage->curvature_s2 = (1.0 / at_edge - 1.0) / (settings->passband_hz * settings->passband_hz);
    mb_release(prototype);
    return MB_OK;
}

static bool allocate(mb_first_stage *stage)
{
    stage->taps_re = mb_allocate(2 * stage->padded, sizeof *stage->taps_re);
    stage->taps_im = mb_allocate(2 * stage->padded, sizeof *stage->taps_im);
    stage->short_taps_re = mb_allocate(stage->padded, sizeof *stage->short_taps_re);
    stage->short_taps_im = mb_allocate(stage->padded, sizeof *stage->short_taps_im);
    stage->past = mb_allocate(stage->padded + CHUNK, sizeof *stage->past);
    return stage->taps_re != NULL && stage->taps_im != NULL && stage->short_taps_re != NULL &&
           stage->short_taps_im != NULL && stage->past != NULL;
}

mb_status mb_first_stage_create(const mb_decimator_settings *settings, size_t factor, mb_first_stage **out)
{
    mb_first_stage *stage = mb_allocate(1, sizeof *stage);

    *out = NULL;
    if (stage == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a decimator");
    }
    stage->kernels = mb_kernels_best();
    stage->factor = factor;
    stage->span = BOXES * (factor - 1) + 1;
    stage->padded = (stage->span + GRAIN - 1) / GRAIN * GRAIN;
    mb_status status = allocate(stage) ? design(stage, settings)
                                       : mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu taps", stage->span);
    if (status != MB_OK) {
        mb_first_stage_destroy(stage);
        return status;
    }
    *out = stage;
    return MB_OK;
}

/* Outputs of the samples up to `run` behind the past, for each kind. */
static size_t outputs_cf32(mb_first_stage *stage, size_t run, mb_cf32 *out)
{
    size_t made = 0;

    for (; stage->wait < run; stage->wait += stage->factor) {
        out[made++] = stage->kernels->dot_cf32(stage->taps_re, stage->taps_im, stage->past + stage->wait,
                                               stage->padded);
    }
    return made;
}

static size_t outputs_ci16(mb_first_stage *stage, const mb_ci16 *past, size_t run, mb_cf32 *out)
{
    size_t made = 0;

    for (; stage->wait < run; stage->wait += stage->factor) {
        mb_cf32 sum = stage->kernels->dot_ci16(stage->short_taps_re, stage->short_taps_im, past + stage->wait,
                                               stage->padded);
        out[made++] = (mb_cf32){sum.re * stage->short_scale, sum.im * stage->short_scale};
    }
    return made;
}

size_t mb_first_stage_cf32(mb_first_stage *stage, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    size_t made = 0, kept = stage->padded - 1;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        mb_cf32 *taken = stage->past + kept;
        memcpy(taken, in + done, run * sizeof *taken);
        if (!stage->kernels->all_finite(&taken->re, 2 * run)) {
            stage->non_finite += mb_scrub_cf32(taken, run);
        }
        made += outputs_cf32(stage, run, out + made);
        stage->wait -= run;
        memmove(stage->past, stage->past + run, kept * sizeof *stage->past);
        done += run;
    }
    mb_oscillator_rotate(&stage->oscillator, out, made, out);
    return made;
}

size_t mb_first_stage_ci16(mb_first_stage *stage, const mb_ci16 *in, size_t n, mb_cf32 *out)
{
    mb_ci16 *past = (mb_ci16 *)(void *)stage->past;
    size_t made = 0, kept = stage->padded - 1;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        memcpy(past + kept, in + done, run * sizeof *past);
        made += outputs_ci16(stage, past, run, out + made);
        stage->wait -= run;
        memmove(past, past + run, kept * sizeof *past);
        done += run;
    }
    mb_oscillator_rotate(&stage->oscillator, out, made, out);
    return made;
}
