#include "mirrorband/carrier.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "mirrorband/filter.h"

/* Quantile of a noise periodogram used as its floor, and that quantile of an exponential of mean 1. */
#define FLOOR_QUANTILE       0.25
#define FLOOR_QUANTILE_VALUE 0.28768207245178085

/* Least power in the band, mean square: fainter is not a signal but what a filter let through of one. */
#define LEAST_POWER 1e-12

/* Probability that one look at noise passes for a signal by its coherence. */
#define FALSE_ALARM 1e-7

struct mb_sighter {
    mb_sighting_settings settings;
    size_t length;     /* samples in a stretch */
    size_t fft_length; /* with zeros behind them */
    mb_fft *fft;
    double weights; /* sum of the weights of powers */
    float *weight;  /* Hann window: of powers; its root: of amplitudes */
    float *root_weight;
    mb_cf32 *square;   /* spectrum of the squared signal */
    mb_cf32 *spectrum; /* spectrum of the signal */
    float *sorted;     /* scratch of the floor estimate */
};

mb_sighting_settings mb_sighting_settings_default(void)
{
    return (mb_sighting_settings){
        .rate_hz = 16000.0,
        .length_s = 0.2,
        .span_hz = 1000.0,
        .low_cut_hz = 300.0,
        .high_cut_hz = 2700.0,
        .coherence_min = 0.35,
        .purity_min = 0.85,
        .centre_share_max = 0.25,
    };
}

static mb_status check_settings(const mb_sighting_settings *s)
{
    if (mb_check_range("rate_hz", s->rate_hz, 8000.0, 96000.0, "Hz") != MB_OK ||
        mb_check_range("length_s", s->length_s, 0.1, 2.0, "s") != MB_OK ||
        mb_check_range("span_hz", s->span_hz, 10.0, 0.2 * s->rate_hz, "Hz") != MB_OK ||
        mb_check_range("low_cut_hz", s->low_cut_hz, 50.0, 1000.0, "Hz") != MB_OK ||
        mb_check_range("high_cut_hz", s->high_cut_hz, 1000.0, 0.45 * s->rate_hz, "Hz") != MB_OK ||
        mb_check_range("coherence_min", s->coherence_min, 0.0, 1.0, "") != MB_OK ||
        mb_check_range("purity_min", s->purity_min, 0.0, 1.0, "") != MB_OK ||
        mb_check_range("centre_share_max", s->centre_share_max, 0.0, 1.0, "") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    return MB_OK;
}

mb_status mb_sighter_create(const mb_sighting_settings *settings, mb_sighter **out)
{
    *out = NULL;
    if (check_settings(settings) != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_sighter *sighter = mb_allocate(1, sizeof *sighter);
    if (sighter == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the search of the carrier");
    }
    sighter->settings = *settings;
    sighter->length = (size_t)lround(settings->length_s * settings->rate_hz);
    sighter->fft_length = 1024;
    while (2 * sighter->fft_length < 3 * sighter->length) {
        sighter->fft_length *= 2;
    }
    sighter->weight = mb_allocate(sighter->length, sizeof *sighter->weight);
    sighter->root_weight = mb_allocate(sighter->length, sizeof *sighter->root_weight);
    sighter->square = mb_allocate(sighter->fft_length, sizeof *sighter->square);
    sighter->spectrum = mb_allocate(sighter->fft_length, sizeof *sighter->spectrum);
    sighter->sorted = mb_allocate(sighter->fft_length, sizeof *sighter->sorted);
    if (sighter->weight == NULL || sighter->root_weight == NULL || sighter->square == NULL ||
        sighter->spectrum == NULL || sighter->sorted == NULL ||
        mb_fft_create(sighter->fft_length, false, &sighter->fft) != MB_OK) {
        mb_sighter_destroy(sighter);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the search of the carrier");
    }
    for (size_t i = 0; i < sighter->length; i++) {
        double root = sin(MB_PI * ((double)i + 0.5) / (double)sighter->length);
        sighter->root_weight[i] = (float)root;
        sighter->weight[i] = (float)(root * root);
        sighter->weights += root * root;
    }
    *out = sighter;
    return MB_OK;
}

void mb_sighter_destroy(mb_sighter *sighter)
{
    if (sighter != NULL) {
        mb_fft_destroy(sighter->fft);
        mb_release(sighter->weight);
        mb_release(sighter->root_weight);
        mb_release(sighter->square);
        mb_release(sighter->spectrum);
        mb_release(sighter->sorted);
        mb_release(sighter);
    }
}

size_t mb_sighter_length(const mb_sighter *sighter)
{
    return sighter->length;
}

static double bin_power(const mb_cf32 *spectrum, size_t length, long bin)
{
    long index = bin < 0 ? bin + (long)length : bin;
    double re = (double)spectrum[index].re, im = (double)spectrum[index].im;

    return re * re + im * im;
}

/* Both spectra of the weighted stretch; returns the weighted energy. */
static double transform(mb_sighter *s, const mb_cf32 *samples)
{
    double energy = 0.0;

    for (size_t i = 0; i < s->length; i++) {
        float re = samples[i].re, im = samples[i].im;
        float w = s->weight[i], r = s->root_weight[i];
        s->square[i] = (mb_cf32){w * (re * re - im * im), w * (2.0f * re * im)};
        s->spectrum[i] = (mb_cf32){r * re, r * im};
        energy += (double)(w * (re * re + im * im));
    }
    memset(s->square + s->length, 0, (s->fft_length - s->length) * sizeof *s->square);
    memset(s->spectrum + s->length, 0, (s->fft_length - s->length) * sizeof *s->spectrum);
    mb_fft_process(s->fft, s->square, s->square);
    mb_fft_process(s->fft, s->spectrum, s->spectrum);
    return energy;
}

/* Frequency of the highest line of the squared signal within +-2 span, between bins by a parabola. */
static double highest_line_hz(const mb_sighter *s)
{
    double bin_hz = s->settings.rate_hz / (double)s->fft_length;
    long reach = (long)floor(2.0 * s->settings.span_hz / bin_hz);
    long best = 0;
    double highest = -1.0;

    for (long bin = -reach; bin <= reach; bin++) {
        double power = bin_power(s->square, s->fft_length, bin);
        if (power > highest) {
            highest = power;
            best = bin;
        }
    }
    double left = sqrt(bin_power(s->square, s->fft_length, best - 1)), middle = sqrt(highest);
    double right = sqrt(bin_power(s->square, s->fft_length, best + 1));
    double curve = left - 2.0 * middle + right;
    double shift = curve < 0.0 ? 0.5 * (left - right) / curve : 0.0;
    return ((double)best + fmax(-0.5, fmin(0.5, shift))) * bin_hz;
}

/* Sum of the weighted square at exactly line_hz, phase taken about the middle of the stretch. */
static void line_sum(const mb_sighter *s, const mb_cf32 *samples, double line_hz, double *re, double *im)
{
    double step = -2.0 * MB_PI * line_hz / s->settings.rate_hz;
    double start = -step * 0.5 * ((double)s->length - 1.0);
    double cs = cos(start), sn = sin(start), step_cs = cos(step), step_sn = sin(step);

    *re = *im = 0.0;
    for (size_t i = 0; i < s->length; i++) {
        double a = (double)samples[i].re, b = (double)samples[i].im, w = (double)s->weight[i];
        double square_re = w * (a * a - b * b), square_im = w * 2.0 * a * b;
        *re += square_re * cs - square_im * sn;
        *im += square_re * sn + square_im * cs;
        double next = cs * step_cs - sn * step_sn;
        sn = cs * step_sn + sn * step_cs;
        cs = next;
    }
}

/* The value of the given rank (0 = lowest) by repeated partition; reorders the values. */
static float value_of_rank(float *values, size_t count, size_t rank)
{
    size_t low = 0, high = count - 1;

    while (low < high) {
        float pivot = values[low + (high - low) / 2];
        size_t i = low, j = high;
        while (i <= j) {
            while (values[i] < pivot) {
                i++;
            }
            while (values[j] > pivot) {
                j--;
            }
            if (i <= j) {
                float swap = values[i];
                values[i++] = values[j];
                values[j] = swap;
                if (j == 0) {
                    break;
                }
                j--;
            }
        }
        if (rank <= j) {
            high = j;
        } else if (rank >= i) {
            low = i;
        } else {
            break;
        }
    }
    return values[rank];
}

/* Powers of the stretch about a candidate carrier. */
typedef struct band_powers {
    double total;  /* of the whole baseband */
    double band;   /* within high_cut of the carrier */
    double centre; /* within 0.8 low_cut of the carrier */
    double floor;  /* what noise of the floor found beside the voice adds up to in the band */
} band_powers;

static band_powers measure_band(mb_sighter *s, double offset_hz)
{
    double bin_hz = s->settings.rate_hz / (double)s->fft_length;
    long half = (long)s->fft_length / 2;
    long carrier = lround(offset_hz / bin_hz);
    long reach = (long)(s->settings.high_cut_hz / bin_hz);
    long centre = (long)(0.8 * s->settings.low_cut_hz / bin_hz);
    band_powers powers = {0.0, 0.0, 0.0, 0.0};
    size_t count = 0, bins = 0;

    for (long bin = -half; bin < half; bin++) {
        double power = bin_power(s->spectrum, s->fft_length, bin);
        long distance = labs(bin - carrier);
        powers.total += power;
        if (distance <= reach) {
            powers.band += power;
            bins++;
            if (distance <= centre) {
                powers.centre += power;
            } else {
                s->sorted[count++] = (float)power;
            }
        }
    }
    if (count > 0) {
        float low = value_of_rank(s->sorted, count, (size_t)(FLOOR_QUANTILE * (double)count));
        powers.floor = (double)bins * (double)low / FLOOR_QUANTILE_VALUE;
    }
    return powers;
}

/*
 * Coherence that noise of these very powers exceeds in one look out of 10^7: given the powers, its square is
 * exponential with mean sum (w|x|^2)^2 / (sum w|x|^2)^2, more by the ratio of the rate to the noise
 * bandwidth, and there are as many chances as independent lines in the span.
 */
static double noise_coherence(const mb_sighter *s, const mb_cf32 *samples, double energy)
{
    const mb_sighting_settings *settings = &s->settings;
    double fourth = 0.0;

    for (size_t i = 0; i < s->length; i++) {
        double a = (double)samples[i].re, b = (double)samples[i].im;
        double power = (double)s->weight[i] * (a * a + b * b);
        fourth += power * power;
    }
    double bandwidth_hz = fmin(2.0 * (settings->high_cut_hz + settings->span_hz), settings->rate_hz);
    double lines = 4.0 * settings->span_hz * settings->length_s;
    double mean = fourth / (energy * energy) * settings->rate_hz / bandwidth_hz;
    return sqrt(mean * log(lines / FALSE_ALARM));
}

static mb_sighting examine(mb_sighter *s, const mb_cf32 *samples, double energy, double offset_hz)
{
    const mb_sighting_settings *settings = &s->settings;
    mb_sighting seen = {.offset_hz = offset_hz};
    double re, im;

    line_sum(s, samples, 2.0 * offset_hz, &re, &im);
    band_powers powers = measure_band(s, offset_hz);
    double line = hypot(re, im), band = fmax(powers.band, 1e-300);
    double band_energy = fmax(energy * powers.band / powers.total, 1e-300);
    seen.phase_rad = 0.5 * atan2(im, re);
    seen.occupied = fmax(1.0 - powers.floor / band, 0.0);
    seen.coherence = fmin(line / band_energy, 1.0);
    seen.purity = seen.coherence / fmax(seen.occupied, 0.05);
    seen.centre_share = powers.centre / band;
    seen.snr_db = mb_power_db(line / fmax(band_energy - line, 1e-6 * band_energy));
    bool there = band_energy >= LEAST_POWER * s->weights;
    bool above_noise = line / energy >= noise_coherence(s, samples, energy);
    seen.accepted = there && above_noise && seen.coherence >= settings->coherence_min &&
                    seen.purity >= settings->purity_min && seen.centre_share <= settings->centre_share_max;
    return seen;
}

mb_sighting mb_sighter_look(mb_sighter *sighter, const mb_cf32 *samples)
{
    double energy = transform(sighter, samples);

    if (!(energy > 1e-30)) {
        return (mb_sighting){.centre_share = 1.0};
    }
    return examine(sighter, samples, energy, 0.5 * highest_line_hz(sighter));
}

mb_sighting mb_sighter_look_at(mb_sighter *sighter, const mb_cf32 *samples, double offset_hz,
                               mb_sighting *elsewhere)
{
    double energy = transform(sighter, samples);

    *elsewhere = (mb_sighting){.centre_share = 1.0};
    if (!(energy > 1e-30)) {
        return (mb_sighting){.offset_hz = offset_hz, .centre_share = 1.0};
    }
    mb_sighting here = examine(sighter, samples, energy, offset_hz);
    if (!here.accepted) {
        *elsewhere = examine(sighter, samples, energy, 0.5 * highest_line_hz(sighter));
    }
    return here;
}
