#include "mirrorband/filter.h"

#include <fftw3.h>
#include <pthread.h>
#include <string.h>

struct mb_fft {
    fftwf_plan plan;
    size_t length;
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
    mb_cf32 *scratch = mb_allocate(length, sizeof *scratch);
    if (fft != NULL && scratch != NULL) {
        fftwf_complex *data = (fftwf_complex *)(void *)scratch;
        fft->length = length;
        (void)pthread_mutex_lock(&planner_lock);
        fft->plan = fftwf_plan_dft_1d((int)length, data, data, inverse ? FFTW_BACKWARD : FFTW_FORWARD,
                                      FFTW_ESTIMATE | FFTW_UNALIGNED);
        (void)pthread_mutex_unlock(&planner_lock);
    }
    mb_release(scratch);
    if (fft == NULL || fft->plan == NULL) {
        mb_release(fft);
        return mb_fail(MB_ERROR_MEMORY, "length", "no memory for a transform of %zu points", length);
    }
    *out = fft;
    return MB_OK;
}

void mb_fft_process(mb_fft *fft, const mb_cf32 *in, mb_cf32 *out)
{
    if (in != out) {
        memcpy(out, in, fft->length * sizeof *out);
    }
    fftwf_execute_dft(fft->plan, (fftwf_complex *)(void *)out, (fftwf_complex *)(void *)out);
}

void mb_fft_destroy(mb_fft *fft)
{
    if (fft != NULL) {
        (void)pthread_mutex_lock(&planner_lock);
        fftwf_destroy_plan(fft->plan);
        (void)pthread_mutex_unlock(&planner_lock);
        mb_release(fft);
    }
}
