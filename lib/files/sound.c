#include "sound_io.h"

#include "path.h"
#include "sniff.h"

#include <stdio.h>

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

SF_VIRTUAL_IO mb_sound_io(void)
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
    SF_VIRTUAL_IO io = mb_sound_io();
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
