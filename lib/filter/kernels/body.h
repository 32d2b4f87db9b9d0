/**
 * body.h - the kernels themselves, included once per instruction set with KERNEL_WIDTH (floats a register
 * holds), KERNEL_SET (name of the table) and KERNEL_NAME (in words). Only how many lanes share a register
 * differs between the sets, never the arithmetic of a lane.
 */
#include <string.h>

#include "kernels/kernels.h"

enum { WIDTH = KERNEL_WIDTH, REGISTERS = MB_LANES / KERNEL_WIDTH, TURNS = 128 };

typedef float kernel_lanes __attribute__((vector_size(4 * KERNEL_WIDTH)));

/* Loads WIDTH floats from any address. */
#define LOAD(lanes, from) memcpy(&(lanes), (from), sizeof(lanes))

/* Joins the lanes in a fixed order: the distance halves at each step, down to `until` sums. */
static void fold(float *lanes, size_t until)
{
    for (size_t half = MB_LANES / 2; half >= until; half /= 2) {
        for (size_t i = 0; i < half; i++) {
            lanes[i] += lanes[i + half];
        }
    }
}

/* All lanes to one sum in the same order, with nothing left to count: this is where short filters spend their
 * time. */
static float fold_all(const float *lanes)
{
    float eight[8], four[4];

    for (size_t i = 0; i < 8; i++) {
        eight[i] = lanes[i] + lanes[i + 8];
    }
    for (size_t i = 0; i < 4; i++) {
        four[i] = eight[i] + eight[i + 4];
    }
    return (four[0] + four[2]) + (four[1] + four[3]);
}

_Static_assert(MB_LANES == 16, "fold_all is written for 16 lanes");

static float dot(const float *a, const float *b, size_t n)
{
    kernel_lanes sum[REGISTERS];
    float lanes[MB_LANES];

    for (size_t r = 0; r < REGISTERS; r++) {
        sum[r] = (kernel_lanes){0.0f};
    }
    for (size_t i = 0; i < n; i += MB_LANES) {
        for (size_t r = 0; r < REGISTERS; r++) {
            kernel_lanes x, y;
            LOAD(x, a + i + r * WIDTH);
            LOAD(y, b + i + r * WIDTH);
            sum[r] += x * y;
        }
    }
    memcpy(lanes, sum, sizeof lanes);
    return fold_all(lanes);
}

static mb_cf32 dot_cf32(const float *taps_re, const float *taps_im, const mb_cf32 *x, size_t n)
{
    const float *samples = (const float *)(const void *)x;
    kernel_lanes by_re[REGISTERS], by_im[REGISTERS];
    float re[MB_LANES], im[MB_LANES];

    memset(by_re, 0, sizeof by_re);
    memset(by_im, 0, sizeof by_im);
    for (size_t i = 0; i < 2 * n; i += MB_LANES) {
        for (size_t r = 0; r < REGISTERS; r++) {
            kernel_lanes tap_re, tap_im, sample;
            LOAD(sample, samples + i + r * WIDTH);
            LOAD(tap_re, taps_re + i + r * WIDTH);
            LOAD(tap_im, taps_im + i + r * WIDTH);
            by_re[r] += sample * tap_re;
            by_im[r] += sample * tap_im;
        }
    }
    memcpy(re, by_re, sizeof re);
    memcpy(im, by_im, sizeof im);
    fold(re, 2);
    fold(im, 2);
    return (mb_cf32){re[0] - im[1], re[1] + im[0]};
}

/* Fraction of a turn in 32 bits for each sample. */
static uint64_t fill_turns(uint64_t phase, uint64_t step, size_t n, int32_t *turns)
{
    for (size_t i = 0; i < n; i++) {
        turns[i] = (int32_t)(uint32_t)(phase >> 32);
        phase += step;
    }
    return phase;
}

/* Taylor series on an eighth of a turn either side of the nearest quarter; the truncation is below 3e-8. */
static void rotate_run(const int32_t *turns, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    for (size_t i = 0; i < n; i++) {
        uint32_t quarter = ((uint32_t)turns[i] + 0x20000000u) >> 30;
        int32_t rest = (int32_t)((uint32_t)turns[i] - (quarter << 30));
        float r = (float)rest * (float)(2.0 * MB_PI * 0x1.0p-32), square = r * r;
        float sine =
            r + r * square *
                    (-1.0f / 6.0f +
                     square * (1.0f / 120.0f + square * (-1.0f / 5040.0f + square * (1.0f / 362880.0f))));
        float cosine =
            1.0f + square * (-0.5f + square * (1.0f / 24.0f +
                                               square * (-1.0f / 720.0f + square * (1.0f / 40320.0f))));
        bool swap = (quarter & 1u) != 0;
        float cs = (swap ? sine : cosine) * (float)(1 - (int32_t)((quarter + 1u) & 2u));
        float sn = (swap ? cosine : sine) * (float)(1 - (int32_t)(quarter & 2u));
        float re = in[i].re, im = in[i].im;
        out[i].re = re * cs - im * sn;
        out[i].im = re * sn + im * cs;
    }
}

static void rotate(uint64_t phase, uint64_t step, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    int32_t turns[TURNS];

    for (size_t done = 0; done < n; done += TURNS) {
        size_t run = n - done < TURNS ? n - done : TURNS;
        phase = fill_turns(phase, step, run, turns);
        rotate_run(turns, in + done, run, out + done);
    }
}

/* An exponent of all ones is an infinity or no number. */
static bool all_finite(const float *x, size_t n)
{
    uint32_t most = 0;

    for (size_t i = 0; i < n; i++) {
        uint32_t bits;
        memcpy(&bits, x + i, sizeof bits);
        bits &= 0x7fffffffu;
        most = bits > most ? bits : most;
    }
    return most < 0x7f800000u;
}

#ifdef __AVX2__
#include <immintrin.h>

/* Adds the eight 32-bit sums of a segment to the lanes. */
static __m256 add_segment(__m256 lanes, __m256i sum)
{
    return _mm256_add_ps(lanes, _mm256_cvtepi32_ps(sum));
}

static void short_lanes(const mb_ci16 *taps_re, const mb_ci16 *taps_im, const mb_ci16 *x, size_t n, float *re,
                        float *im)
{
    __m256 lanes_re = _mm256_setzero_ps(), lanes_im = _mm256_setzero_ps();

    for (size_t begin = 0; begin < n; begin += MB_SHORT_SEGMENT) {
        size_t end = n - begin < MB_SHORT_SEGMENT ? n : begin + MB_SHORT_SEGMENT;
        __m256i sum_re = _mm256_setzero_si256(), sum_im = _mm256_setzero_si256();
        for (size_t i = begin; i < end; i += MB_SHORT_LANES) {
            __m256i sample = _mm256_loadu_si256((const __m256i *)(const void *)(x + i));
            __m256i tap_re = _mm256_loadu_si256((const __m256i *)(const void *)(taps_re + i));
            __m256i tap_im = _mm256_loadu_si256((const __m256i *)(const void *)(taps_im + i));
            sum_re = _mm256_add_epi32(sum_re, _mm256_madd_epi16(sample, tap_re));
            sum_im = _mm256_add_epi32(sum_im, _mm256_madd_epi16(sample, tap_im));
        }
        lanes_re = add_segment(lanes_re, sum_re);
        lanes_im = add_segment(lanes_im, sum_im);
    }
    _mm256_storeu_ps(re, lanes_re);
    _mm256_storeu_ps(im, lanes_im);
}
#else
static void short_lanes(const mb_ci16 *taps_re, const mb_ci16 *taps_im, const mb_ci16 *x, size_t n, float *re,
                        float *im)
{
    memset(re, 0, MB_SHORT_LANES * sizeof *re);
    memset(im, 0, MB_SHORT_LANES * sizeof *im);
    for (size_t begin = 0; begin < n; begin += MB_SHORT_SEGMENT) {
        size_t end = n - begin < MB_SHORT_SEGMENT ? n : begin + MB_SHORT_SEGMENT;
        int32_t sum_re[MB_SHORT_LANES] = {0}, sum_im[MB_SHORT_LANES] = {0};
        for (size_t i = begin; i < end; i += MB_SHORT_LANES) {
            for (size_t k = 0; k < MB_SHORT_LANES; k++) {
                mb_ci16 s = x[i + k];
                sum_re[k] += s.re * taps_re[i + k].re + s.im * taps_re[i + k].im;
                sum_im[k] += s.re * taps_im[i + k].re + s.im * taps_im[i + k].im;
            }
        }
        for (size_t k = 0; k < MB_SHORT_LANES; k++) {
            re[k] += (float)sum_re[k];
            im[k] += (float)sum_im[k];
        }
    }
}
#endif

static mb_cf32 dot_ci16(const mb_ci16 *taps_re, const mb_ci16 *taps_im, const mb_ci16 *x, size_t n)
{
    float re[MB_LANES] = {0.0f}, im[MB_LANES] = {0.0f};

    short_lanes(taps_re, taps_im, x, n, re, im);
    fold(re, 1);
    fold(im, 1);
    return (mb_cf32){re[0], im[0]};
}

const mb_kernels KERNEL_SET = {KERNEL_NAME, dot, dot_cf32, dot_ci16, rotate, all_finite};
