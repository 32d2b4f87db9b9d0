/* Figures of one or two tones, read from an averaged spectrum. */
#include "mirrorband/measure.h"

#include <math.h>
#include <string.h>

/* Both signs of frequency together: bin i holds i and -i steps. */
typedef struct half_spectrum {
    double *power;
    size_t count;
    double step_hz, lobe_hz;
} half_spectrum;

static mb_status fold(const mb_spectrum *spectrum, half_spectrum *out)
{
    mb_spectrum_info info = mb_spectrum_state(spectrum);
    size_t centre = info.length / 2;

    out->count = centre;
    out->step_hz = info.step_hz;
    out->lobe_hz = info.lobe_hz;
    out->power = mb_allocate(info.length, sizeof *out->power);
    if (out->power == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu bins", info.length);
    }
    mb_status status = mb_spectrum_power(spectrum, out->power);
    if (status != MB_OK) {
        mb_release(out->power);
        return status;
    }
    for (size_t i = 1; i < centre; i++) {
        out->power[centre + i] += out->power[centre - i];
    }
    memmove(out->power, out->power + centre, centre * sizeof *out->power);
    return MB_OK;
}

static size_t bin_of(const half_spectrum *folded, double hz)
{
    double bin = fmin(fmax(hz / folded->step_hz, 0.0), (double)folded->count - 1.0);

    return (size_t)lround(bin);
}

static size_t lobe_bins(const half_spectrum *folded)
{
    return (size_t)ceil(folded->lobe_hz / folded->step_hz);
}

static double sum_of(const half_spectrum *folded, size_t from, size_t to)
{
    double sum = 0.0;

    for (size_t i = from; i <= to && i < folded->count; i++) {
        sum += folded->power[i];
    }
    return sum;
}

/* Power of the line at a frequency: all of its main lobe. 0 beyond the spectrum. */
static double line_at(const half_spectrum *folded, double hz)
{
    size_t lobe = lobe_bins(folded), bin = bin_of(folded, fabs(hz));

    if (fabs(hz) > (double)folded->count * folded->step_hz) {
        return 0.0;
    }
    return sum_of(folded, bin > lobe ? bin - lobe : 0, bin + lobe);
}

static double highest_of(const half_spectrum *folded, const double *hz, size_t count)
{
    double highest = 0.0;

    for (size_t i = 0; i < count; i++) {
        highest = fmax(highest, line_at(folded, hz[i]));
    }
    return highest;
}

static bool near_any(double hz, double reach_hz, double low_hz, double high_hz)
{
    return hz <= reach_hz || fabs(hz - low_hz) <= reach_hz || fabs(hz - high_hz) <= reach_hz;
}

static double highest_other(const half_spectrum *folded, double low_hz, double high_hz, double *at_hz)
{
    double highest = 0.0, reach_hz = 2.0 * folded->lobe_hz + folded->step_hz;

    for (size_t i = 0; i < folded->count; i++) {
        double hz = (double)i * folded->step_hz;
        double power = near_any(hz, reach_hz, low_hz, high_hz) ? 0.0 : line_at(folded, hz);
        if (power > highest) {
            highest = power;
            *at_hz = hz;
        }
    }
    return highest;
}

static mb_status check_pair(const mb_spectrum *spectrum, double low_hz, double high_hz, double apart_lobes)
{
    mb_spectrum_info info = mb_spectrum_state(spectrum);
    double apart_hz = apart_lobes * info.lobe_hz;
    mb_status status = mb_check_range("low_hz", low_hz, 0.0, info.rate_hz / 2.0, "Hz");

    if (status == MB_OK) {
        status = mb_check_range("high_hz", high_hz, low_hz + apart_hz, info.rate_hz / 2.0, "Hz");
    }
    return status;
}

mb_status mb_two_tone(const mb_spectrum *spectrum, double low_hz, double high_hz, mb_two_tone_result *result)
{
    half_spectrum folded;
    mb_status status = check_pair(spectrum, low_hz, high_hz, 4.0);

    *result = (mb_two_tone_result){0};
    if (status == MB_OK) {
        status = fold(spectrum, &folded);
    }
    if (status != MB_OK) {
        return status;
    }
    const double f = low_hz, g = high_hz;
    const double second[] = {g - f, f + g, 2.0 * f, 2.0 * g};
    const double third[] = {2.0 * f - g, 2.0 * g - f, 2.0 * f + g, 2.0 * g + f, 3.0 * f, 3.0 * g};
    const double fifth[] = {3.0 * f - 2.0 * g, 3.0 * g - 2.0 * f};
    double low = line_at(&folded, f), high = line_at(&folded, g);
    double reference_db = mb_power_db((low + high) / 2.0);

    result->tone_dbfs[0] = mb_power_db(low);
    result->tone_dbfs[1] = mb_power_db(high);
    result->second_order_db = mb_power_db(highest_of(&folded, second, 4)) - reference_db;
    result->third_order_db = mb_power_db(highest_of(&folded, third, 6)) - reference_db;
    result->fifth_order_db = mb_power_db(highest_of(&folded, fifth, 2)) - reference_db;
    result->highest_db = mb_power_db(highest_other(&folded, f, g, &result->highest_hz)) - reference_db;
    mb_release(folded.power);
    if (low <= 0.0 || high <= 0.0) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "", "there is no tone at %g Hz", low <= 0.0 ? f : g);
    }
    return MB_OK;
}

/* What a band holds, split into tone, harmonics and the rest; bins counted alike. */
typedef struct band_parts {
    double tone, harmonics, rest;
    double tone_bins, harmonic_bins, rest_bins;
} band_parts;

static size_t peak_between(const half_spectrum *folded, size_t from, size_t to)
{
    size_t peak = from;

    for (size_t i = from; i <= to; i++) {
        peak = folded->power[i] > folded->power[peak] ? i : peak;
    }
    return peak;
}

static double centroid(const half_spectrum *folded, size_t peak)
{
    size_t lobe = lobe_bins(folded);
    double sum = 0.0, moment = 0.0;

    for (size_t i = peak > lobe ? peak - lobe : 0; i <= peak + lobe && i < folded->count; i++) {
        sum += folded->power[i];
        moment += folded->power[i] * (double)i;
    }
    return moment / sum * folded->step_hz;
}

/* 1: the bin belongs to the tone; 2 to 10: to that harmonic; 0: to neither. */
static int harmonic_of(double hz, double tone_hz, double lobe_hz)
{
    double order = floor(hz / tone_hz + 0.5);

    return order >= 1.0 && order <= 10.0 && fabs(hz - order * tone_hz) <= lobe_hz ? (int)order : 0;
}

static band_parts split_band(const half_spectrum *folded, size_t from, size_t to, double tone_hz)
{
    band_parts parts = {0};

    for (size_t i = from; i <= to; i++) {
        int order = harmonic_of((double)i * folded->step_hz, tone_hz, folded->lobe_hz + folded->step_hz);
        *(order == 0 ? &parts.rest : (order == 1 ? &parts.tone : &parts.harmonics)) += folded->power[i];
        *(order == 0 ? &parts.rest_bins : (order == 1 ? &parts.tone_bins : &parts.harmonic_bins)) += 1.0;
    }
    return parts;
}

mb_status mb_sinad(const mb_spectrum *spectrum, double low_hz, double high_hz, mb_sinad_result *result)
{
    half_spectrum folded;
    mb_status status = check_pair(spectrum, low_hz, high_hz, 8.0);

    *result = (mb_sinad_result){0};
    if (status == MB_OK) {
        status = fold(spectrum, &folded);
    }
    if (status != MB_OK) {
        return status;
    }
    size_t from = bin_of(&folded, low_hz), to = bin_of(&folded, high_hz),
           peak = peak_between(&folded, from, to);
    bool silent = folded.power[peak] <= 0.0;
    result->frequency_hz = silent ? 0.0 : centroid(&folded, peak);
    band_parts part = split_band(&folded, from, to, fmax(result->frequency_hz, folded.step_hz));
    mb_release(folded.power);
    if (silent) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "", "there is no tone between %g and %g Hz", low_hz, high_hz);
    }
    /* noise under the lines is taken to be that beside them */
    double level = part.rest_bins > 0.0 ? part.rest / part.rest_bins : 0.0;
    double tone = fmax(part.tone - level * part.tone_bins, 1e-40);
    double harmonics = fmax(part.harmonics - level * part.harmonic_bins, 0.0);
    double noise = level * (part.rest_bins + part.tone_bins + part.harmonic_bins);
    result->tone_dbfs = mb_power_db(tone);
    result->sinad_db = mb_power_db((tone + harmonics + noise) / fmax(harmonics + noise, 1e-15 * tone));
    result->snr_db = mb_power_db(tone / fmax(noise, 1e-15 * tone));
    result->thd_db = mb_power_db(harmonics / tone);
    return MB_OK;
}
