#include "mirrorband/filter.h"

#include <fftw3.h>
#include <pthread.h>
#include <string.h>

struct mb_fft {
    fftwf_plan plan; /* from `from` to `to`, which are aligned for the vector code of FFTW */
    size_t length;
    mb_cf32 *from, *to;
};

/* FFTW's planner is the one part of it that must not run in two threads at once. */
static pthread_mutex_t planner_lock = PTHREAD_MUTEX_INITIALIZER;

mb_status mb_fft_create(size_t length, bool inverse, mb_fft **out)
{
    *out = NULL;
    if (length < 1 || length > (size_t)1 << 26) {
        return mb_fail(MB_ERROR_ARGUMENT, "length", "length must be between 1 and 67108864; it is %zu",
                       length);
    }
    mb_fft *fft = mb_allocate(1, sizeof *fft);
    if (fft != NULL) {
        fft->length = length;
        fft->from = mb_allocate(length, sizeof *fft->from);
        fft->to = mb_allocate(length, sizeof *fft->to);
    }
    if (fft != NULL && fft->from != NULL && fft->to != NULL) {
        (void)pthread_mutex_lock(&planner_lock);
        fft->plan = fftwf_plan_dft_1d((int)length, (fftwf_complex *)(void *)fft->from,
                                      (fftwf_complex *)(void *)fft->to,
                                      inverse ? FFTW_BACKWARD : FFTW_FORWARD, FFTW_ESTIMATE);
        (void)pthread_mutex_unlock(&planner_lock);
    }
    if (fft == NULL || fft->plan == NULL) {
        mb_fft_destroy(fft);
        return mb_fail(MB_ERROR_MEMORY, "length", "no memory for a transform of %zu points", length);
    }
    *out = fft;
    return MB_OK;
}

void mb_fft_process(mb_fft *fft, const mb_cf32 *in, mb_cf32 *out)
{
    memcpy(fft->from, in, fft->length * sizeof *in);
    fftwf_execute(fft->plan);
    memcpy(out, fft->to, fft->length * sizeof *out);
}

void mb_fft_destroy(mb_fft *fft)
{
    if (fft != NULL) {
        (void)pthread_mutex_lock(&planner_lock);
        if (fft->plan != NULL) {
            fftwf_destroy_plan(fft->plan);
        }
        (void)pthread_mutex_unlock(&planner_lock);
        mb_release(fft->from);
        mb_release(fft->to);
        mb_release(fft);
    }
}
