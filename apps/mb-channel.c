/* mb-channel - impairs a recording in a known, seeded way. */
#include <math.h>
#include <stdio.h>

#include "endpoint.h"
#include "iq.h"
#include "json.h"
#include "mirrorband/chain.h"
#include "mirrorband/files.h"
#include "mirrorband/measure.h"
#include "pump.h"
#include "summary.h"

enum { BLOCK = 8192, ROWS_PER_S = 100 };

static double rate_hz;
static uint64_t iq_channel;
static const char *format, *truth_path;

static const app_option options[] = {
    APP_RATE_OPTION("rate", "sample rate of a raw input, which does not tell it", &rate_hz, 1e9),
    APP_WORD_OPTION("format",
                    "samples of pipes and of the output: cf32, ci16, ci8, cu8; by the ending if left out",
                    &format),
    APP_IQ_CHANNEL_OPTION(&iq_channel),
    {.name = "truth",
     .argument = "FILE.csv",
     .meaning = "what was done, every 10 ms",
     .kind = APP_TEXT,
     .target = (void *)&truth_path},
};

static const app_program program = {
    .name = "mb-channel",
    .summary = "Impairs a radio signal in a known way: noise, offset, drift, fading and more.",
    .from = "IQ samples: .sigmf-meta .wav .rf64 .cf32 .ci16 .ci8 .cu8, or - for a pipe",
    .to = "IQ samples, the same",
    .example = "mb-channel --from air.ci16 --rate 240000 --to heard.sigmf-meta --set channel.noise=15dB "
               "--truth truth.csv --seed 7",
    .common = APP_FROM | APP_TO | APP_JSON | APP_SEED,
    .options = options,
    .option_count = sizeof options / sizeof options[0],
};

static const char *const truth_columns[] = {"time_s",   "carrier_phase_rad", "carrier_offset_hz",
                                            "gain_db",  "fading_db",         "path1_re",
                                            "path1_im", "path2_re",          "path2_im"};
enum { TRUTH_COLUMNS = sizeof truth_columns / sizeof truth_columns[0] };

typedef struct passage {
    const app_common *common;
    mb_iq_reader *reader;
    mb_speech_meter *meter;
    mb_channel *channel;
    mb_iq_writer *writer;
    mb_table_writer *truth;
    mb_status truth_status;
    double signal_db;        /* level that the SNR refers to; NaN: nothing refers to it */
    double begun_hz, end_hz; /* offset of the carrier at the ends */
    mb_cf32 *block;          /* BLOCK samples */
} passage;

/* Whether anything is set relative to the level of the signal. */
static bool level_matters(const mb_config *config)
{
    return !mb_config_is(config, "channel.noise", "off") || !mb_config_is(config, "channel.leak", "off") ||
           !mb_config_is(config, "channel.interferer", "off") ||
           mb_config_number(config, "channel.impulses") > 0.0;
}

static int open_input(passage *job)
{
    const mb_config *config = job->common->config;
    const app_iq_input input = {.path = job->common->from,
                                .rate_hz = rate_hz,
                                .format = format,
                                .channel = iq_channel,
                                .format_of_both = true,
                                .rewindable = level_matters(config) &&
                                              mb_config_is(config, "channel.signal_level", "auto")};
    int code = app_iq_open(&program, &input, &job->reader);

    if (code == APP_CONTINUE) {
        rate_hz = mb_iq_reader_info(job->reader).rate_hz;
    }
    return code;
}

static mb_status meter_block(void *user, size_t *taken)
{
    passage *job = user;
    mb_status status = mb_iq_read(job->reader, job->block, BLOCK, taken);

    mb_speech_meter_process_cf32(job->meter, job->block, *taken);
    return status;
}

static mb_status pump(passage *job, const char *doing, app_step step)
{
    const app_pass pass = {.doing = doing,
                           .rate_hz = rate_hz,
                           .samples = mb_iq_reader_info(job->reader).samples,
                           .step = step,
                           .job = job};

    return app_pump(&program, job->common, &pass);
}

/* The level in active speech, by a pass over the input where it is not given. */
static int find_level(passage *job)
{
    const mb_config *config = job->common->config;

    job->signal_db = mb_config_number(config, "channel.signal_level");
    if (!isnan(job->signal_db) || !level_matters(config)) {
        return APP_CONTINUE;
    }
    mb_status status = mb_speech_meter_create(rate_hz, &job->meter);
    if (status == MB_OK) {
        status = pump(job, "measuring", meter_block);
    }
    if (status == MB_OK) {
        status = mb_iq_rewind(job->reader);
    }
    if (status != MB_OK) {
        return app_refuse(&program, status);
    }
    job->signal_db = mb_speech_meter_state(job->meter).active_level_db;
    if (job->signal_db <= -120.0) {
        app_error(&program,
                  "%s is silent, so that noise and leak have nothing to refer to; give another input, or "
                  "channel.signal_level",
                  app_is_pipe(job->common->from) ? "the input" : job->common->from);
        return APP_FAILURE;
    }
    return APP_CONTINUE;
}

static void keep_truth(void *user, const mb_truth *truth)
{
    passage *job = user;
    const double row[TRUTH_COLUMNS] = {truth->time_s,     truth->carrier_phase_rad, truth->carrier_offset_hz,
                                       truth->gain_db,    truth->fading_db,         truth->path_re[0],
                                       truth->path_im[0], truth->path_re[1],        truth->path_im[1]};

    if (job->truth_status == MB_OK) {
        job->truth_status = mb_table_writer_row(job->truth, row);
    }
}

static int create_truth(passage *job)
{
    if (truth_path == NULL) {
        return APP_CONTINUE;
    }
    mb_status status =
        mb_table_writer_create(truth_path, truth_columns, TRUTH_COLUMNS, "truth of mb-channel", &job->truth);
    if (status != MB_OK) {
        return app_refuse(&program, status);
    }
    uint64_t every = (uint64_t)llround(rate_hz / ROWS_PER_S);
    mb_channel_set_truth_callback(job->channel, every > 0 ? every : 1, keep_truth, job);
    return APP_CONTINUE;
}

static int create_channel(passage *job)
{
    const mb_config *config = job->common->config;
    mb_channel_settings settings;
    double power = isnan(job->signal_db) ? 1.0 : mb_db_power(job->signal_db);
    mb_status status = mb_channel_settings_from_config(config, rate_hz, job->common->seed, power, &settings);

    if (status == MB_OK) {
        settings.carrier_hz = mb_config_number(config, "transmit.offset");
        status = mb_channel_create(&settings, &job->channel);
    }
    if (status != MB_OK) {
        return app_refuse(&program, status);
    }
    double duration_s = (double)mb_iq_reader_info(job->reader).samples / rate_hz;
    job->begun_hz = mb_channel_truth(job->channel).carrier_offset_hz;
    job->end_hz = job->begun_hz + settings.drift_hz_per_s * duration_s;
    return create_truth(job);
}

static int create_output(passage *job)
{
    mb_iq_info info = mb_iq_reader_info(job->reader);
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    double half_hz = mb_config_number(job->common->config, "transmit.high_cut");
    double centre_hz = info.has_centre ? info.centre_hz : 0.0;
    mb_iq_annotation annotation = app_iq_annotation(centre_hz + fmin(job->begun_hz, job->end_hz) - half_hz,
                                                    centre_hz + fmax(job->begun_hz, job->end_hz) + half_hz);

    settings.rate_hz = rate_hz;
    settings.has_centre = info.has_centre;
    settings.centre_hz = info.centre_hz;
    settings.description = "impaired by mb-channel";
    settings.annotations = &annotation;
    settings.annotation_count = 1;
    return app_iq_create(&program, job->common->to, format, &settings, &job->writer);
}

static mb_status impair_block(void *user, size_t *taken)
{
    passage *job = user;
    mb_status status = mb_iq_read(job->reader, job->block, BLOCK, taken);

    if (status != MB_OK || *taken == 0) {
        return status;
    }
    mb_channel_process(job->channel, job->block, *taken, job->block);
    status = mb_iq_writer_write(job->writer, job->block, *taken);
    return status == MB_OK ? job->truth_status : status;
}

static mb_status finish(passage *job, mb_status status)
{
    if (status == MB_OK) {
        status = mb_iq_writer_commit(job->writer);
        return status == MB_OK && job->truth != NULL ? mb_table_writer_commit(job->truth) : status;
    }
    if (status == MB_ERROR_INTERRUPTED) {
        mb_status kept = mb_iq_writer_keep_partial(job->writer);
        if (kept == MB_OK && job->truth != NULL) {
            kept = mb_table_writer_keep_partial(job->truth);
        }
        return kept == MB_OK ? status : kept;
    }
    return status;
}

static void remarks(const passage *job)
{
    uint64_t clipped = mb_iq_writer_state_of(job->writer).clipped;

    app_iq_remarks(&program, job->common, job->common->from, job->reader);
    if (clipped > 0) {
        app_note(&program, job->common,
                 "%llu samples of the output were clipped; lower channel.gain, or write cf32",
                 (unsigned long long)clipped);
    }
}

static int report_json(const passage *job)
{
    mb_channel_counts counts = mb_channel_state(job->channel);
    mb_iq_writer_state written = mb_iq_writer_state_of(job->writer);
    mb_truth last = mb_channel_truth(job->channel);
    json_t *result = app_json_begin(&program);

    app_json_set_text(result, "from", job->common->from);
    app_json_set_text(result, "to", job->common->to);
    app_json_set_text(result, "truth", truth_path);
    app_json_set_whole(result, "seed", job->common->seed);
    app_json_set(result, "rate_hz", rate_hz, 3);
    app_json_set(result, "duration_s", (double)counts.samples / rate_hz, 6);
    app_json_set(result, "signal_level_dbfs", job->signal_db, 3);
    app_json_set(result, "noise_snr_db", mb_config_number(job->common->config, "channel.noise"), 3);
    app_json_set(result, "first_offset_hz", job->begun_hz, 6);
    app_json_set(result, "last_offset_hz", last.carrier_offset_hz, 6);
    app_json_set(result, "first_phase_rad", counts.phase_rad, 6);
    app_json_set_whole(result, "impulses", counts.impulses);
    app_json_set_whole(result, "clipped", counts.clipped + written.clipped);
    app_json_set_whole(result, "input_non_finite", mb_iq_reader_state_of(job->reader).non_finite);
    return app_json_print(&program, result, stdout);
}

static int report(const passage *job)
{
    mb_channel_counts counts = mb_channel_state(job->channel);
    uint64_t clipped = counts.clipped + mb_iq_writer_state_of(job->writer).clipped;
    FILE *stream = app_summary_stream(job->common, truth_path);

    if (job->common->json) {
        return report_json(job);
    }
    if (stream != NULL) {
        (void)fprintf(stream, "%s: %.2f s at %.10g Hz, seed %llu\n",
                      app_is_pipe(job->common->to) ? program.name : job->common->to,
                      (double)counts.samples / rate_hz, rate_hz, (unsigned long long)job->common->seed);
        if (!isnan(job->signal_db)) {
            (void)fprintf(stream, "  %-15s %.1f dBFS in active speech\n", "signal", job->signal_db);
        }
        (void)fprintf(stream, "  %-15s %.3f Hz at the first sample, %.3f Hz at the last\n", "carrier offset",
                      job->begun_hz, mb_channel_truth(job->channel).carrier_offset_hz);
        (void)fprintf(stream, "  %-15s %llu\n", "clipped samples", (unsigned long long)clipped);
    }
    return app_flush(&program);
}

static int run(passage *job)
{
    const app_file files[] = {
        {"--from", job->common->from, false}, {"--to", job->common->to, true}, {"--truth", truth_path, true}};
    int code = app_files_check(&program, files, 3);

    if (code == APP_CONTINUE) {
        code = app_json_check(&program, job->common, "--truth", truth_path);
    }
    int (*const steps[])(passage *) = {open_input, find_level, create_channel, create_output};
    for (size_t i = 0; i < sizeof steps / sizeof steps[0] && code == APP_CONTINUE; i++) {
        code = steps[i](job);
    }
    if (code != APP_CONTINUE) {
        return code;
    }
    mb_status status = finish(job, pump(job, "impairing", impair_block));
    if (status != MB_OK) {
        return app_fail(&program, status);
    }
    remarks(job);
    return report(job);
}

static void release(passage *job)
{
    mb_iq_writer_destroy(job->writer);
    mb_table_writer_destroy(job->truth);
    mb_channel_destroy(job->channel);
    mb_speech_meter_destroy(job->meter);
    mb_iq_reader_close(job->reader);
}

int main(int argc, char **argv)
{
    static mb_cf32 block[BLOCK];
    app_common common;
    passage job = {.common = &common, .block = block};
    int code = app_parse(&program, argc, argv, &common);

    if (code == APP_CONTINUE) {
        code = run(&job);
    }
    release(&job);
    app_finish(&common);
    return code;
}
