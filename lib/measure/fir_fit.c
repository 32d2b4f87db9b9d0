#include "fir_fit.h"

#include <math.h>
#include <string.h>

/* Least squares over all samples whose whole window lies in the stream. The normal matrix of windows of one
 * stream is its first row moved along the diagonals, but for what enters at one end and leaves at the other,
 * so only that row is summed while streaming. */

struct mb_fir_fit {
    size_t taps;
    double *message; /* twice the last `taps` samples, newest first from `at` */
    double *audio;
    double *head;  /* the first taps - 1 message samples */
    double *row;   /* sum of m[p] m[p - l] */
    double *cross; /* sum of a[p - half] m[p - k] */
    double *matrix;
    double *weights;
    double square; /* sum of a[p - half]^2 */
    size_t at;
    uint64_t count;
};

mb_status mb_fir_fit_create(size_t taps, mb_fir_fit **out)
{
    *out = NULL;
    mb_fir_fit *fit = mb_allocate(1, sizeof *fit);
    if (fit == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a fit");
    }
    fit->taps = taps;
    fit->message = mb_allocate(2 * taps, sizeof *fit->message);
    fit->audio = mb_allocate(2 * taps, sizeof *fit->audio);
    fit->head = mb_allocate(taps, sizeof *fit->head);
    fit->row = mb_allocate(taps, sizeof *fit->row);
    fit->cross = mb_allocate(taps, sizeof *fit->cross);
    fit->weights = mb_allocate(taps, sizeof *fit->weights);
    fit->matrix = mb_allocate(taps * taps, sizeof *fit->matrix);
    if (fit->message == NULL || fit->audio == NULL || fit->head == NULL || fit->row == NULL ||
        fit->cross == NULL || fit->weights == NULL || fit->matrix == NULL) {
        mb_fir_fit_destroy(fit);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a fit of %zu taps", taps);
    }
    *out = fit;
    return MB_OK;
}

void mb_fir_fit_reset(mb_fir_fit *fit)
{
    memset(fit->message, 0, 2 * fit->taps * sizeof *fit->message);
    memset(fit->audio, 0, 2 * fit->taps * sizeof *fit->audio);
    memset(fit->row, 0, fit->taps * sizeof *fit->row);
    memset(fit->cross, 0, fit->taps * sizeof *fit->cross);
    fit->square = 0.0;
    fit->at = 0;
    fit->count = 0;
}

void mb_fir_fit_destroy(mb_fir_fit *fit)
{
    if (fit == NULL) {
        return;
    }
    mb_release(fit->message);
    mb_release(fit->audio);
    mb_release(fit->head);
    mb_release(fit->row);
    mb_release(fit->cross);
    mb_release(fit->weights);
    mb_release(fit->matrix);
    mb_release(fit);
}

static void take(mb_fir_fit *fit, double message, double audio)
{
    size_t taps = fit->taps;

    fit->at = (fit->at == 0 ? taps : fit->at) - 1;
    fit->message[fit->at] = fit->message[fit->at + taps] = message;
    fit->audio[fit->at] = fit->audio[fit->at + taps] = audio;
    if (++fit->count < taps) {
        fit->head[fit->count - 1] = message;
        return;
    }
    const double *m = fit->message + fit->at;
    double target = fit->audio[fit->at + (taps - 1) / 2];
    for (size_t k = 0; k < taps; k++) {
        fit->row[k] += m[0] * m[k];
        fit->cross[k] += target * m[k];
    }
    fit->square += target * target;
}

void mb_fir_fit_add(mb_fir_fit *fit, const float *message, const float *audio, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        take(fit, message[i], audio[i]);
    }
}

/* Lower triangle of the normal matrix, from its first row. */
static void fill_matrix(mb_fir_fit *fit)
{
    size_t taps = fit->taps;
    const double *last = fit->message + fit->at, *first = fit->head + taps - 2;

    for (size_t l = 0; l < taps; l++) {
        fit->matrix[l * taps] = fit->row[l];
    }
    for (size_t l = 1; l < taps; l++) {
        for (size_t k = 1; k <= l; k++) {
            double enters = *(first - (k - 1)) * *(first - (l - 1)), leaves = last[k - 1] * last[l - 1];
            fit->matrix[l * taps + k] = fit->matrix[(l - 1) * taps + k - 1] + enters - leaves;
        }
    }
}

/* w' A w from the lower triangle. */
static double quadratic_form(const mb_fir_fit *fit)
{
    double sum = 0.0;

    for (size_t l = 0; l < fit->taps; l++) {
        for (size_t k = 0; k <= l; k++) {
            double twice = k == l ? 1.0 : 2.0;
            sum += twice * fit->weights[l] * fit->weights[k] * fit->matrix[l * fit->taps + k];
        }
    }
    return sum;
}

/* Cholesky factor in place of the lower triangle. The ridge, -130 dB of the message, keeps directions that a
 * band-limited message does not excite from being divided by rounding errors. */
static void factor(double *matrix, size_t n, double ridge)
{
    for (size_t l = 0; l < n; l++) {
        for (size_t k = 0; k <= l; k++) {
            double sum = matrix[l * n + k] + (k == l ? ridge : 0.0);
            for (size_t i = 0; i < k; i++) {
                sum -= matrix[l * n + i] * matrix[k * n + i];
            }
            matrix[l * n + k] = k == l ? sqrt(fmax(sum, ridge * 0.5)) : sum / matrix[k * n + k];
        }
    }
}

static void substitute(const double *factor, size_t n, const double *right, double *x)
{
    for (size_t l = 0; l < n; l++) {
        double sum = right[l];
        for (size_t k = 0; k < l; k++) {
            sum -= factor[l * n + k] * x[k];
        }
        x[l] = sum / factor[l * n + l];
    }
    for (size_t l = n; l-- > 0;) {
        double sum = x[l];
        for (size_t k = l + 1; k < n; k++) {
            sum -= factor[k * n + l] * x[k];
        }
        x[l] = sum / factor[l * n + l];
    }
}

mb_fir_fit_result mb_fir_fit_solve(mb_fir_fit *fit)
{
    mb_fir_fit_result result = {.error_power = fit->square, .message_power = fit->row[0]};

    if (fit->count < fit->taps || fit->row[0] <= 0.0) {
        return result;
    }
    fill_matrix(fit);
    factor(fit->matrix, fit->taps, 1e-13 * fit->row[0]);
    substitute(fit->matrix, fit->taps, fit->cross, fit->weights);
    fill_matrix(fit); /* again: the factor took its place */
    double explained = 0.0;
    for (size_t k = 0; k < fit->taps; k++) {
        explained += fit->weights[k] * fit->cross[k];
    }
    result.fit_power = quadratic_form(fit);
    result.error_power = fmax(fit->square - 2.0 * explained + result.fit_power, 1e-14 * fit->square);
    return result;
}
