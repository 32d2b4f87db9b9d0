/* From the spectra of an emission to its figures. Definitions and sources: docs/method-measure.md. */
#include "carrier_line.h"
#include "cells.h"
#include "emission.h"

#include <math.h>

static const double least_s = 0.25, line_width_hz = 100.0;
static const double smallest_share =
    1e-13; /* what single-precision transforms leave, of the power of the signal */

/* Power ratio in dB with a floor for what rounding leaves. */
static double ratio_db(double power, double reference)
{
    return mb_power_db(fmax(power, smallest_share * reference) / reference);
}

static void put_powers(const mb_emission *emission, mb_emission_result *result)
{
    mb_speech_meter_result level = mb_speech_meter_state(emission->meter);

    result->samples = emission->samples;
    result->non_finite = emission->non_finite;
    result->duration_s = (double)emission->samples / emission->settings.rate_hz;
    result->mean_power_dbfs = mb_power_db(emission->square_sum / (double)emission->samples);
    result->pep_dbfs = mb_power_db(emission->peak_square);
    result->active_level_dbfs = level.active_level_db;
    result->activity = level.activity;
}

/* Power of a sideband above the noise. What noise alone leaves by chance is no figure: a hundredth of all
 * stays. */
static double sideband(const mb_cells *cells, const mb_cells *signal, double low_hz, double high_hz)
{
    return fmax(mb_cells_between(signal, low_hz, high_hz), 0.01 * mb_cells_between(cells, low_hz, high_hz));
}

/* The sidebands leave out what the carrier line covers: the lobe of a bin and 3 Hz for its wander. */
static double put_sidebands(const mb_emission *emission, const mb_cells *cells, const mb_cells *signal,
                            mb_emission_result *result)
{
    double half_hz = emission->settings.half_width_hz,
           guard_hz = mb_spectrum_state(emission->fine).lobe_hz + 3.0;
    double upper = sideband(cells, signal, guard_hz, half_hz);
    double lower = sideband(cells, signal, -half_hz, -guard_hz);

    result->upper_dbfs = mb_power_db(upper);
    result->lower_dbfs = mb_power_db(lower);
    result->balance_db = result->upper_dbfs - result->lower_dbfs;
    return upper + lower;
}

static mb_status put_carrier(const mb_emission *emission, double sidebands, mb_emission_result *result)
{
    mb_carrier_line line = {0};
    mb_status status = mb_carrier_line_find(emission->quiet, MB_EMISSION_QUIET_HZ, &line);
    double least = smallest_share * sidebands;

    if (status != MB_OK) {
        return status;
    }
    result->carrier_found = line.found && line.power > least;
    result->carrier_offset_hz =
        emission->settings.carrier_offset_hz + (result->carrier_found ? line.offset_hz : 0.0);
    double carrier_db = mb_power_db(fmax(line.power, least));
    result->carrier_suppression_db = mb_power_db(sidebands) - carrier_db;
    result->carrier_suppression_active_db =
        result->carrier_suppression_db - mb_power_db(fmax(result->activity, 1e-6));
    result->carrier_suppression_pep_db = result->pep_dbfs - carrier_db;
    return MB_OK;
}

/* Outermost frequencies where the density in 100 Hz is no more than 26 dB below its highest. */
static double level_width(const mb_cells *cells, double edge_hz)
{
    const double step_hz = line_width_hz / 10.0;
    double middle_hz = 0.0, outer_hz[2] = {0.0, 0.0};
    double highest = mb_cells_highest(cells, -edge_hz, edge_hz, line_width_hz, &middle_hz);

    for (int side = 0; side < 2; side++) {
        double sign = side == 0 ? -1.0 : 1.0;
        double at_hz = edge_hz - line_width_hz / 2.0;
        while (at_hz > 0.0 &&
               mb_cells_between(cells, sign * at_hz - line_width_hz / 2.0,
                                sign * at_hz + line_width_hz / 2.0) < highest * mb_db_power(-26.0)) {
            at_hz -= step_hz;
        }
        outer_hz[side] = at_hz;
    }
    return outer_hz[0] + outer_hz[1];
}

static void put_bandwidths(const mb_emission *emission, const mb_cells *cells, mb_emission_result *result)
{
    /* outside over inside is 10^-2.6, so outside over everything is: */
    double outside = mb_db_power(-26.0) / (1.0 + mb_db_power(-26.0));

    result->occupied_low_hz = mb_cells_quantile(cells, 0.005);
    result->occupied_high_hz = mb_cells_quantile(cells, 0.995);
    result->occupied_99_hz = result->occupied_high_hz - result->occupied_low_hz;
    result->bandwidth_26db_hz =
        mb_cells_quantile(cells, 1.0 - outside / 2.0) - mb_cells_quantile(cells, outside / 2.0);
    result->bandwidth_26db_level_hz = level_width(cells, emission->fine_edge_hz);
}

typedef struct reach {
    double low_hz, high_hz, width_hz;
} reach;

/* The ranges beyond the signal: within the fine spectrum, and in the wide one as far as its own lobe does not
 * reach back to the signal. */
static size_t ranges_outside(const mb_emission *emission, reach out[4])
{
    double half_hz = emission->settings.half_width_hz, edge_hz = emission->fine_edge_hz;
    size_t count = 0;

    if (half_hz < edge_hz) {
        out[count++] = (reach){-edge_hz, -half_hz, line_width_hz};
        out[count++] = (reach){half_hz, edge_hz, line_width_hz};
    }
    if (emission->wide != NULL) {
        double lobe_hz = mb_spectrum_state(emission->wide).lobe_hz,
               from_hz = fmax(edge_hz, half_hz + lobe_hz);
        double width_hz = fmax(line_width_hz, 2.0 * lobe_hz);
        out[count++] = (reach){-INFINITY, -from_hz, width_hz};
        out[count++] = (reach){from_hz, INFINITY, width_hz};
    }
    return count;
}

static void put_outside(const mb_emission *emission, const mb_cells *cells, double sidebands,
                        mb_emission_result *result)
{
    reach ranges[4];
    size_t count = ranges_outside(emission, ranges);
    double total = 0.0, highest = 0.0;

    result->out_of_band_line_width_hz = line_width_hz;
    for (size_t i = 0; i < count; i++) {
        double middle_hz = 0.0;
        double power =
            mb_cells_highest(cells, ranges[i].low_hz, ranges[i].high_hz, ranges[i].width_hz, &middle_hz);
        total += mb_cells_between(cells, ranges[i].low_hz, ranges[i].high_hz);
        if (power > highest) {
            highest = power;
            result->out_of_band_line_hz = middle_hz;
            result->out_of_band_line_width_hz = ranges[i].width_hz;
        }
    }
    result->out_of_band_dbc = ratio_db(total, sidebands);
    result->out_of_band_line_dbc = ratio_db(highest, sidebands);
}

/* Finds the noise beside the signal and takes it off. */
static mb_status take_off_noise(const mb_emission *emission, const mb_cells *cells, mb_cells *signal,
                                mb_emission_result *result)
{
    double half_hz = emission->settings.half_width_hz, density = 0.0;
    double averages = fmax(1.0, 0.5 * (double)mb_spectrum_state(emission->fine).stretches);
    mb_status status = mb_cells_noise(cells, half_hz, emission->fine_edge_hz, averages, &density);

    result->noise_dbfs_per_hz = mb_power_db(density);
    return status == MB_OK ? mb_cells_above_noise(cells, half_hz, density, signal) : status;
}

static mb_status work_out(const mb_emission *emission, const mb_cells *cells, mb_emission_result *result)
{
    mb_cells signal = {0};
    mb_status status = take_off_noise(emission, cells, &signal, result);

    if (status != MB_OK) {
        return status;
    }
    put_powers(emission, result);
    double sidebands = put_sidebands(emission, cells, &signal, result);
    result->occupied_99_signal_hz = mb_cells_quantile(&signal, 0.995) - mb_cells_quantile(&signal, 0.005);
    mb_release(signal.cell);
    if (sidebands <= 0.0) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "", "there is nothing within %g Hz of the carrier frequency",
                       emission->settings.half_width_hz);
    }
    put_bandwidths(emission, cells, result);
    put_outside(emission, cells, sidebands, result);
    return put_carrier(emission, sidebands, result);
}

mb_status mb_emission_finish(const mb_emission *emission, mb_emission_result *result)
{
    mb_cells cells;
    double seconds = (double)emission->samples / emission->settings.rate_hz;

    *result = (mb_emission_result){0};
    if (seconds < least_s) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "",
                       "an emission needs at least %g s to be measured; there are %g s", least_s, seconds);
    }
    if (emission->square_sum <= 0.0) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "", "the samples are silent");
    }
    mb_status status = mb_cells_join(emission->fine, emission->fine_edge_hz, emission->wide,
                                     -emission->settings.carrier_offset_hz, &cells);
    if (status == MB_OK) {
        status = work_out(emission, &cells, result);
        mb_release(cells.cell);
    }
    return status;
}
