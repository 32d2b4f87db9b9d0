/** convert.h - between stored and float samples, with what was clamped or not finite counted. Room-internal.
 */
#ifndef MIRRORBAND_FILES_CONVERT_H
#define MIRRORBAND_FILES_CONVERT_H

#include "mirrorband/files.h"

/** What a block held. */
typedef struct mb_tally {
    uint64_t non_finite;
    uint64_t full_scale; /* reading: at the end of the range; writing: clamped to it */
    double peak;
} mb_tally;

/**
 * Stored -> float. `parts` numbers per sample (2 complex, 1 real); n samples; peak and counts are added to
 * the tally. in may not overlap out.
 */
void mb_from_s16(const int16_t *in, size_t n, size_t parts, float *out, mb_tally *tally);
void mb_from_s8(const int8_t *in, size_t n, size_t parts, float *out, mb_tally *tally);
void mb_from_u8(const uint8_t *in, size_t n, size_t parts, float *out, mb_tally *tally); /* zero 127.5 */

/** Counts peak and samples at the end of the range, without conversion. */
void mb_look_s16(const int16_t *in, size_t n, size_t parts, mb_tally *tally);

/** Replaces samples with a part that is not finite by zero, in place. */
void mb_clean_f32(float *samples, size_t n, size_t parts, mb_tally *tally);

/** Float (finite) -> stored: nearest whole number of x * scale, clamped; clamped samples are counted. */
void mb_to_s16(const float *in, size_t n, size_t parts, int16_t *out, mb_tally *tally);
void mb_to_s8(const float *in, size_t n, size_t parts, int8_t *out, mb_tally *tally);
void mb_to_u8(const float *in, size_t n, size_t parts, uint8_t *out, mb_tally *tally); /* zero 127.5 */
/** 24 bit, left-justified in 32 as libsndfile takes them. */
void mb_to_s24(const float *in, size_t n, size_t parts, int32_t *out, mb_tally *tally);

#endif
