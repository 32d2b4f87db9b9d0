/* mb-transmit - audio to a double-sideband suppressed-carrier emission. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "endpoint.h"
#include "iq.h"
#include "json.h"
#include "mirrorband/chain.h"
#include "mirrorband/files.h"
#include "mirrorband/measure.h"
#include "pump.h"
#include "summary.h"

enum { BLOCK = 1000 };

/* Peaks below this count as silence, full scale 1. */
static const double silent_peak = 3e-4;

static double rate_hz = 48e3, audio_rate_hz;
static const char *format, *audio_format;

static const app_option options[] = {
    APP_RATE_OPTION("rate", "sample rate of the output (48 kHz)", &rate_hz, 1e9),
    APP_WORD_OPTION("format", "samples of the output: cf32, ci16, ci8, cu8; by the ending if left out",
                    &format),
    APP_KEY_OPTION("offset", "HZ", "frequency of the suppressed carrier; the key transmit.offset",
                   "transmit.offset"),
    APP_RATE_OPTION("audio-rate", "sample rate of audio from a pipe", &audio_rate_hz, 1e6),
    APP_WORD_OPTION("audio-format", "samples of audio from a pipe: s16 or f32", &audio_format),
};

static const app_program program = {
    .name = "mb-transmit",
    .summary = "Makes a double-sideband suppressed-carrier signal of recorded speech.",
    .from = "audio: .wav .flac .rf64, or - for a pipe",
    .to = "IQ samples: .sigmf-meta .wav .rf64 .cf32 .ci16 .ci8 .cu8, or - for a pipe",
    .example = "mb-transmit --from report.wav --to air.ci16 --rate 240000",
    .common = APP_FROM | APP_TO | APP_JSON,
    .options = options,
    .option_count = sizeof options / sizeof options[0],
};

typedef struct transmission {
    const app_common *common;
    mb_audio_reader *reader;
    mb_transmit *chain;
    mb_iq_writer *writer;
    mb_speech_meter *meter; /* of the envelope of the output */
    mb_cf32 *out;
} transmission;

static int open_audio(transmission *job)
{
    mb_audio_open open = mb_audio_open_default();
    const mb_config *config = job->common->config;
    bool pipe = app_is_pipe(job->common->from);

    if (audio_format != NULL && mb_audio_format_parse(audio_format, &open.format) != MB_OK) {
        return app_usage_error(&program, "--audio-format: %s", mb_last_fault()->text);
    }
    if (pipe != (audio_format != NULL) || pipe != (audio_rate_hz > 0.0)) {
        return app_usage_error(
            &program, pipe ? "a pipe holds raw audio: give --audio-format, s16 or f32, and --audio-rate"
                           : "--audio-rate and --audio-format are for a pipe; a file tells its own");
    }
    open.rate_hz = audio_rate_hz;
    open.channel = pipe ? 0 : (size_t)mb_config_number(config, "audio.channel");
    mb_status status = mb_audio_reader_open(job->common->from, &open, &job->reader);
    if (status != MB_OK) {
        return app_refuse(&program, status);
    }
    mb_audio_info info = mb_audio_reader_info(job->reader);
    if (info.channels > 1 && !mb_config_is_set(config, "audio.channel")) {
        app_note(&program, job->common,
                 "%s has %zu channels; the first is taken, --set audio.channel=2 takes another",
                 job->common->from, info.channels);
    }
    return APP_CONTINUE;
}

static int create_chain(transmission *job)
{
    mb_transmit_settings settings;
    double from_hz = mb_audio_reader_info(job->reader).rate_hz;
    mb_status status = mb_transmit_settings_from_config(job->common->config, from_hz, rate_hz, &settings);

    if (status == MB_OK) {
        status = mb_transmit_create(&settings, &job->chain);
    }
    if (status == MB_OK) {
        status = mb_speech_meter_create(rate_hz, &job->meter);
    }
    if (status != MB_OK) {
        return app_refuse(&program, status);
    }
    job->out = mb_allocate(mb_transmit_output_bound(job->chain, BLOCK), sizeof *job->out);
    if (job->out == NULL) {
        return app_fail(&program, MB_ERROR_MEMORY);
    }
    return APP_CONTINUE;
}

static int create_output(transmission *job)
{
    const mb_config *config = job->common->config;
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    double offset_hz = mb_config_number(config, "transmit.offset");
    double half_hz = mb_config_number(config, "transmit.high_cut");
    mb_iq_annotation annotation = app_iq_annotation(offset_hz - half_hz, offset_hz + half_hz);

    settings.rate_hz = rate_hz;
    settings.description = "made by mb-transmit";
    settings.annotations = &annotation;
    settings.annotation_count = 1;
    return app_iq_create(&program, job->common->to, format, &settings, &job->writer);
}

static mb_status put(transmission *job, size_t count)
{
    mb_speech_meter_process_cf32(job->meter, job->out, count);
    return mb_iq_writer_write(job->writer, job->out, count);
}

static mb_status transmit_block(void *user, size_t *taken)
{
    transmission *job = user;
    float audio[BLOCK];
    mb_status status = mb_audio_read(job->reader, audio, BLOCK, taken);

    return status == MB_OK ? put(job, mb_transmit_process(job->chain, audio, *taken, job->out)) : status;
}

static mb_status transmit_all(transmission *job)
{
    mb_audio_info info = mb_audio_reader_info(job->reader);
    const app_pass pass = {.doing = "transmitting",
                           .rate_hz = info.rate_hz,
                           .samples = info.samples,
                           .step = transmit_block,
                           .job = job};
    mb_status status = app_pump(&program, job->common, &pass);
    size_t count = 1;

    while (status == MB_OK && count > 0) {
        count = mb_transmit_drain(job->chain, job->out);
        status = put(job, count);
    }
    return status;
}

static mb_status finish(transmission *job, mb_status status)
{
    if (status == MB_OK) {
        return mb_iq_writer_commit(job->writer);
    }
    if (status == MB_ERROR_INTERRUPTED) {
        mb_status kept = mb_iq_writer_keep_partial(job->writer);
        return kept == MB_OK ? status : kept;
    }
    return status;
}

static void remarks(const transmission *job)
{
    mb_audio_reader_state state = mb_audio_reader_state_of(job->reader);
    const char *name = app_is_pipe(job->common->from) ? "the input" : job->common->from;

    app_input_remarks(&program, job->common, job->common->from, state.samples, state.non_finite,
                      state.at_full_scale);
    if (state.peak <= 0.0) {
        app_note(&program, job->common, "%s is silent, all its samples are zero; is it the right recording?",
                 name);
    } else if (state.peak < silent_peak) {
        app_note(&program, job->common,
                 "%s is all but silent: its peak is %.0f dBFS; is it the right recording?", name,
                 mb_power_db(state.peak * state.peak));
    }
}

static double four_digits(double value)
{
    double unit = value > 0.0 ? pow(10.0, floor(log10(value)) - 3.0) : 1.0;

    return round(value / unit) * unit;
}

static void print_watts(FILE *stream, const char *what, double level_db, double full_scale_w)
{
    char text[64];

    mb_quantity_print(four_digits(full_scale_w * mb_db_power(level_db)), MB_UNIT_W, text, sizeof text);
    (void)fprintf(stream, "  %-15s %s\n", what, text);
}

static int report(const transmission *job)
{
    mb_speech_meter_result levels = mb_speech_meter_state(job->meter);
    mb_iq_writer_state written = mb_iq_writer_state_of(job->writer);
    mb_audio_reader_state heard = mb_audio_reader_state_of(job->reader);
    double full_scale_w = mb_config_number(job->common->config, "transmit.full_scale_power");
    double duration_s = (double)written.samples / rate_hz, pep_db = mb_power_db(levels.peak * levels.peak);
    FILE *stream = app_summary_stream(job->common, NULL);

    if (job->common->json) {
        json_t *result = app_json_begin(&program);
        app_json_set_text(result, "from", job->common->from);
        app_json_set_text(result, "to", job->common->to);
        app_json_set(result, "duration_s", duration_s, 6);
        app_json_set(result, "rate_hz", rate_hz, 3);
        app_json_set_whole(result, "samples", written.samples);
        app_json_set(result, "mean_power_dbfs", levels.rms_db, 3);
        app_json_set(result, "active_level_dbfs", levels.active_level_db, 3);
        app_json_set(result, "pep_dbfs", pep_db, 3);
        app_json_set(result, "mean_power_w", full_scale_w * mb_db_power(levels.rms_db), 6);
        app_json_set(result, "pep_w", full_scale_w * mb_db_power(pep_db), 6);
        app_json_set_whole(result, "clipped", written.clipped);
        app_json_set(result, "input_peak_dbfs", mb_power_db(heard.peak * heard.peak), 3);
        app_json_set_whole(result, "input_non_finite", heard.non_finite);
        app_json_set_whole(result, "input_at_full_scale", heard.at_full_scale);
        return app_json_print(&program, result, stdout);
    }
    if (stream != NULL) {
        (void)fprintf(stream, "%s: %.2f s at %.10g Hz\n",
                      app_is_pipe(job->common->to) ? program.name : job->common->to, duration_s, rate_hz);
        (void)fprintf(stream, "  %-15s %.1f dBFS, in active speech %.1f dBFS\n", "mean power", levels.rms_db,
                      levels.active_level_db);
        (void)fprintf(stream, "  %-15s %.1f dBFS (peak envelope power)\n", "peak", pep_db);
        (void)fprintf(stream, "  %-15s %llu\n", "clipped samples", (unsigned long long)written.clipped);
        if (full_scale_w > 0.0) {
            print_watts(stream, "mean power", levels.rms_db, full_scale_w);
            print_watts(stream, "peak power", pep_db, full_scale_w);
        }
    }
    return app_flush(&program);
}

static int run(transmission *job)
{
    int code = open_audio(job);

    if (code == APP_CONTINUE) {
        code = create_chain(job);
    }
    if (code == APP_CONTINUE) {
        code = create_output(job);
    }
    if (code != APP_CONTINUE) {
        return code;
    }
    mb_status status = finish(job, transmit_all(job));
    if (status != MB_OK) {
        return app_fail(&program, status);
    }
    remarks(job);
    return report(job);
}

int main(int argc, char **argv)
{
    app_common common;
    transmission job = {.common = &common};
    int code = app_parse(&program, argc, argv, &common);

    if (code == APP_CONTINUE) {
        code = run(&job);
    }
    mb_iq_writer_destroy(job.writer);
    mb_speech_meter_destroy(job.meter);
    mb_transmit_destroy(job.chain);
    mb_audio_reader_close(job.reader);
    mb_release(job.out);
    app_finish(&common);
    return code;
}
