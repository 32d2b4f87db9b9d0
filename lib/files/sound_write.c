#include "sound_io.h"

#include "path.h"

#include <math.h>

static mb_status check_rate(const char *path, int format, double rate_hz)
{
    double highest = (format & SF_FORMAT_TYPEMASK) == SF_FORMAT_FLAC ? 655350.0 : 2147483647.0;
    mb_status status = mb_check_range("rate_hz", rate_hz, 1.0, highest, "Hz");

    if (status == MB_OK && rate_hz != floor(rate_hz)) {
        return mb_fail(
            MB_ERROR_ARGUMENT, "rate_hz",
            "rate_hz must be a whole number of Hz in %s; it is %.12g; use .sigmf-meta or a raw file", path,
            rate_hz);
    }
    return status;
}

static size_t sample_bytes(int format)
{
    switch (format & SF_FORMAT_SUBMASK) {
    case SF_FORMAT_PCM_16:
        return 2;
    case SF_FORMAT_PCM_24:
        return 3;
    default:
        return 4;
    }
}

static mb_status start_handle(mb_sound *sound, const char *path)
{
    SF_VIRTUAL_IO io = mb_sound_io();
    mb_status status = mb_sink_open(path, &sound->sink);

    if (status != MB_OK) {
        return status;
    }
    if (mb_sink_is_direct(sound->sink)) {
        return mb_fail(MB_ERROR_UNSUPPORTED, path,
                       "%s is no ordinary file, which this ending needs; pipe raw samples through - instead",
                       path);
    }
    sound->handle = sf_open_virtual(&io, SFM_WRITE, &sound->info, sound);
    if (sound->handle == NULL) {
        return sound->status != MB_OK
                   ? sound->status
                   : mb_fail(MB_ERROR_UNSUPPORTED, path, "%s cannot be written: %s", path, sf_strerror(NULL));
    }
    (void)sf_command(sound->handle, SFC_SET_CLIPPING, NULL, SF_TRUE);
    (void)sf_command(sound->handle, SFC_SET_ADD_PEAK_CHUNK, NULL,
                     SF_FALSE); /* it holds the date: not repeatable */
    return MB_OK;
}

mb_status mb_sound_create(const char *path, int format, double rate_hz, int channels, mb_sound **out)
{
    mb_status status = check_rate(path, format, rate_hz);

    *out = NULL;
    if (status != MB_OK) {
        return status;
    }
    mb_sound *sound = mb_allocate(1, sizeof *sound);
    if (sound == NULL) {
        return mb_fail_memory("a sound file");
    }
    sound->info.format = format;
    sound->info.samplerate = (int)rate_hz;
    sound->info.channels = channels;
    sound->frame_bytes = sample_bytes(format) * (size_t)channels;
    status = start_handle(sound, path);
    if (status != MB_OK) {
        mb_sound_close(sound);
        return status;
    }
    *out = sound;
    return MB_OK;
}

/* Refuses what a 32-bit size cannot count. */
static mb_status check_room(const mb_sound *sound, size_t n)
{
    const uint64_t limit = UINT32_MAX - 65536U;
    uint64_t bytes = (sound->frames + n) * sound->frame_bytes;

    if ((sound->info.format & SF_FORMAT_TYPEMASK) != SF_FORMAT_WAV || bytes <= limit) {
        return MB_OK;
    }
    return mb_fail(MB_ERROR_UNSUPPORTED, mb_sink_name(sound->sink),
                   "%s would grow beyond 4 GiB, more than .wav can hold; use .rf64 instead",
                   mb_sink_name(sound->sink));
}

/* Once a second of signal the header is made to count what is there. */
static mb_status finish_write(mb_sound *sound, size_t n, sf_count_t made)
{
    const char *name = mb_sink_name(sound->sink);

    if (sound->status == MB_OK && (made < 0 || (size_t)made != n)) {
        sound->status =
            mb_fail(MB_ERROR_FILE, name, "%s cannot be written: %s", name, sf_strerror(sound->handle));
    }
    sound->frames += n;
    if (sound->status == MB_OK && sound->frames >= sound->header_frame) {
        sound->header_frame = sound->frames + (uint64_t)sound->info.samplerate;
        if ((sound->info.format & SF_FORMAT_TYPEMASK) != SF_FORMAT_FLAC) {
            (void)sf_command(sound->handle, SFC_UPDATE_HEADER_NOW, NULL, 0);
        }
        sound->status = sound->status == MB_OK ? mb_sink_flush(sound->sink) : sound->status;
    }
    return sound->status;
}

mb_status mb_sound_write_f32(mb_sound *sound, const float *frames, size_t n)
{
    mb_status status = check_room(sound, n);

    return status != MB_OK ? status
                           : finish_write(sound, n, sf_writef_float(sound->handle, frames, (sf_count_t)n));
}

mb_status mb_sound_write_s16(mb_sound *sound, const int16_t *frames, size_t n)
{
    mb_status status = check_room(sound, n);

    return status != MB_OK ? status
                           : finish_write(sound, n, sf_writef_short(sound->handle, frames, (sf_count_t)n));
}

mb_status mb_sound_write_s32(mb_sound *sound, const int32_t *frames, size_t n)
{
    mb_status status = check_room(sound, n);

    return status != MB_OK ? status
                           : finish_write(sound, n, sf_writef_int(sound->handle, frames, (sf_count_t)n));
}

mb_status mb_sound_commit(mb_sound *sound)
{
    int result = sf_close(sound->handle);

    sound->handle = NULL;
    if (sound->status != MB_OK || result != 0) {
        mb_status status = sound->status;
        if (status == MB_OK) {
            const char *name = mb_sink_name(sound->sink);
            status = mb_fail(MB_ERROR_FILE, name, "%s cannot be finished: %s", name, sf_error_number(result));
        }
        mb_sink_abandon(sound->sink);
        return status;
    }
    return mb_sink_commit(sound->sink);
}
