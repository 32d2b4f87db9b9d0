/* mb-measure - figures and a picture of an emission, and of received speech against what was sent. */
#include <math.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "endpoint.h"
#include "figures.h"
#include "iq.h"
#include "json.h"
#include "measuring.h"
#include "mirrorband/chain.h"
#include "mirrorband/files.h"

static double rate_hz, audio_rate_hz, skip_s;
static const char *message_path, *truth_path, *iq_path, *format, *audio_format, *picture_path;
static bool two_tone;

static const app_option options[] = {
    {.name = "message",
     .argument = "FILE",
     .meaning = "the audio that was sent; the received audio is held against it",
     .kind = APP_TEXT,
     .target = (void *)&message_path},
    {.name = "iq",
     .argument = "ENDPOINT",
     .meaning = "IQ samples that the audio was received from",
     .kind = APP_TEXT,
     .target = (void *)&iq_path},
    {.name = "truth",
     .argument = "FILE.csv",
     .meaning = "what mb-channel did: carrier found against it, and the loss against ideal detection",
     .kind = APP_TEXT,
     .target = (void *)&truth_path},
    {.name = "picture",
     .argument = "FILE.svg",
     .meaning = "draw both sidebands, the phase line and the carrier offset over time",
     .kind = APP_TEXT,
     .target = (void *)&picture_path},
    {.name = "skip",
     .argument = "TIME",
     .meaning = "not scored at the start (0 s)",
     .kind = APP_QUANTITY,
     .unit = MB_UNIT_S,
     .target = &skip_s,
     .low = 0.0,
     .high = 3600.0},
    {.name = "two-tone",
     .meaning = "intermodulation of tones of 700 and 1900 Hz in IQ samples",
     .kind = APP_FLAG,
     .target = &two_tone},
    APP_RATE_OPTION("rate", "sample rate of raw IQ samples, which do not tell it", &rate_hz, 1e9),
    APP_WORD_OPTION("format", "IQ samples from a pipe: cf32, ci16, ci8, cu8", &format),
    APP_KEY_OPTION("offset", "HZ", "where to look for the carrier; the key receive.offset", "receive.offset"),
    APP_KEY_OPTION("span", "HZ", "how far from there, to both sides; the key receive.span", "receive.span"),
    APP_RATE_OPTION("audio-rate", "sample rate of audio from a pipe", &audio_rate_hz, 1e6),
    APP_WORD_OPTION("audio-format", "samples of audio from a pipe: s16 or f32", &audio_format),
};

static const app_program program = {
    .name = "mb-measure",
    .summary = "Measures a double-sideband emission, or received speech against what was sent.",
    .from = "audio: .wav .flac .rf64; or IQ samples: .sigmf-meta .wav .rf64 .cf32 .ci16 .ci8 .cu8; or -",
    .example = "mb-measure --from heard.wav --message report.wav --truth truth.csv --iq heard.sigmf-meta "
               "--picture heard.svg",
    .common = APP_FROM | APP_JSON | APP_REPORT,
    .options = options,
    .option_count = sizeof options / sizeof options[0],
};

typedef struct measurement {
    const app_common *common;
    bool has_audio, has_iq;
    iq_measurement iq;
    audio_measurement audio;
    app_figures figures;
} measurement;

static bool ends_with(const char *text, const char *ending)
{
    size_t length = strlen(text), tail = strlen(ending);

    return length >= tail && strcmp(text + length - tail, ending) == 0;
}

/* A .wav or .rf64 of one channel is audio, of two IQ samples; the rest tells by itself. */
static int tell_kind(measurement *job)
{
    const char *from = job->common->from;
    bool sound = ends_with(from, ".wav") || ends_with(from, ".rf64");
    mb_audio_open open = mb_audio_open_default();
    mb_audio_reader *reader = NULL;

    job->has_audio = message_path != NULL || iq_path != NULL || ends_with(from, ".flac") ||
                     (app_is_pipe(from) && audio_format != NULL);
    if (!job->has_audio && sound) {
        open.channel = 1;
        mb_status status = mb_audio_reader_open(from, &open, &reader);
        if (status != MB_OK) {
            return app_refuse(&program, status);
        }
        job->has_audio = mb_audio_reader_info(reader).channels == 1;
        mb_audio_reader_close(reader);
    }
    job->has_iq = !job->has_audio || iq_path != NULL;
    return APP_CONTINUE;
}

static bool holds_iq(const char *path)
{
    const char *dot = strrchr(path, '.');
    const char *const endings[] = {".sigmf-meta", ".cf32", ".ci16", ".ci8", ".cu8"};

    for (size_t i = 0; dot != NULL && i < sizeof endings / sizeof endings[0]; i++) {
        if (strcmp(dot, endings[i]) == 0) {
            return true;
        }
    }
    return false;
}

/* --message and --iq say that --from is audio. */
static int check_audio(const measurement *job)
{
    if (job->has_audio && holds_iq(job->common->from)) {
        return app_usage_error(&program,
                               "%s takes the received audio by --from, but %s holds IQ samples; receive them "
                               "first, by mb-receive",
                               message_path != NULL ? "--message" : "--iq", job->common->from);
    }
    return APP_CONTINUE;
}

/* An option that has nothing to work on. */
static int check_needs(const measurement *job)
{
    const struct {
        const char *option;
        bool given, served;
        const char *needs;
    } needs[] = {
        {"--skip", skip_s > 0.0, message_path != NULL, "--message, the audio that was sent"},
        {"--truth", truth_path != NULL, job->has_iq, "--iq, the samples that mb-channel wrote with it"},
        {"--picture", picture_path != NULL, job->has_iq, "IQ samples: give --iq"},
        {"--two-tone", two_tone, job->has_iq, "IQ samples: give them by --from"},
        {"--rate", rate_hz > 0.0, job->has_iq, "IQ samples; a pipe of audio takes --audio-rate"},
        {"--format", format != NULL, job->has_iq, "IQ samples; a pipe of audio takes --audio-format"},
    };

    for (size_t i = 0; i < sizeof needs / sizeof needs[0]; i++) {
        if (needs[i].given && !needs[i].served) {
            return app_usage_error(&program, "%s needs %s", needs[i].option, needs[i].needs);
        }
    }
    return APP_CONTINUE;
}

static int check_files(const measurement *job)
{
    const app_file files[] = {{"--from", job->common->from, false}, {"--iq", iq_path, false},
                              {"--message", message_path, false},   {"--truth", truth_path, false},
                              {"--picture", picture_path, true},    {"--report", job->common->report, true}};
    int code = app_endpoint_check(&program, "--iq", iq_path);

    if (code == APP_CONTINUE) {
        code = app_files_check(&program, files, sizeof files / sizeof files[0]);
    }
    if (code == APP_CONTINUE && app_is_pipe(picture_path)) {
        code = app_usage_error(&program, "--picture - would mix with the figures; give a file name");
    }
    if (code == APP_CONTINUE && app_is_pipe(job->common->report)) {
        code = app_usage_error(&program, "--report - would mix with the figures; give a file name");
    }
    return code;
}

static int open_audio(measurement *job, const char *path, mb_audio_reader **out)
{
    mb_audio_open open = mb_audio_open_default();
    bool pipe = app_is_pipe(path);

    if (audio_format != NULL && mb_audio_format_parse(audio_format, &open.format) != MB_OK) {
        return app_usage_error(&program, "--audio-format: %s", mb_last_fault()->text);
    }
    if (pipe && (audio_format == NULL || audio_rate_hz <= 0.0)) {
        return app_usage_error(&program,
                               "a pipe holds raw audio: give --audio-format, s16 or f32, and --audio-rate");
    }
    if (!pipe) {
        open.format = MB_AUDIO_BY_ENDING;
    }
    open.rate_hz = pipe ? audio_rate_hz : 0.0;
    open.channel = pipe ? 0 : (size_t)mb_config_number(job->common->config, "audio.channel");
    open.rewindable = true;
    mb_status status = mb_audio_reader_open(path, &open, out);
    if (status != MB_OK) {
        return app_refuse(&program, status);
    }
    double taken_hz = mb_audio_reader_info(*out).rate_hz;
    if (taken_hz < 6000.0 || taken_hz > 192000.0) {
        app_error(&program, "%s has a rate of %g Hz; speech is measured from 6 kHz to 192 kHz, resample it",
                  pipe ? "the pipe" : path, taken_hz);
        return APP_FAILURE;
    }
    return APP_CONTINUE;
}

static int open_iq(measurement *job)
{
    const char *path = job->has_audio ? iq_path : job->common->from;
    const app_iq_input input = {.path = path, .rate_hz = rate_hz, .format = format, .rewindable = true};
    int code = app_iq_open(&program, &input, &job->iq.reader);

    if (code != APP_CONTINUE) {
        return code;
    }
    job->iq.path = path;
    job->iq.truth_path = truth_path;
    job->iq.program = &program;
    job->iq.common = job->common;
    mb_assess_iq_settings *settings = &job->iq.settings;
    *settings = mb_assess_iq_settings_default();
    settings->picture = picture_path != NULL || job->common->report != NULL;
    settings->tone_low_hz = two_tone ? 700.0 : 0.0;
    settings->tone_high_hz = two_tone ? 1900.0 : 0.0;
    mb_status status = mb_receive_settings_from_config(
        job->common->config, mb_iq_reader_info(job->iq.reader).rate_hz, &settings->receive);
    return status == MB_OK ? APP_CONTINUE : app_refuse(&program, status);
}

static int open_all(measurement *job)
{
    int code = job->has_iq ? open_iq(job) : APP_CONTINUE;

    if (code == APP_CONTINUE && job->has_audio) {
        job->audio = (audio_measurement){.program = &program,
                                         .common = job->common,
                                         .reader = truth_path != NULL ? job->iq.reader : NULL,
                                         .truth_path = truth_path,
                                         .skip_s = skip_s};
        code = open_audio(job, job->common->from, &job->audio.audio);
    }
    if (code == APP_CONTINUE && message_path != NULL) {
        code = open_audio(job, message_path, &job->audio.message);
    }
    return code;
}

/* Silence is a fault of the input here; status 3 is kept for IQ samples without a signal. */
static int audio_failed(mb_status status)
{
    int code = app_fail(&program, status);

    if (status == MB_ERROR_ARGUMENT) {
        return APP_USAGE;
    }
    return status == MB_ERROR_NO_SIGNAL ? APP_FAILURE : code;
}

static int measure(measurement *job)
{
    if (job->has_iq) {
        mb_status status = iq_measure(&job->iq);
        if (status != MB_OK) {
            return app_refuse(&program, status);
        }
        app_iq_remarks(&program, job->common, job->iq.path, job->iq.reader);
    }
    if (job->has_audio) {
        mb_status status = audio_measure(&job->audio);
        if (status != MB_OK) {
            return audio_failed(status);
        }
        audio_figures(&job->audio, &job->figures);
    }
    if (job->has_iq) {
        iq_figures(&job->iq, &job->figures);
    }
    return APP_CONTINUE;
}

static int draw(measurement *job, const char *path)
{
    char subtitle[512];
    const mb_assess_iq_result *r = &job->iq.result;
    const char *name = app_is_pipe(job->iq.path) ? "standard input" : job->iq.path;
    int used = snprintf(subtitle, sizeof subtitle, "%.300s, %.1f s at %.10g Hz", name, r->emission.duration_s,
                        mb_iq_reader_info(job->iq.reader).rate_hz);

    if (job->audio.has_ideal && used > 0 && (size_t)used < sizeof subtitle) {
        (void)snprintf(subtitle + used, sizeof subtitle - (size_t)used, "; SNR %.2f dB, loss %.3f dB",
                       job->audio.score.snr_db, job->audio.ideal.snr_db - job->audio.score.snr_db);
    }
    mb_status status = mb_assess_picture(job->iq.assess, r, subtitle, path);
    return status == MB_OK ? APP_CONTINUE : app_fail(&program, status);
}

/* The page takes the picture in; without --picture it is drawn beside it for a moment. */
static int write_page(measurement *job)
{
    const char *path = picture_path;
    char beside[1024];
    int code = APP_CONTINUE;

    if (job->has_iq && path == NULL) {
        int length = snprintf(beside, sizeof beside, "%s.picture.svg", job->common->report);
        path = length > 0 && (size_t)length < sizeof beside ? beside : NULL;
        code = path != NULL ? draw(job, path) : APP_CONTINUE;
    }
    if (code == APP_CONTINUE) {
        int written =
            app_figures_page(&program, &job->figures, "Mirrorband: measurement", path, job->common->report);
        code = written == APP_OK ? APP_CONTINUE : written;
    }
    if (path == beside) {
        (void)unlink(beside);
    }
    return code;
}

static int hand_over(measurement *job)
{
    int code = picture_path != NULL ? draw(job, picture_path) : APP_CONTINUE;

    if (code == APP_CONTINUE && job->common->report != NULL) {
        code = write_page(job);
    }
    if (code != APP_CONTINUE) {
        return code;
    }
    if (job->common->json) {
        code = app_figures_json(&program, &job->figures);
    } else {
        app_figures_print(&job->figures, stdout);
        code = app_flush(&program);
    }
    if (code == APP_OK && job->has_iq && !job->iq.result.found) {
        app_error(&program, "%s", job->iq.why);
        code = APP_NO_SIGNAL;
    }
    return code;
}

static int run(measurement *job)
{
    int (*const checks[])(const measurement *) = {check_files, check_audio, check_needs};
    int code = tell_kind(job);

    for (size_t i = 0; i < sizeof checks / sizeof checks[0] && code == APP_CONTINUE; i++) {
        code = checks[i](job);
    }
    int (*const steps[])(measurement *) = {open_all, measure, hand_over};
    for (size_t i = 0; i < sizeof steps / sizeof steps[0] && code == APP_CONTINUE; i++) {
        code = steps[i](job);
    }
    return code;
}

static void release(measurement *job)
{
    mb_audio_reader_close(job->audio.audio);
    mb_audio_reader_close(job->audio.message);
    iq_measurement_release(&job->iq);
}

int main(int argc, char **argv)
{
    static measurement job;
    app_common common;
    int code = app_parse(&program, argc, argv, &common);

    job.common = &common;
    if (code == APP_CONTINUE) {
        code = run(&job);
    }
    release(&job);
    app_finish(&common);
    return code;
}
