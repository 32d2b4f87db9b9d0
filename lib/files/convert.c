/* Plain loops in a form that compilers turn into vector code: one pass, no branch, whole-number reductions.
 */
#include "convert.h"

#include <math.h>
#include <string.h>

/* Adding and taking away 1.5 * 2^23 leaves the nearest whole number of any |x| < 2^22, ties to even. */
static const float ROUND = 12582912.0f;

static uint32_t magnitude_bits(float value)
{
    uint32_t bits;

    memcpy(&bits, &value, sizeof bits);
    return bits & UINT32_C(0x7fffffff);
}

void mb_clean_f32(float *samples, size_t n, size_t parts, mb_tally *tally)
{
    uint32_t largest = 0;

    /* bit patterns of positive floats are in the order of their values; infinity and NaN come last */
    for (size_t i = 0; i < n * parts; i++) {
        uint32_t bits = magnitude_bits(samples[i]);
        largest = bits > largest ? bits : largest;
    }
    if (largest >= UINT32_C(0x7f800000)) {
        largest = 0;
        tally->non_finite +=
            parts == 2 ? mb_scrub_cf32((mb_cf32 *)(void *)samples, n) : mb_scrub_f32(samples, n * parts);
        for (size_t i = 0; i < n * parts; i++) {
            uint32_t bits = magnitude_bits(samples[i]);
            largest = bits > largest ? bits : largest;
        }
    }
    float peak;
    memcpy(&peak, &largest, sizeof peak);
    tally->peak = fmax(tally->peak, (double)peak);
}

/* Counts samples with a part at an end of the range; asked only when the extremes say there are some. */
#define COUNT_ENDS(in, n, parts, low, high, count)                                                           \
    for (size_t i = 0; i < (n); i++) {                                                                       \
        bool at_end = false;                                                                                 \
        for (size_t k = 0; k < (parts); k++) {                                                               \
            at_end = at_end || (in)[i * (parts) + k] == (low) || (in)[i * (parts) + k] == (high);            \
        }                                                                                                    \
        (count) += at_end ? 1U : 0U;                                                                         \
    }

void mb_look_s16(const int16_t *in, size_t n, size_t parts, mb_tally *tally)
{
    int16_t low = 0, high = 0;

    for (size_t i = 0; i < n * parts; i++) {
        low = in[i] < low ? in[i] : low;
        high = in[i] > high ? in[i] : high;
    }
    if (low == INT16_MIN || high == INT16_MAX) {
        COUNT_ENDS(in, n, parts, INT16_MIN, INT16_MAX, tally->full_scale)
    }
    tally->peak = fmax(tally->peak, fmax(-low, high) / 32768.0);
}

void mb_from_s16(const int16_t *in, size_t n, size_t parts, float *out, mb_tally *tally)
{
    mb_look_s16(in, n, parts, tally);
    for (size_t i = 0; i < n * parts; i++) {
        out[i] = (float)in[i] * (1.0f / 32768.0f);
    }
}

void mb_from_s8(const int8_t *in, size_t n, size_t parts, float *out, mb_tally *tally)
{
    int low = 0, high = 0;

    for (size_t i = 0; i < n * parts; i++) {
        low = in[i] < low ? in[i] : low;
        high = in[i] > high ? in[i] : high;
        out[i] = (float)in[i] * (1.0f / 128.0f);
    }
    if (low == INT8_MIN || high == INT8_MAX) {
        COUNT_ENDS(in, n, parts, INT8_MIN, INT8_MAX, tally->full_scale)
    }
    tally->peak = fmax(tally->peak, fmax(-low, high) / 128.0);
}

void mb_from_u8(const uint8_t *in, size_t n, size_t parts, float *out, mb_tally *tally)
{
    int low = 127, high = 128;

    for (size_t i = 0; i < n * parts; i++) {
        low = in[i] < low ? in[i] : low;
        high = in[i] > high ? in[i] : high;
        out[i] = ((float)in[i] - 127.5f) * (1.0f / 128.0f);
    }
    if (low == 0 || high == UINT8_MAX) {
        COUNT_ENDS(in, n, parts, 0, UINT8_MAX, tally->full_scale)
    }
    if (n > 0) {
        tally->peak = fmax(tally->peak, fmax(127.5 - low, high - 127.5) / 128.0);
    }
}

/* Nearest whole number of value within low..high, both whole. */
static float whole(float value, float low, float high)
{
    value = value < low ? low : value;
    value = value > high ? high : value;
    return (value + ROUND) - ROUND;
}

/* Samples with a part whose nearest whole number lies outside low..high. */
static uint64_t count_clamped(const float *in, size_t n, size_t parts, double scale, double low, double high)
{
    uint64_t count = 0;

    for (size_t i = 0; i < n; i++) {
        bool clamped = false;
        for (size_t k = 0; k < parts; k++) {
            double value = (double)in[i * parts + k] * scale;
            clamped = clamped || value > high + 0.5 || value < low - 0.5;
        }
        count += clamped ? 1U : 0U;
    }
    return count;
}

static void tally_peak(const float *in, size_t n, size_t parts, mb_tally *tally, double *peak)
{
    mb_tally block = {0};
    uint32_t largest = 0;
    float value;

    for (size_t i = 0; i < n * parts; i++) {
        uint32_t bits = magnitude_bits(in[i]);
        largest = bits > largest ? bits : largest;
    }
    memcpy(&value, &largest, sizeof value);
    block.peak = (double)value;
    tally->peak = fmax(tally->peak, block.peak);
    *peak = block.peak;
}

void mb_to_s16(const float *in, size_t n, size_t parts, int16_t *out, mb_tally *tally)
{
    double peak = 0.0;

    tally_peak(in, n, parts, tally, &peak);
    if (peak * 32768.0 > 32767.0) {
        tally->full_scale += count_clamped(in, n, parts, 32768.0, -32768.0, 32767.0);
    }
    for (size_t i = 0; i < n * parts; i++) {
        out[i] = (int16_t)whole(in[i] * 32768.0f, -32768.0f, 32767.0f);
    }
}

void mb_to_s8(const float *in, size_t n, size_t parts, int8_t *out, mb_tally *tally)
{
    double peak = 0.0;

    tally_peak(in, n, parts, tally, &peak);
    if (peak * 128.0 > 127.0) {
        tally->full_scale += count_clamped(in, n, parts, 128.0, -128.0, 127.0);
    }
    for (size_t i = 0; i < n * parts; i++) {
        out[i] = (int8_t)whole(in[i] * 128.0f, -128.0f, 127.0f);
    }
}

void mb_to_u8(const float *in, size_t n, size_t parts, uint8_t *out, mb_tally *tally)
{
    double peak = 0.0;

    tally_peak(in, n, parts, tally, &peak);
    if (peak * 128.0 > 127.5) {
        tally->full_scale += count_clamped(in, n, parts, 128.0, -127.5, 127.5);
    }
    for (size_t i = 0; i < n * parts; i++) {
        out[i] = (uint8_t)whole(in[i] * 128.0f + 127.5f, 0.0f, 255.0f);
    }
}

void mb_to_s24(const float *in, size_t n, size_t parts, int32_t *out, mb_tally *tally)
{
    double peak = 0.0;

    tally_peak(in, n, parts, tally, &peak);
    if (peak * 8388608.0 > 8388607.0) {
        tally->full_scale += count_clamped(in, n, parts, 8388608.0, -8388608.0, 8388607.0);
    }
    for (size_t i = 0; i < n * parts; i++) {
        double value = nearbyint((double)in[i] * 8388608.0);
        value = fmin(8388607.0, fmax(-8388608.0, value));
        out[i] = (int32_t)value * 256;
    }
}
