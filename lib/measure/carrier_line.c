#include "carrier_line.h"

#include "noise_floor.h"

#include <math.h>

/* A line of power P puts P into the bins of one main lobe; noise puts the same mean into every bin. The floor
 * is the median of the bins beside the lobe (voice begins far beyond, and a hum line there does not move a
 * median); a line is believed when the lobe holds more than the floor explains by four of its standard
 * deviations. */

static const double search_hz = 2.0, believed_deviations = 4.0, bound_deviations = 2.0;

typedef struct neighbourhood {
    const double *power;
    size_t centre; /* bin of 0 Hz */
    double step_hz;
    size_t lobe;       /* half width in bins, rounded up */
    double noise_bins; /* equivalent noise bandwidth */
    double averages;   /* independent stretches behind each bin, about */
} neighbourhood;

/* The floor from the bins on both sides. */
static mb_status floor_of(const neighbourhood *zone, double from_hz, double to_hz, double *level)
{
    size_t from = (size_t)ceil(from_hz / zone->step_hz), to = (size_t)floor(to_hz / zone->step_hz), count = 0;

    *level = 0.0;
    if (to <= from || to >= zone->centre) {
        return MB_OK; /* too short a recording to see beside the line: no floor is taken off */
    }
    double *side = mb_allocate(2 * (to - from), sizeof *side);
    if (side == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the noise floor");
    }
    for (size_t i = from; i < to; i++) {
        side[count++] = zone->power[zone->centre + i];
        side[count++] = zone->power[zone->centre - i];
    }
    *level = mb_noise_floor(side, count, zone->averages);
    mb_release(side);
    return MB_OK;
}

static size_t peak_of(const neighbourhood *zone)
{
    size_t reach = (size_t)ceil(search_hz / zone->step_hz), peak = zone->centre;

    for (size_t i = zone->centre - reach; i <= zone->centre + reach; i++) {
        peak = zone->power[i] > zone->power[peak] ? i : peak;
    }
    return peak;
}

static mb_carrier_line judge(const neighbourhood *zone, size_t peak, double level)
{
    double sum = 0.0, moment = 0.0, count = 2.0 * (double)zone->lobe + 1.0;
    mb_carrier_line line = {0};

    for (size_t i = peak - zone->lobe; i <= peak + zone->lobe; i++) {
        sum += zone->power[i];
        moment += (zone->power[i] - level) * ((double)i - (double)zone->centre);
    }
    double excess = sum - count * level;
    double deviation = count * level / sqrt(zone->averages * fmax(1.0, count / zone->noise_bins));
    line.found = level > 0.0 && excess > believed_deviations * deviation;
    line.power = line.found ? excess : fmax(excess, 0.0) + bound_deviations * deviation;
    line.offset_hz = line.found ? moment / excess * zone->step_hz : 0.0;
    return line;
}

mb_status mb_carrier_line_find(const mb_spectrum *spectrum, double flat_hz, mb_carrier_line *line)
{
    mb_spectrum_info info = mb_spectrum_state(spectrum);
    double *power = mb_allocate(info.length, sizeof *power), level = 0.0;

    if (power == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu bins", info.length);
    }
    neighbourhood zone = {.power = power,
                          .centre = info.length / 2,
                          .step_hz = info.step_hz,
                          .lobe = (size_t)ceil(info.lobe_hz / info.step_hz),
                          .noise_bins = info.noise_width_hz / info.step_hz,
                          .averages = fmax(1.0, 0.5 * (double)info.stretches)};
    mb_status status = mb_spectrum_power(spectrum, power);
    if (status == MB_OK) {
        status = floor_of(&zone, search_hz + 2.0 * info.lobe_hz, flat_hz, &level);
    }
    if (status == MB_OK) {
        *line = judge(&zone, peak_of(&zone), level);
    }
    mb_release(power);
    return status;
}
