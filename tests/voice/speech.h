/** speech.h - recorded and synthetic voices for the voice tests, brought to 48 or 44.1 kHz. */
#ifndef TESTS_VOICE_SPEECH_H
#define TESTS_VOICE_SPEECH_H

#include <sndfile.h>

#include "check.h"

/** A voice at the rate it is to be processed at. */
typedef struct speech {
    float *samples;
    size_t count;
    double rate_hz;
} speech;

/**
 * Reads at most limit_s seconds of a mono file (.wav, or .raw of 16 kHz 16 bit) and puts zeros between its
 * samples up to 48 kHz (from 8 and 16 kHz) or 44.1 kHz (22.05 kHz). That leaves images above 4 kHz, which the
 * band limit of the voice stage takes away like anything else above the message. NULL samples: no such file.
 */
static inline speech speech_read(const char *path, double limit_s)
{
    size_t length = strlen(path);
    SF_INFO info = {0};
    speech voice = {0};

    if (length > 4 && strcmp(path + length - 4, ".raw") == 0) {
        info = (SF_INFO){.samplerate = 16000,
                         .channels = 1,
                         .format = SF_FORMAT_RAW | SF_FORMAT_PCM_16 | SF_ENDIAN_LITTLE};
    }
    SNDFILE *file = sf_open(path, SFM_READ, &info);
    if (file == NULL) {
        print_error("cannot read %s: %s\n", path, sf_strerror(NULL));
        return voice;
    }
    assert_int_equal(info.channels, 1);
    size_t times = info.samplerate == 22050 ? 2 : (size_t)(48000 / info.samplerate);
    size_t frames = (size_t)fmin((double)info.frames, limit_s * info.samplerate);
    float *read = test_calloc(frames, sizeof *read);
    assert_int_equal(sf_readf_float(file, read, (sf_count_t)frames), (sf_count_t)frames);
    assert_int_equal(sf_close(file), 0);
    voice.rate_hz = (double)times * info.samplerate;
    voice.count = frames * times;
    voice.samples = test_calloc(voice.count, sizeof *voice.samples);
    for (size_t i = 0; i < frames; i++) {
        voice.samples[i * times] = (float)times * read[i];
    }
    test_free(read);
    return voice;
}

static inline void speech_free(speech *voice)
{
    test_free(voice->samples);
    voice->samples = NULL;
}

#endif
