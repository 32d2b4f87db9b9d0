#include "lag_finder.h"

#include "mirrorband/filter.h"

#include <math.h>
#include <string.h>

/* Cross-correlation of blocks through transforms, summed over the recording as a cross spectrum in double;
 * one inverse transform at the end. A block of `block` message samples is held against the audio from max_lag
 * before it to max_lag after it, so that no lag looked for wraps around. */

struct mb_lag_finder {
    size_t max_lag, block, length; /* length = block + 2 max_lag, a power of two */
    float *message;                /* from the start of the block */
    float *audio;                  /* from max_lag before the start of the block */
    size_t fill;                   /* of audio; the message holds fill - max_lag */
    mb_cf32 *work[2];
    double *cross; /* re, im per bin */
    mb_fft *forward, *inverse;
};

static mb_status allocate(mb_lag_finder *finder)
{
    size_t length = finder->length;

    finder->message = mb_allocate(length, sizeof *finder->message);
    finder->audio = mb_allocate(length, sizeof *finder->audio);
    finder->work[0] = mb_allocate(length, sizeof *finder->work[0]);
    finder->work[1] = mb_allocate(length, sizeof *finder->work[1]);
    finder->cross = mb_allocate(2 * length, sizeof *finder->cross);
    if (finder->message == NULL || finder->audio == NULL || finder->work[0] == NULL ||
        finder->work[1] == NULL || finder->cross == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory to look for a lag of %zu samples", finder->max_lag);
    }
    mb_status status = mb_fft_create(length, false, &finder->forward);
    return status == MB_OK ? mb_fft_create(length, true, &finder->inverse) : status;
}

mb_status mb_lag_finder_create(size_t max_lag, mb_lag_finder **out)
{
    *out = NULL;
    mb_lag_finder *finder = mb_allocate(1, sizeof *finder);
    if (finder == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory to look for a lag");
    }
    finder->max_lag = max_lag;
    finder->length = 16;
    while (finder->length < 4 * max_lag) {
        finder->length *= 2;
    }
    finder->block = finder->length - 2 * max_lag;
    mb_status status = allocate(finder);
    if (status != MB_OK) {
        mb_lag_finder_destroy(finder);
        return status;
    }
    mb_lag_finder_reset(finder);
    *out = finder;
    return MB_OK;
}

void mb_lag_finder_reset(mb_lag_finder *finder)
{
    finder->fill = finder->max_lag;
    memset(finder->audio, 0, finder->max_lag * sizeof *finder->audio);
    memset(finder->cross, 0, 2 * finder->length * sizeof *finder->cross);
}

void mb_lag_finder_destroy(mb_lag_finder *finder)
{
    if (finder == NULL) {
        return;
    }
    mb_fft_destroy(finder->forward);
    mb_fft_destroy(finder->inverse);
    mb_release(finder->message);
    mb_release(finder->audio);
    mb_release(finder->work[0]);
    mb_release(finder->work[1]);
    mb_release(finder->cross);
    mb_release(finder);
}

static void transform(mb_lag_finder *finder, const float *samples, size_t count, mb_cf32 *work)
{
    for (size_t i = 0; i < finder->length; i++) {
        work[i] = (mb_cf32){i < count ? samples[i] : 0.0f, 0.0f};
    }
    mb_fft_process(finder->forward, work, work);
}

static void take_block(mb_lag_finder *finder)
{
    mb_cf32 *m = finder->work[0], *a = finder->work[1];

    transform(finder, finder->message, finder->block, m);
    transform(finder, finder->audio, finder->length, a);
    for (size_t i = 0; i < finder->length; i++) {
        finder->cross[2 * i] += (double)a[i].re * (double)m[i].re + (double)a[i].im * (double)m[i].im;
        finder->cross[2 * i + 1] += (double)a[i].im * (double)m[i].re - (double)a[i].re * (double)m[i].im;
    }
    finder->fill -= finder->block;
    memmove(finder->audio, finder->audio + finder->block, finder->fill * sizeof *finder->audio);
    memmove(finder->message, finder->message + finder->block,
            (finder->fill - finder->max_lag) * sizeof *finder->message);
}

/* NULL stands for zeros. */
static void add(mb_lag_finder *finder, const float *message, const float *audio, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        finder->message[finder->fill - finder->max_lag] = message != NULL ? message[i] : 0.0f;
        finder->audio[finder->fill++] = audio != NULL ? audio[i] : 0.0f;
        if (finder->fill == finder->length) {
            take_block(finder);
        }
    }
}

void mb_lag_finder_add(mb_lag_finder *finder, const float *message, const float *audio, size_t count)
{
    add(finder, message, audio, count);
}

static double largest(const double *values, size_t count)
{
    double most = 0.0;

    for (size_t i = 0; i < count; i++) {
        most = fmax(most, fabs(values[i]));
    }
    return most;
}

mb_status mb_lag_finder_end(mb_lag_finder *finder, ptrdiff_t *lag)
{
    mb_cf32 *work = finder->work[0];
    size_t best = finder->max_lag;

    add(finder, NULL, NULL, finder->length); /* pushes the last samples through a block */
    double most = largest(finder->cross, 2 * finder->length);
    if (most <= 0.0) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "", "the message or the audio is silent");
    }
    for (size_t i = 0; i < finder->length; i++) {
        work[i] = (mb_cf32){(float)(finder->cross[2 * i] / most), (float)(finder->cross[2 * i + 1] / most)};
    }
    mb_fft_process(finder->inverse, work, work);
    for (size_t i = 0; i <= 2 * finder->max_lag; i++) {
        best = fabsf(work[i].re) > fabsf(work[best].re) ? i : best;
    }
    *lag = (ptrdiff_t)best - (ptrdiff_t)finder->max_lag;
    return MB_OK;
}
