#include "resampler_table.h"

#include <math.h>

#include "design.h"
#include "kernels/kernels.h"

enum { EXACT_FLOATS = 1 << 17, MOST_FLOATS = 1 << 24, MOST_HALF = 1 << 19 };

/* What the response is made of: a windowed ideal filter. */
typedef struct prototype {
    double rate_in_hz, cutoff_hz, curvature_s2, beta;
    double half_span; /* input samples */
} prototype;

/* Impulse response at time t of the ideal filter with gain 1 + curvature f^2 up to the cut-off: the integral
 * of that gain times cos(2 pi f t). */
static double ideal(const prototype *p, double t)
{
    double w = 2.0 * MB_PI * t, c = p->cutoff_hz, x = w * c;

    if (fabs(x) < 1e-2) { /* the first terms of the series; those left out are below 1e-9 */
        return 2.0 * c * (1.0 - x * x / 6.0) + 2.0 * p->curvature_s2 * c * c * c * (1.0 / 3.0 - x * x / 10.0);
    }
    double flat = 2.0 * sin(x) / w;
    double bent = 2.0 * (c * c * sin(x) / w + 2.0 * c * cos(x) / (w * w) - 2.0 * sin(x) / (w * w * w));
    return flat + p->curvature_s2 * bent;
}

/* Response u input samples from its middle, but for a factor. */
static double response(const prototype *p, double u)
{
    double x = u / p->half_span;

    if (fabs(x) >= 1.0) {
        return 0.0;
    }
    return mb_bessel_i0(p->beta * sqrt(1.0 - x * x)) * ideal(p, u / p->rate_in_hz);
}

/* Rows between which the response may be interpolated linearly: the error is (w / rows)^2 / 8 of full scale
 * for the highest frequency w in radians per input sample. */
static size_t rows_for_blending(const mb_resampler_plan *plan, double cutoff_hz)
{
    double w = 2.0 * MB_PI * cutoff_hz / plan->rate_in_hz;

    return (size_t)fmax(16.0, ceil(1.5 * w * pow(10.0, plan->attenuation_db / 40.0) / sqrt(8.0)));
}

static void fill_rows(const prototype *p, mb_phase_table *table, size_t rows)
{
    double sum = 0.0;

    for (size_t pass = 0; pass < 2; pass++) { /* first the gain at 0 Hz, then the taps */
        double scale = pass == 0 ? 0.0 : (double)table->phases / sum;
        for (size_t row = 0; row < rows; row++) {
            float *taps = table->taps + row * table->padded;
            for (size_t k = 0; k < table->span; k++) {
                double u = (double)k + (double)row / (double)table->phases - p->half_span;
                double value = response(p, u);
                sum += pass == 0 && row < table->phases ? value : 0.0;
                taps[table->padded - 1 - k] = (float)(scale * value);
            }
        }
    }
}

mb_status mb_phase_table_make(const mb_resampler_plan *plan, mb_phase_table *table)
{
    double lower_hz = fmin(plan->rate_in_hz, plan->rate_out_hz), attenuation_db = plan->attenuation_db + 3.0;
    double transition = (lower_hz - 2.0 * plan->passband_hz) / plan->rate_in_hz;
    double half = ceil(0.5 * (attenuation_db - 7.95) / (2.285 * 2.0 * MB_PI * transition));
    prototype p = {plan->rate_in_hz, 0.5 * lower_hz, plan->curvature_s2, mb_kaiser_beta(attenuation_db),
                   half};

    *table = (mb_phase_table){.taps = NULL};
    if (!(half >= 1.0 && half <= MOST_HALF)) {
        return mb_fail(
            MB_ERROR_ARGUMENT, "passband_hz",
            "passband_hz %g is too near half the lower rate, or the rates %g and %g Hz are too far apart",
            plan->passband_hz, plan->rate_in_hz, plan->rate_out_hz);
    }
    table->span = 2 * (size_t)half;
    table->padded = (table->span + MB_LANES - 1) / MB_LANES * MB_LANES;
    table->blended = plan->out > EXACT_FLOATS / table->padded;
    table->phases = table->blended ? rows_for_blending(plan, p.cutoff_hz) : (size_t)plan->out;
    size_t rows = table->phases + (table->blended ? 1 : 0);
    if (rows > MOST_FLOATS / table->padded) {
        return mb_fail(MB_ERROR_ARGUMENT, "attenuation_db", "a resampler this sharp takes %zu x %zu taps",
                       rows, table->padded);
    }
    table->taps = mb_allocate(rows * table->padded, sizeof *table->taps);
    if (table->taps == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu x %zu taps", rows, table->padded);
    }
    fill_rows(&p, table, rows);
    return MB_OK;
}
