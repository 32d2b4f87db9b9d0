#include "convert.h"
#include "path.h"
#include "sniff.h"
#include "sound.h"
#include "source.h"

#include <string.h>

enum { BLOCK = 4096, CHANNELS_MAX = 256 };

struct mb_audio_reader {
    mb_source *source; /* raw samples, or NULL */
    mb_sound *sound;   /* a file, or NULL */
    mb_audio_info info;
    mb_audio_reader_state state;
    size_t channel;  /* from 0 */
    double highest;  /* largest value of an integer format; 0 for floats */
    float *frames;   /* BLOCK frames of all channels */
    int16_t *stored; /* BLOCK raw 16-bit samples */
    size_t carried;  /* bytes of a sample cut by a signal */
    unsigned char carry[sizeof(float)];
};

mb_audio_open mb_audio_open_default(void)
{
    return (mb_audio_open){.format = MB_AUDIO_BY_ENDING};
}

static mb_status refuse_odd(const mb_audio_reader *reader, uint64_t bytes, size_t width)
{
    const char *name = mb_source_name(reader->source);

    return mb_fail(
        MB_ERROR_FORMAT, name,
        "%s holds %llu bytes, no multiple of the %zu of a %s sample: it is truncated or of another format; "
        "send it again",
        name, (unsigned long long)bytes, width, mb_audio_format_text(reader->info.format));
}

static size_t raw_width(const mb_audio_reader *reader)
{
    return reader->info.format == MB_AUDIO_S16 ? sizeof(int16_t) : sizeof(float);
}

static mb_status open_pipe(mb_audio_reader *reader, const char *path, const mb_audio_open *options)
{
    if (options->format != MB_AUDIO_S16 && options->format != MB_AUDIO_F32) {
        return mb_fail(MB_ERROR_ARGUMENT, "format",
                       "standard input holds raw audio samples; state their format, one of s16 f32");
    }
    if (options->rate_hz == 0.0) {
        return mb_fail(MB_ERROR_ARGUMENT, "rate_hz",
                       "standard input holds raw audio samples, which do not tell their rate; state it");
    }
    mb_status status = mb_check_range("rate_hz", options->rate_hz, 1.0, 1e12, "Hz");
    if (status == MB_OK) {
        status = mb_source_open(path, options->rewindable, &reader->source);
    }
    if (status != MB_OK) {
        return status;
    }
    reader->info = (mb_audio_info){.rate_hz = options->rate_hz, .channels = 1, .format = options->format};
    reader->highest = options->format == MB_AUDIO_S16 ? 32767.0 / 32768.0 : 0.0;
    uint64_t bytes = mb_source_size(reader->source);
    reader->info.samples = bytes / raw_width(reader);
    return bytes % raw_width(reader) == 0 ? MB_OK : refuse_odd(reader, bytes, raw_width(reader));
}

static void note_format(mb_audio_reader *reader, int format)
{
    switch (format & SF_FORMAT_SUBMASK) {
    case SF_FORMAT_PCM_16:
        reader->info.format = MB_AUDIO_S16;
        reader->highest = 32767.0 / 32768.0;
        break;
    case SF_FORMAT_PCM_24:
        reader->info.format = MB_AUDIO_S24;
        reader->highest = 8388607.0 / 8388608.0;
        break;
    case SF_FORMAT_PCM_U8:
    case SF_FORMAT_PCM_S8:
        reader->info.format = MB_AUDIO_S16;
        reader->highest = 127.0 / 128.0;
        break;
    default:
        reader->info.format = MB_AUDIO_F32;
        break;
    }
}

static mb_status open_file(mb_audio_reader *reader, const char *path, const mb_audio_open *options)
{
    mb_source *source = NULL;

    if (!mb_sound_has_ending(path, true)) {
        return mb_fail(MB_ERROR_UNSUPPORTED, path, "%s has no ending that is read as audio; use one of %s",
                       path, mb_audio_endings());
    }
    mb_status status = mb_source_open(path, options->rewindable, &source);
    if (status == MB_OK) {
        status = mb_sound_open(path, source, &reader->sound);
    }
    if (status != MB_OK) {
        return status;
    }
    SF_INFO info = mb_sound_info(reader->sound);
    reader->info.rate_hz = info.samplerate;
    reader->info.samples = (uint64_t)info.frames;
    reader->info.channels = (size_t)info.channels;
    note_format(reader, info.format);
    if (options->channel == 0 && info.channels > 1) {
        return mb_fail(MB_ERROR_ARGUMENT, "channel", "%s has %d channels; choose one of 1 to %d", path,
                       info.channels, info.channels);
    }
    if (options->channel > reader->info.channels || info.channels > CHANNELS_MAX) {
        return mb_fail(MB_ERROR_ARGUMENT, "channel",
                       "%s has %d channel%s, no channel %zu; choose one that is there", path, info.channels,
                       info.channels == 1 ? "" : "s", options->channel);
    }
    reader->channel = options->channel > 0 ? options->channel - 1 : 0;
    return MB_OK;
}

mb_status mb_audio_reader_open(const char *path, const mb_audio_open *options, mb_audio_reader **out)
{
    const mb_audio_open defaults = mb_audio_open_default();

    *out = NULL;
    options = options != NULL ? options : &defaults;
    mb_status status = mb_path_check(path);
    if (status != MB_OK) {
        return status;
    }
    mb_audio_reader *reader = mb_allocate(1, sizeof *reader);
    if (reader == NULL) {
        return mb_fail_memory("an audio input");
    }
    status = mb_path_is_pipe(path) ? open_pipe(reader, path, options) : open_file(reader, path, options);
    if (status == MB_OK) {
        reader->frames = mb_allocate(BLOCK * reader->info.channels, sizeof *reader->frames);
        reader->stored = mb_allocate(BLOCK, sizeof *reader->stored);
        status = reader->frames != NULL && reader->stored != NULL ? MB_OK : mb_fail_memory("an audio input");
    }
    if (status != MB_OK) {
        mb_audio_reader_close(reader);
        return status;
    }
    *out = reader;
    return MB_OK;
}

mb_audio_info mb_audio_reader_info(const mb_audio_reader *reader)
{
    return reader->info;
}

mb_audio_reader_state mb_audio_reader_state_of(const mb_audio_reader *reader)
{
    return reader->state;
}

/* Up to n <= BLOCK raw samples of a pipe, as stored. */
static mb_status read_raw(mb_audio_reader *reader, void *to, size_t n, size_t *got)
{
    size_t width = raw_width(reader), kept = reader->carried, made = 0;
    unsigned char *bytes = to;
    mb_status status = MB_OK;

    *got = 0;
    if (mb_source_position(reader->source) == 0) {
        status = mb_sniff_raw(reader->source, mb_audio_format_text(reader->info.format));
    }
    if (status != MB_OK) {
        return status;
    }
    memcpy(bytes, reader->carry, kept);
    status = mb_source_read(reader->source, bytes + kept, n * width - kept, &made);
    *got = (kept + made) / width;
    reader->carried = (kept + made) % width;
    memcpy(reader->carry, bytes + *got * width, reader->carried);
    if (status == MB_OK && *got == 0 && reader->carried > 0) {
        return refuse_odd(reader, mb_source_position(reader->source), width);
    }
    return status;
}

static mb_status read_block(mb_audio_reader *reader, float *out, size_t n, size_t *got)
{
    mb_tally ignored = {0};
    mb_status status = MB_OK;

    if (reader->sound == NULL && reader->info.format == MB_AUDIO_S16) {
        status = read_raw(reader, reader->stored, n, got);
        mb_from_s16(reader->stored, *got, 1, out, &ignored);
        return status;
    }
    if (reader->sound == NULL) {
        return read_raw(reader, out, n, got);
    }
    if (reader->info.channels == 1) {
        return mb_sound_read_f32(reader->sound, out, n, got);
    }
    status = mb_sound_read_f32(reader->sound, reader->frames, n, got);
    for (size_t i = 0; i < *got; i++) {
        out[i] = reader->frames[i * reader->info.channels + reader->channel];
    }
    return status;
}

static void look(mb_audio_reader *reader, float *samples, size_t n)
{
    mb_tally tally = {.peak = 0.0};

    mb_clean_f32(samples, n, 1, &tally);
    if (reader->highest > 0.0 && tally.peak >= reader->highest) {
        for (size_t i = 0; i < n; i++) {
            tally.full_scale += (double)samples[i] >= reader->highest || samples[i] <= -1.0f ? 1U : 0U;
        }
    }
    reader->state.samples += n;
    reader->state.non_finite += tally.non_finite;
    reader->state.at_full_scale += tally.full_scale;
    reader->state.peak = tally.peak > reader->state.peak ? tally.peak : reader->state.peak;
}

mb_status mb_audio_read(mb_audio_reader *reader, float *out, size_t n, size_t *got)
{
    mb_status status = MB_OK;

    *got = 0;
    while (*got < n && status == MB_OK) {
        size_t wanted = n - *got < BLOCK ? n - *got : BLOCK, made = 0;
        status = read_block(reader, out + *got, wanted, &made);
        look(reader, out + *got, made);
        *got += made;
        if (made == 0) {
            break;
        }
    }
    return status;
}

mb_status mb_audio_rewind(mb_audio_reader *reader)
{
    mb_status status =
        reader->sound != NULL ? mb_sound_seek(reader->sound, 0) : mb_source_seek(reader->source, 0);

    if (status == MB_OK) {
        reader->state = (mb_audio_reader_state){0};
        reader->carried = 0;
    }
    return status;
}

void mb_audio_reader_close(mb_audio_reader *reader)
{
    if (reader == NULL) {
        return;
    }
    mb_sound_close(reader->sound);
    mb_source_close(reader->source);
    mb_release(reader->frames);
    mb_release(reader->stored);
    mb_release(reader);
}
