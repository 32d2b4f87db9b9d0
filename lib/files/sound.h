/** sound.h - WAV, RF64 and FLAC through libsndfile, over a source or a sink. Room-internal. */
#ifndef MIRRORBAND_FILES_SOUND_H
#define MIRRORBAND_FILES_SOUND_H

#include "sink.h"
#include "source.h"

#include <sndfile.h>

typedef struct mb_sound mb_sound;

/** Whether the ending of path is one of .wav .rf64 (and .flac when flac). */
bool mb_sound_has_ending(const char *path, bool flac);

/**
 * Opens for reading; takes the source over, also on failure. Checks that the content is what the ending says
 * and as long as its header says. Errors: FORMAT, UNSUPPORTED, MEMORY.
 */
mb_status mb_sound_open(const char *path, mb_source *source, mb_sound **out);

/** Header: rate, channels, format, frames (0 = unknown). */
SF_INFO mb_sound_info(const mb_sound *sound);

/** Reads up to n frames; *got less only at the end. Errors: FILE, FORMAT (truncated or damaged), INTERRUPTED.
 */
mb_status mb_sound_read_f32(mb_sound *sound, float *out, size_t n, size_t *got);
mb_status mb_sound_read_s16(mb_sound *sound, int16_t *out, size_t n, size_t *got);

/** Goes to a frame, for reading or (leaving a hole) for writing. Errors: FILE. */
mb_status mb_sound_seek(mb_sound *sound, uint64_t frame);

/**
 * Starts writing: format is one of SF_FORMAT_WAV, _RF64, _FLAC with a sub-format. rate_hz must be whole.
 * Errors: ARGUMENT (rate_hz), FILE, MEMORY.
 */
mb_status mb_sound_create(const char *path, int format, double rate_hz, int channels, mb_sound **out);

/** Appends n frames. Errors: FILE, UNSUPPORTED (.wav beyond 4 GiB). */
mb_status mb_sound_write_f32(mb_sound *sound, const float *frames, size_t n);
mb_status mb_sound_write_s16(mb_sound *sound, const int16_t *frames, size_t n);
mb_status mb_sound_write_s32(mb_sound *sound, const int32_t *frames, size_t n);

/** Finishes the header and gives the output its name. Errors: FILE. */
mb_status mb_sound_commit(mb_sound *sound);

/** Closes; an output not committed is removed. Accepts NULL. */
void mb_sound_close(mb_sound *sound);

#endif
