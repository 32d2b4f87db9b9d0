#include "emission.h"

#include <math.h>

/* The band is looked at three times: as a whole; around the signal after decimation to about 48 kHz; and
 * around the missing carrier after decimation to about 500 Hz, in stretches of about 2 s. Kaiser windows of
 * 115 dB and stop bands of 115 dB keep what is strong in one place from being seen in another. */

static const double stop_db = 115.0, fine_rate_hz = 48000.0, fine_flat_hz = 20000.0, quiet_rate_hz = 500.0,
                    wide_step_hz = 320.0;

mb_emission_settings mb_emission_settings_default(void)
{
    return (mb_emission_settings){
        .rate_hz = 48000.0, .carrier_offset_hz = 0.0, .half_width_hz = 4000.0, .resolution_hz = 10.0};
}

static mb_status check(const mb_emission_settings *settings)
{
    double rate_hz = settings->rate_hz;
    mb_status status = mb_check_range("rate_hz", rate_hz, 12000.0, 64e6, "Hz");

    if (status == MB_OK) {
        status = mb_check_range("half_width_hz", settings->half_width_hz, 500.0,
                                fmin(20000.0, 0.45 * rate_hz), "Hz");
    }
    if (status == MB_OK) {
        double reach = rate_hz / 2.0 - settings->half_width_hz;
        status = mb_check_range("carrier_offset_hz", settings->carrier_offset_hz, -reach, reach, "Hz");
    }
    if (status == MB_OK) {
        status = mb_check_range("resolution_hz", settings->resolution_hz, 2.0, 100.0, "Hz");
    }
    return status;
}

/* One decimating stage; returns the rate after it. */
static mb_status add_stage(double *rate_hz, size_t factor, double pass_hz, mb_narrow **out)
{
    double after_hz = *rate_hz / (double)factor;
    mb_narrow_settings settings = {.rate_hz = *rate_hz,
                                   .factor = factor,
                                   .pass_hz = pass_hz,
                                   .stop_hz = after_hz - pass_hz,
                                   .attenuation_db = stop_db};

    *rate_hz = after_hz;
    return mb_narrow_create(&settings, out);
}

static mb_status add_fine_stages(mb_emission *emission, double *rate_hz)
{
    size_t whole = (size_t)(*rate_hz / fine_rate_hz);

    emission->fine_edge_hz = *rate_hz / 2.0;
    if (whole < 2) {
        return MB_OK;
    }
    emission->fine_edge_hz = fine_flat_hz;
    if (whole < 16) {
        return add_stage(rate_hz, whole, fine_flat_hz, &emission->to_fine[0]);
    }
    mb_status status = add_stage(rate_hz, whole / 8, fine_flat_hz, &emission->to_fine[0]);
    return status == MB_OK ? add_stage(rate_hz, 8, fine_flat_hz, &emission->to_fine[1]) : status;
}

static mb_status add_level(mb_emission *emission, double fine_hz)
{
    double pass_hz = emission->settings.half_width_hz, stop_hz = 1.25 * pass_hz, rate_hz = fine_hz;

    if (stop_hz < fine_hz / 2.0) {
        mb_narrow_settings settings = {
            .rate_hz = fine_hz, .factor = 1, .pass_hz = pass_hz, .stop_hz = stop_hz, .attenuation_db = 80.0};
        size_t factor = (size_t)(fine_hz / (4.0 * pass_hz));
        settings.factor = factor > 1 ? factor : 1;
        rate_hz = fine_hz / (double)settings.factor;
        mb_status status = mb_narrow_create(&settings, &emission->to_level);
        if (status != MB_OK) {
            return status;
        }
    }
    return mb_speech_meter_create(rate_hz, &emission->meter);
}

static size_t power_of_two_from(double least)
{
    size_t length = 16;

    while ((double)length < least) {
        length *= 2;
    }
    return length;
}

static mb_status add_spectrum(double rate_hz, double bins, mb_spectrum **out)
{
    mb_spectrum_settings settings = mb_spectrum_settings_default();

    settings.rate_hz = rate_hz;
    settings.length = power_of_two_from(bins);
    settings.sidelobe_db = stop_db;
    return mb_spectrum_create(&settings, out);
}

static mb_status build(mb_emission *emission)
{
    const double noise_bins = 2.3; /* of the window, a little more than it has */
    double rate_hz = emission->settings.rate_hz;
    mb_status status = add_fine_stages(emission, &rate_hz);
    double fine_hz = rate_hz;

    if (status == MB_OK && emission->to_fine[0] != NULL) {
        status = add_spectrum(emission->settings.rate_hz, emission->settings.rate_hz / wide_step_hz,
                              &emission->wide);
    }
    if (status == MB_OK) {
        status =
            add_spectrum(fine_hz, noise_bins * fine_hz / emission->settings.resolution_hz, &emission->fine);
    }
    if (status == MB_OK) {
        status = add_level(emission, fine_hz);
    }
    if (status == MB_OK) {
        status =
            add_stage(&rate_hz, (size_t)(fine_hz / quiet_rate_hz), MB_EMISSION_QUIET_HZ, &emission->to_quiet);
    }
    if (status == MB_OK) {
        status = add_spectrum(rate_hz, 1024.0, &emission->quiet);
    }
    return status;
}

mb_status mb_emission_create(const mb_emission_settings *settings, mb_emission **out)
{
    *out = NULL;
    mb_status status = check(settings);
    if (status != MB_OK) {
        return status;
    }
    mb_emission *emission = mb_allocate(1, sizeof *emission);
    if (emission == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the figures of an emission");
    }
    emission->settings = *settings;
    mb_oscillator_set(&emission->to_carrier, -settings->carrier_offset_hz, settings->rate_hz);
    emission->chunk = mb_allocate(MB_EMISSION_CHUNK, sizeof *emission->chunk);
    emission->moved = mb_allocate(MB_EMISSION_CHUNK + 1, sizeof *emission->moved);
    status = emission->chunk == NULL || emission->moved == NULL
                 ? mb_fail(MB_ERROR_MEMORY, "", "no memory for the figures of an emission")
                 : build(emission);
    if (status != MB_OK) {
        mb_emission_destroy(emission);
        return status;
    }
    *out = emission;
    return MB_OK;
}

void mb_emission_reset(mb_emission *emission)
{
    emission->to_carrier = (mb_oscillator){0};
    mb_oscillator_set(&emission->to_carrier, -emission->settings.carrier_offset_hz,
                      emission->settings.rate_hz);
    for (int i = 0; i < MB_EMISSION_STAGES; i++) {
        if (emission->to_fine[i] != NULL) {
            mb_narrow_reset(emission->to_fine[i]);
        }
    }
    if (emission->to_level != NULL) {
        mb_narrow_reset(emission->to_level);
    }
    mb_narrow_reset(emission->to_quiet);
    if (emission->wide != NULL) {
        mb_spectrum_reset(emission->wide);
    }
    mb_spectrum_reset(emission->fine);
    mb_spectrum_reset(emission->quiet);
    mb_speech_meter_reset(emission->meter);
    emission->square_sum = emission->peak_square = 0.0;
    emission->samples = emission->non_finite = 0;
}

void mb_emission_destroy(mb_emission *emission)
{
    if (emission == NULL) {
        return;
    }
    for (int i = 0; i < MB_EMISSION_STAGES; i++) {
        mb_narrow_destroy(emission->to_fine[i]);
    }
    mb_narrow_destroy(emission->to_level);
    mb_narrow_destroy(emission->to_quiet);
    mb_spectrum_destroy(emission->wide);
    mb_spectrum_destroy(emission->fine);
    mb_spectrum_destroy(emission->quiet);
    mb_speech_meter_destroy(emission->meter);
    mb_release(emission->chunk);
    mb_release(emission->moved);
    mb_release(emission);
}

static void take_powers(mb_emission *emission, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        double re = emission->chunk[i].re, im = emission->chunk[i].im, square = re * re + im * im;
        emission->square_sum += square;
        emission->peak_square = square > emission->peak_square ? square : emission->peak_square;
    }
    emission->samples += count;
}

static void take_chunk(mb_emission *emission, size_t count)
{
    mb_cf32 *chunk = emission->chunk;
    bool centred = emission->settings.carrier_offset_hz == 0.0;

    take_powers(emission, count);
    if (emission->wide != NULL) {
        mb_spectrum_process_cf32(emission->wide, chunk, count);
    }
    if (!centred) {
        mb_oscillator_rotate(&emission->to_carrier, chunk, count, chunk);
    }
    for (int i = 0; i < MB_EMISSION_STAGES && emission->to_fine[i] != NULL; i++) {
        count = mb_narrow_process(emission->to_fine[i], chunk, count, chunk);
    }
    mb_spectrum_process_cf32(emission->fine, chunk, count);
    if (emission->to_level != NULL) {
        size_t made = mb_narrow_process(emission->to_level, chunk, count, emission->moved);
        mb_speech_meter_process_cf32(emission->meter, emission->moved, made);
    } else {
        mb_speech_meter_process_cf32(emission->meter, chunk, count);
    }
    size_t quiet = mb_narrow_process(emission->to_quiet, chunk, count, emission->moved);
    mb_spectrum_process_cf32(emission->quiet, emission->moved, quiet);
}

void mb_emission_process(mb_emission *emission, const mb_cf32 *in, size_t count)
{
    while (count > 0) {
        size_t part = count < MB_EMISSION_CHUNK ? count : MB_EMISSION_CHUNK;
        for (size_t i = 0; i < part; i++) {
            emission->chunk[i] = in[i];
        }
        emission->non_finite += mb_scrub_cf32(emission->chunk, part);
        take_chunk(emission, part);
        in += part;
        count -= part;
    }
}

const mb_spectrum *mb_emission_fine(const mb_emission *emission)
{
    return emission->fine;
}

const mb_spectrum *mb_emission_wide(const mb_emission *emission)
{
    return emission->wide;
}
