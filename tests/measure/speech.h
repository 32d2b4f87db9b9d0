/** speech.h - the recorded words of alsa-utils (48 kHz, about 1.4 s each), used in place. */
#ifndef TESTS_MEASURE_SPEECH_H
#define TESTS_MEASURE_SPEECH_H

#include "check.h"

#include <sndfile.h>

/** Samples to be released by the test; NULL when the package is not installed. */
static inline float *speech(const char *name, size_t *count, double *rate_hz)
{
    char path[256];
    SF_INFO info = {0};

    (void)snprintf(path, sizeof path, "/usr/share/sounds/alsa/%s", name);
    SNDFILE *file = sf_open(path, SFM_READ, &info);
    if (file == NULL) {
        return NULL;
    }
    float *samples = mb_allocate((size_t)info.frames, sizeof *samples);
    assert_non_null(samples);
    assert_int_equal(sf_read_float(file, samples, info.frames), info.frames);
    assert_int_equal(sf_close(file), 0);
    *count = (size_t)info.frames;
    *rate_hz = info.samplerate;
    return samples;
}

#endif
