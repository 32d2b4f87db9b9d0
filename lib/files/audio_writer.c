#include "convert.h"
#include "path.h"
#include "sink.h"
#include "sound.h"

#include <string.h>

enum { BLOCK = 4096 };

struct mb_audio_writer {
    mb_audio_format format;
    mb_sink *sink;   /* raw samples, or NULL */
    mb_sound *sound; /* a file, or NULL */
    mb_audio_writer_state state;
    float *clean;    /* BLOCK samples, made finite */
    int32_t *stored; /* BLOCK samples of up to 32 bits */
};

mb_audio_writer_settings mb_audio_writer_settings_default(void)
{
    return (mb_audio_writer_settings){.format = MB_AUDIO_BY_ENDING};
}

static mb_status start_pipe(mb_audio_writer *writer, const char *path,
                            const mb_audio_writer_settings *settings)
{
    if (settings->format != MB_AUDIO_S16 && settings->format != MB_AUDIO_F32) {
        return mb_fail(MB_ERROR_ARGUMENT, "format",
                       "raw audio samples go to standard output; state their format, one of s16 f32");
    }
    mb_status status = mb_check_range("rate_hz", settings->rate_hz, 1.0, 1e12, "Hz");
    return status == MB_OK ? mb_sink_open(path, &writer->sink) : status;
}

static mb_status start_file(mb_audio_writer *writer, const char *path,
                            const mb_audio_writer_settings *settings)
{
    static const int samples[] = {0, SF_FORMAT_PCM_16, SF_FORMAT_PCM_24, SF_FORMAT_FLOAT};
    int kind = SF_FORMAT_WAV;

    if (!mb_sound_has_ending(path, true)) {
        return mb_fail(MB_ERROR_UNSUPPORTED, path, "%s has no ending that is written as audio; use one of %s",
                       path, mb_audio_endings());
    }
    if (mb_path_has_ending(path, ".flac")) {
        kind = SF_FORMAT_FLAC;
    } else if (mb_path_has_ending(path, ".rf64")) {
        kind = SF_FORMAT_RF64;
    }
    if (kind == SF_FORMAT_FLAC && writer->format == MB_AUDIO_F32) {
        return mb_fail(MB_ERROR_UNSUPPORTED, "format", "%s cannot hold f32 samples; use s16 or s24, or .wav",
                       path);
    }
    return mb_sound_create(path, kind | samples[writer->format], settings->rate_hz, 1, &writer->sound);
}

mb_status mb_audio_writer_create(const char *path, const mb_audio_writer_settings *settings,
                                 mb_audio_writer **out)
{
    mb_status status = mb_path_check(path);

    *out = NULL;
    if (status != MB_OK) {
        return status;
    }
    mb_audio_writer *writer = mb_allocate(1, sizeof *writer);
    if (writer == NULL) {
        return mb_fail_memory("an audio output");
    }
    writer->format = settings->format != MB_AUDIO_BY_ENDING ? settings->format : MB_AUDIO_S16;
    writer->clean = mb_allocate(BLOCK, sizeof *writer->clean);
    writer->stored = mb_allocate(BLOCK, sizeof *writer->stored);
    if (writer->clean == NULL || writer->stored == NULL) {
        status = mb_fail_memory("an audio output");
    } else if (mb_path_is_pipe(path)) {
        status = start_pipe(writer, path, settings);
    } else {
        status = start_file(writer, path, settings);
    }
    if (status != MB_OK) {
        mb_audio_writer_destroy(writer);
        return status;
    }
    *out = writer;
    return MB_OK;
}

static mb_status put(mb_audio_writer *writer, const void *stored, size_t n)
{
    switch (writer->format) {
    case MB_AUDIO_S16:
        return writer->sound != NULL ? mb_sound_write_s16(writer->sound, stored, n)
                                     : mb_sink_write(writer->sink, stored, n * sizeof(int16_t));
    case MB_AUDIO_S24:
        return mb_sound_write_s32(writer->sound, stored, n);
    default:
        return writer->sound != NULL ? mb_sound_write_f32(writer->sound, stored, n)
                                     : mb_sink_write(writer->sink, stored, n * sizeof(float));
    }
}

static mb_status write_block(mb_audio_writer *writer, const float *samples, size_t n)
{
    void *stored = writer->stored;
    mb_tally tally = {0};

    memcpy(writer->clean, samples, n * sizeof *samples);
    mb_clean_f32(writer->clean, n, 1, &tally);
    if (writer->format == MB_AUDIO_S16) {
        mb_to_s16(writer->clean, n, 1, stored, &tally);
    } else if (writer->format == MB_AUDIO_S24) {
        mb_to_s24(writer->clean, n, 1, stored, &tally);
    } else {
        stored = writer->clean;
    }
    writer->state.samples += n;
    writer->state.clipped += tally.full_scale;
    writer->state.non_finite += tally.non_finite;
    return put(writer, stored, n);
}

mb_status mb_audio_writer_write(mb_audio_writer *writer, const float *samples, size_t n)
{
    mb_status status = MB_OK;

    while (n > 0 && status == MB_OK) {
        size_t count = n < BLOCK ? n : BLOCK;
        status = write_block(writer, samples, count);
        samples += count;
        n -= count;
    }
    if (status == MB_OK && writer->sink != NULL) {
        return mb_sink_flush(writer->sink);
    }
    return status;
}

mb_audio_writer_state mb_audio_writer_state_of(const mb_audio_writer *writer)
{
    return writer->state;
}

mb_status mb_audio_writer_commit(mb_audio_writer *writer)
{
    return writer->sound != NULL ? mb_sound_commit(writer->sound) : mb_sink_commit(writer->sink);
}

mb_status mb_audio_writer_keep_partial(mb_audio_writer *writer)
{
    return mb_audio_writer_commit(writer);
}

void mb_audio_writer_abandon(mb_audio_writer *writer)
{
    if (writer == NULL) {
        return;
    }
    mb_sound_close(writer->sound);
    writer->sound = NULL;
    mb_sink_abandon(writer->sink);
}

void mb_audio_writer_destroy(mb_audio_writer *writer)
{
    if (writer == NULL) {
        return;
    }
    mb_audio_writer_abandon(writer);
    mb_sink_destroy(writer->sink);
    mb_release(writer->clean);
    mb_release(writer->stored);
    mb_release(writer);
}
