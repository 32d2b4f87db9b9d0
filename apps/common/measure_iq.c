/* The passes over IQ samples, and their figures. */
#include <math.h>
#include <string.h>

#include "iq.h"
#include "measuring.h"
#include "pump.h"

enum { BLOCK = 8192 };

typedef struct iq_pass {
    iq_measurement *job;
    mb_cf32 block[BLOCK];
} iq_pass;

static mb_status listen_block(void *user, size_t *taken)
{
    iq_pass *pass = user;
    mb_status status = mb_iq_read(pass->job->reader, pass->block, BLOCK, taken);

    return status == MB_OK ? mb_assess_iq_listen(pass->job->assess, pass->block, *taken) : status;
}

static mb_status measure_block(void *user, size_t *taken)
{
    iq_pass *pass = user;
    mb_status status = mb_iq_read(pass->job->reader, pass->block, BLOCK, taken);

    if (status == MB_OK) {
        mb_assess_iq_process(pass->job->assess, pass->block, *taken);
    }
    return status;
}

static mb_status pump(iq_measurement *job, const char *doing, app_step step)
{
    mb_iq_info info = mb_iq_reader_info(job->reader);
    iq_pass work = {.job = job};
    const app_pass pass = {
        .doing = doing, .rate_hz = info.rate_hz, .samples = info.samples, .step = step, .job = &work};

    return app_pump(job->program, job->common, &pass);
}

static mb_status read_truth(iq_measurement *job)
{
    static const char *const columns[] = {"time_s", "carrier_offset_hz"};
    mb_table_reader *table = NULL;
    double row[2];
    bool more = true;
    mb_status status = mb_table_reader_open(job->truth_path, columns, 2, &table);

    while (status == MB_OK && more) {
        status = mb_table_reader_row(table, row, &more);
        if (status == MB_OK && more) {
            mb_assess_iq_truth(job->assess, row[0], row[1]);
        }
    }
    mb_table_reader_close(table);
    return status;
}

mb_status iq_measure(iq_measurement *job)
{
    mb_status status = mb_assess_iq_create(&job->settings, &job->assess);

    if (status == MB_OK) {
        status = pump(job, "listening", listen_block);
    }
    if (status == MB_OK) {
        status = mb_assess_iq_resolve(job->assess);
        if (status == MB_ERROR_NO_SIGNAL) {
            (void)snprintf(job->why, sizeof job->why, "%s", mb_last_fault()->text);
            status = MB_OK;
        }
    }
    if (status == MB_OK) {
        status = mb_iq_rewind(job->reader);
    }
    if (status == MB_OK) {
        status = pump(job, "measuring", measure_block);
    }
    if (status == MB_OK && job->truth_path != NULL) {
        status = read_truth(job);
    }
    return status == MB_OK ? mb_assess_iq_finish(job->assess, &job->result) : status;
}

void iq_measurement_release(iq_measurement *job)
{
    mb_assess_iq_destroy(job->assess);
    mb_iq_reader_close(job->reader);
}

static void carrier_figures(const mb_assess_iq_result *r, double radio_hz, app_figures *f)
{
    const char *bound = r->emission.carrier_found ? "" : "at most; no line stands out of the noise";

    app_figures_add(f, (app_figure){.kind = APP_FIGURE_FLAG, .name = "signal_found", .flag = r->found});
    app_figures_number(f, "carrier_offset_hz", "missing carrier", "Hz", r->carrier_offset_hz, 3,
                       "from the centre, mean over active speech");
    app_figures_number(f, "carrier_frequency_hz", "radio frequency", "Hz", radio_hz + r->carrier_offset_hz, 2,
                       NULL);
    app_figures_number(f, "carrier_drift_hz_per_s", "its drift", "Hz/s", r->carrier_drift_hz_per_s, 4, NULL);
    if (r->has_truth) {
        app_figures_number(f, "carrier_offset_truth_hz", "by the truth", "Hz", r->truth_offset_hz, 3,
                           "over the same time");
        app_figures_number(f, "carrier_offset_error_hz", "error", "Hz", r->offset_error_hz, 4, "mean");
        app_figures_number(f, "carrier_offset_rms_error_hz", "error", "Hz", r->offset_rms_error_hz, 4,
                           "rms over active speech");
    }
    app_figures_number(f, "carrier_suppression_dbc", "carrier suppression", "dBc", r->carrier_dbc, 2,
                       r->emission.carrier_found ? "carrier over both sidebands in active speech" : bound);
    app_figures_number(f, "carrier_suppression_mean_dbc", "", "dBc", r->carrier_mean_dbc, 2,
                       "over the mean power of both sidebands");
    app_figures_number(f, "carrier_suppression_pep_db", "", "dB", r->carrier_pep_db, 2,
                       "over the peak envelope power");
    app_figures_add(f, (app_figure){.kind = r->found ? APP_FIGURE_FLAG : APP_FIGURE_TEXT_VALUE,
                                    .name = "carrier_suppression_is_bound",
                                    .flag = !r->emission.carrier_found});
}

static void sideband_figures(const mb_assess_iq_result *r, app_figures *f)
{
    const mb_emission_result *e = &r->emission;

    app_figures_number(f, "upper_sideband_dbfs", "upper sideband", "dBFS", r->found ? e->upper_dbfs : NAN, 2,
                       "less the noise");
    app_figures_number(f, "lower_sideband_dbfs", "lower sideband", "dBFS", r->found ? e->lower_dbfs : NAN, 2,
                       NULL);
    app_figures_number(f, "sideband_balance_db", "balance", "dB", r->found ? e->balance_db : NAN, 3,
                       "upper over lower");
    app_figures_number(f, "sidebands_active_dbfs", "both, active speech", "dBFS", r->sidebands_active_dbfs, 2,
                       NULL);
    app_figures_number(f, "activity_percent", "active speech", "%", 100.0 * r->activity, 1, "of the time");
    app_figures_number(f, "lock_quality", "lock quality", NULL, r->lock_quality, 4, NULL);
    app_figures_number(f, "snr_estimate_db", "SNR estimate", "dB", r->snr_db, 2,
                       "both sidebands over the noise in 2 x 2700 Hz");
}

static void power_figures(const mb_assess_iq_result *r, app_figures *f)
{
    const mb_emission_result *e = &r->emission;

    app_figures_number(f, "mean_power_dbfs", "mean power", "dBFS", e->mean_power_dbfs, 2,
                       "of the whole band");
    app_figures_number(f, "pep_dbfs", "peak envelope power", "dBFS", e->pep_dbfs, 2, NULL);
    app_figures_number(f, "peak_to_mean_db", "peak to mean", "dB", e->pep_dbfs - e->mean_power_dbfs, 2, NULL);
    app_figures_number(f, "noise_dbfs_per_hz", "noise density", "dBFS/Hz", e->noise_dbfs_per_hz, 1, NULL);
}

static void width_figures(const mb_assess_iq_result *r, app_figures *f)
{
    const mb_emission_result *e = &r->emission;
    bool found = r->found;

    app_figures_number(f, "occupied_bandwidth_99_hz", "99 % bandwidth", "Hz", e->occupied_99_hz, 0,
                       "0.5 % of all power beyond each edge");
    app_figures_number(f, "occupied_bandwidth_99_signal_hz", "99 % of the signal", "Hz",
                       found ? e->occupied_99_signal_hz : NAN, 0, "the same less the noise");
    app_figures_number(f, "bandwidth_26db_hz", "26 dB bandwidth", "Hz", found ? e->bandwidth_26db_hz : NAN, 0,
                       "power outside 26 dB below that inside");
    app_figures_number(f, "bandwidth_26db_level_hz", "", "Hz", found ? e->bandwidth_26db_level_hz : NAN, 0,
                       "outermost points 26 dB below the highest density");
    app_figures_number(f, "signal_half_width_hz", "the signal ends at", "Hz", found ? r->half_width_hz : NAN,
                       0, "to both sides");
    app_figures_number(f, "out_of_band_dbc", "beyond that", "dBc", found ? e->out_of_band_dbc : NAN, 2,
                       "all power, over both sidebands");
    app_figures_number(f, "out_of_band_highest_dbc", "highest there", "dBc",
                       found ? e->out_of_band_line_dbc : NAN, 2, NULL);
    app_figures_number(f, "out_of_band_highest_offset_hz", "", "Hz", found ? e->out_of_band_line_hz : NAN, 0,
                       "from the carrier");
    app_figures_number(f, "out_of_band_highest_width_hz", NULL, "Hz",
                       found ? e->out_of_band_line_width_hz : NAN, 0, NULL);
}

static void tone_figures(const mb_assess_iq_result *r, app_figures *f)
{
    const mb_two_tone_result *t = &r->two_tone;
    bool has = r->has_two_tone;

    app_figures_heading(f, "Two tones");
    app_figures_number(f, "tone_low_dbfs", "lower tone", "dBFS", has ? t->tone_dbfs[0] : NAN, 2, NULL);
    app_figures_number(f, "tone_high_dbfs", "upper tone", "dBFS", has ? t->tone_dbfs[1] : NAN, 2, NULL);
    app_figures_number(f, "second_order_db", "second order", "dB", has ? t->second_order_db : NAN, 2,
                       "over one tone");
    app_figures_number(f, "third_order_db", "third order", "dB", has ? t->third_order_db : NAN, 2, NULL);
    app_figures_number(f, "fifth_order_db", "fifth order", "dB", has ? t->fifth_order_db : NAN, 2, NULL);
    app_figures_number(f, "highest_product_db", "highest line", "dB", has ? t->highest_db : NAN, 2, NULL);
    app_figures_number(f, "highest_product_hz", "", "Hz", has ? t->highest_hz : NAN, 1, "where");
}

void iq_figures(const iq_measurement *job, app_figures *f)
{
    mb_iq_info info = mb_iq_reader_info(job->reader);
    const mb_assess_iq_result *r = &job->result;

    app_figures_heading(f, "IQ samples");
    app_figures_add(f, (app_figure){.kind = APP_FIGURE_TEXT_VALUE,
                                    .name = "iq",
                                    .label = app_is_pipe(job->path) ? NULL : "file",
                                    .text = job->path});
    app_figures_number(f, "rate_hz", "rate", "Hz", info.rate_hz, 0, NULL);
    app_figures_number(f, "duration_s", "length", "s", r->emission.duration_s, 2, NULL);
    carrier_figures(r, info.has_centre ? info.centre_hz : NAN, f);
    sideband_figures(r, f);
    power_figures(r, f);
    width_figures(r, f);
    if (job->settings.tone_high_hz > 0.0) {
        tone_figures(r, f);
    }
}
