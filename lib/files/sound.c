#include "sound.h"

#include "path.h"
#include "sniff.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

struct mb_sound {
    SNDFILE *handle;
    SF_INFO info;
    mb_source *source; /* one of these two is there */
    mb_sink *sink;
    mb_status status;      /* of the source or the sink, which libsndfile does not pass on */
    uint64_t frames;       /* read or written */
    uint64_t header_frame; /* when the header is next brought up to date, so that a killed writer leaves a
                              valid file */
    size_t frame_bytes;
};

bool mb_sound_has_ending(const char *path, bool flac)
{
    return mb_path_has_ending(path, ".wav") || mb_path_has_ending(path, ".rf64") ||
           (flac && mb_path_has_ending(path, ".flac"));
}

/* ---- what libsndfile asks of a file -------------------------------------------------------------------- */

static sf_count_t io_length(void *user)
{
    const mb_sound *sound = user;

    return (sf_count_t)(sound->source != NULL ? mb_source_size(sound->source) : mb_sink_size(sound->sink));
}

static sf_count_t io_tell(void *user)
{
    const mb_sound *sound = user;

    return (sf_count_t)(sound->source != NULL ? mb_source_position(sound->source)
                                              : mb_sink_position(sound->sink));
}

static sf_count_t io_seek(sf_count_t offset, int whence, void *user)
{
    mb_sound *sound = user;
    sf_count_t base = whence == SEEK_CUR ? io_tell(user) : whence == SEEK_END ? io_length(user) : 0;
    sf_count_t target = base + offset;

    if (target < 0) {
        return -1;
    }
    mb_status status = sound->source != NULL ? mb_source_seek(sound->source, (uint64_t)target)
                                             : mb_sink_seek(sound->sink, (uint64_t)target);
    sound->status = status != MB_OK ? status : sound->status;
    return status == MB_OK ? target : -1;
}

static sf_count_t io_read(void *to, sf_count_t bytes, void *user)
{
    mb_sound *sound = user;
    size_t got = 0;

    if (sound->source == NULL) {
        return 0;
    }
    mb_status status = mb_source_read(sound->source, to, (size_t)bytes, &got);
    sound->status = status != MB_OK ? status : sound->status;
    return (sf_count_t)got;
}

static sf_count_t io_write(const void *from, sf_count_t bytes, void *user)
{
    mb_sound *sound = user;
    mb_status status =
        sound->status != MB_OK ? sound->status : mb_sink_write(sound->sink, from, (size_t)bytes);

    sound->status = status;
    return status == MB_OK ? bytes : 0;
}

static SF_VIRTUAL_IO io_functions(void)
{
    return (SF_VIRTUAL_IO){io_length, io_seek, io_read, io_write, io_tell};
}

/* ---- reading ------------------------------------------------------------------------------------------- */

static mb_status check_kind(const char *path, const mb_sound *sound)
{
    const char *name = mb_source_name(sound->source);
    int kind = sound->info.format & SF_FORMAT_TYPEMASK;
    bool flac = mb_path_has_ending(path, ".flac");
    bool wave = kind == SF_FORMAT_WAV || kind == SF_FORMAT_WAVEX || kind == SF_FORMAT_RF64;

    if (flac ? kind != SF_FORMAT_FLAC : !wave) {
        return mb_fail(MB_ERROR_FORMAT, path,
                       "%s is not %s: its ending does not fit its content; name it after its "
                       "content or convert it",
                       name, flac ? "FLAC" : "WAV or RF64");
    }
    if (sound->info.frames == 0) {
        return mb_fail(MB_ERROR_FORMAT, path, "%s holds a header and no samples; record or copy it again",
                       name);
    }
    return MB_OK;
}

static mb_status open_handle(const char *path, mb_sound *sound)
{
    SF_VIRTUAL_IO io = io_functions();
    const char *name = mb_source_name(sound->source);

    if (!mb_source_is_file(sound->source)) {
        return mb_fail(MB_ERROR_UNSUPPORTED, path,
                       "%s is a pipe, but such a file must be sought in; pipe raw samples "
                       "through - instead",
                       name);
    }
    mb_status status = mb_sniff_sound(sound->source, mb_path_has_ending(path, ".flac"));
    if (status != MB_OK) {
        return status;
    }
    sound->handle = sf_open_virtual(&io, SFM_READ, &sound->info, sound);
    if (sound->status != MB_OK) {
        return sound->status;
    }
    if (sound->handle == NULL) {
        return mb_fail(MB_ERROR_FORMAT, path, "%s cannot be read as %s: %s; convert it or record it again",
                       name, mb_path_has_ending(path, ".flac") ? "FLAC" : "WAV", sf_strerror(NULL));
    }
    return check_kind(path, sound);
}

mb_status mb_sound_open(const char *path, mb_source *source, mb_sound **out)
{
    mb_sound *sound = mb_allocate(1, sizeof *sound);

    *out = NULL;
    if (sound == NULL) {
        mb_source_close(source);
        return mb_fail_memory("a sound file");
    }
    sound->source = source;
    mb_status status = open_handle(path, sound);
    if (status != MB_OK) {
        mb_sound_close(sound);
        return status;
    }
    *out = sound;
    return MB_OK;
}

SF_INFO mb_sound_info(const mb_sound *sound)
{
    SF_INFO info = sound->info;

    if (info.frames == SF_COUNT_MAX) {
        info.frames = 0;
    }
    return info;
}

/* After a read of n frames that gave `made`: hands over the count, or tells why the file ends too soon. */
static mb_status finish_read(mb_sound *sound, size_t n, sf_count_t made, size_t *got)
{
    const char *name = mb_source_name(sound->source);
    uint64_t expected = (uint64_t)mb_sound_info(sound).frames;

    *got = made > 0 ? (size_t)made : 0;
    sound->frames += *got;
    if (*got == n || sound->frames == expected) {
        return MB_OK;
    }
    if (sound->status != MB_OK) {
        mb_status status = sound->status;
        sound->status = status == MB_ERROR_INTERRUPTED ? MB_OK : status;
        return status;
    }
    if (*got == 0 && expected > 0) {
        return mb_fail(
            MB_ERROR_FORMAT, name,
            "%s ends after %llu of %llu samples: it is truncated or damaged; copy or record it again", name,
            (unsigned long long)sound->frames, (unsigned long long)expected);
    }
    return MB_OK;
}

mb_status mb_sound_read_f32(mb_sound *sound, float *out, size_t n, size_t *got)
{
    return finish_read(sound, n, sf_readf_float(sound->handle, out, (sf_count_t)n), got);
}

mb_status mb_sound_read_s16(mb_sound *sound, int16_t *out, size_t n, size_t *got)
{
    return finish_read(sound, n, sf_readf_short(sound->handle, out, (sf_count_t)n), got);
}

mb_status mb_sound_seek(mb_sound *sound, uint64_t frame)
{
    if (sf_seek(sound->handle, (sf_count_t)frame, SEEK_SET) != (sf_count_t)frame) {
        const char *name = sound->source != NULL ? mb_source_name(sound->source) : mb_sink_name(sound->sink);
        return mb_fail(MB_ERROR_FILE, name, "%s cannot be moved in: %s", name, sf_strerror(sound->handle));
    }
    sound->frames = frame;
    sound->status = MB_OK;
    return MB_OK;
}

/* ---- writing ------------------------------------------------------------------------------------------- */

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
    SF_VIRTUAL_IO io = io_functions();
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
            sound->status = sound->status == MB_OK ? mb_sink_flush(sound->sink) : sound->status;
        }
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

void mb_sound_close(mb_sound *sound)
{
    if (sound == NULL) {
        return;
    }
    if (sound->handle != NULL) {
        (void)sf_close(sound->handle);
    }
    mb_source_close(sound->source);
    mb_sink_destroy(sound->sink);
    mb_release(sound);
}
