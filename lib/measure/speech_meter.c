#include "mirrorband/measure.h"

#include <math.h>

/* ITU-T P.56 method B. The recommendation counts, for each threshold, the samples whose smoothed envelope
 * reached it now or within the hangover. That count over all thresholds is one histogram of the highest power
 * of two reached within the hangover, which costs one step a sample whatever the number of thresholds. */

enum { LOWEST_EXPONENT = -40, HIGHEST_EXPONENT = 23, THRESHOLDS = HIGHEST_EXPONENT - LOWEST_EXPONENT + 1 };

static const double smoothing_s = 0.03, hangover_s = 0.2, margin_db = 15.9;

struct mb_speech_meter {
    double decay;         /* of each of the two smoothers, per sample */
    double first, second; /* smoothed envelope after one and after both */
    double square_sum;
    double peak;
    int64_t hangover;            /* samples */
    int64_t position;            /* samples taken */
    int64_t reached[THRESHOLDS]; /* when the envelope last lay between this threshold and the next */
    uint64_t held[THRESHOLDS];   /* samples whose highest threshold within the hangover was this one */
    int top;                     /* highest threshold within the hangover; -1 for none */
    uint64_t non_finite;
};

mb_status mb_speech_meter_create(double rate_hz, mb_speech_meter **out)
{
    *out = NULL;
    mb_status status = mb_check_range("rate_hz", rate_hz, 1000.0, 1e8, "Hz");
    if (status != MB_OK) {
        return status;
    }
    mb_speech_meter *meter = mb_allocate(1, sizeof *meter);
    if (meter == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a speech meter");
    }
    meter->decay = exp(-1.0 / (rate_hz * smoothing_s));
    meter->hangover = (int64_t)ceil(rate_hz * hangover_s);
    mb_speech_meter_reset(meter);
    *out = meter;
    return MB_OK;
}

void mb_speech_meter_reset(mb_speech_meter *meter)
{
    meter->first = meter->second = meter->square_sum = meter->peak = 0.0;
    meter->position = 0;
    meter->top = -1;
    meter->non_finite = 0;
    for (int i = 0; i < THRESHOLDS; i++) {
        meter->reached[i] = INT64_MIN / 2;
        meter->held[i] = 0;
    }
}

void mb_speech_meter_destroy(mb_speech_meter *meter)
{
    mb_release(meter);
}

/* Index of the highest threshold a level reaches, -1 for none. */
static int threshold_of(double level)
{
    int exponent = 0;

    if (level < ldexp(1.0, LOWEST_EXPONENT)) {
        return -1;
    }
    (void)frexp(level, &exponent);
    exponent -= 1; /* frexp counts from one half */
    return (exponent > HIGHEST_EXPONENT ? HIGHEST_EXPONENT : exponent) - LOWEST_EXPONENT;
}

static void take(mb_speech_meter *meter, double magnitude)
{
    meter->square_sum += magnitude * magnitude;
    meter->peak = magnitude > meter->peak ? magnitude : meter->peak;
    meter->first = meter->decay * meter->first + (1.0 - meter->decay) * magnitude;
    meter->second = meter->decay * meter->second + (1.0 - meter->decay) * meter->first;

    int now = threshold_of(meter->second);
    if (now >= 0) {
        meter->reached[now] = meter->position;
    }
    if (now > meter->top) {
        meter->top = now;
    }
    while (meter->top >= 0 && meter->position - meter->reached[meter->top] > meter->hangover) {
        meter->top--;
    }
    if (meter->top >= 0) {
        meter->held[meter->top]++;
    }
    meter->position++;
}

void mb_speech_meter_process_f32(mb_speech_meter *meter, const float *in, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        bool good = isfinite(in[i]);
        meter->non_finite += !good;
        take(meter, good ? fabs((double)in[i]) : 0.0);
    }
}

void mb_speech_meter_process_cf32(mb_speech_meter *meter, const mb_cf32 *in, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        double re = in[i].re, im = in[i].im;
        bool good = isfinite(in[i].re) && isfinite(in[i].im);
        meter->non_finite += !good;
        take(meter, good ? sqrt(re * re + im * im) : 0.0);
    }
}

/* Level over the samples that a threshold calls active, minus that threshold, falls as the threshold rises;
 * the active level is read where it first meets the margin, on a straight line in dB between the two
 * thresholds around it. (Above that it may rise again: a threshold reached for a moment only has very few
 * samples.) */
static double active_level(const mb_speech_meter *meter)
{
    double active = 0.0, level_below = -400.0, excess_below = -400.0;

    for (int i = 0; i < THRESHOLDS; i++) {
        active += (double)meter->held[i];
    }
    for (int i = 0; i < THRESHOLDS && active > 0.0; i++) {
        double level = mb_power_db(meter->square_sum / active);
        double excess = level - 20.0 * log10(2.0) * (i + LOWEST_EXPONENT);
        if (excess <= margin_db) {
            double share = i > 0 ? (margin_db - excess) / (excess_below - excess) : 0.0;
            return level + share * (level_below - level);
        }
        level_below = level;
        excess_below = excess;
        active -= (double)meter->held[i];
    }
    return level_below;
}

mb_speech_meter_result mb_speech_meter_state(const mb_speech_meter *meter)
{
    mb_speech_meter_result result = {.active_level_db = -400.0, .rms_db = -400.0};

    result.samples = (uint64_t)meter->position;
    result.non_finite = meter->non_finite;
    result.peak = meter->peak;
    if (meter->position > 0 && meter->square_sum > 0.0) {
        result.rms_db = mb_power_db(meter->square_sum / (double)meter->position);
        result.active_level_db = active_level(meter);
        result.activity = fmin(1.0, mb_db_power(result.rms_db - result.active_level_db));
    }
    return result;
}
