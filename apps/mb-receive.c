/* mb-receive - recovers the missing carrier, and the voice. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "endpoint.h"
#include "iq.h"
#include "json.h"
#include "mirrorband/chain.h"
#include "mirrorband/files.h"
#include "pump.h"
#include "signals.h"
#include "summary.h"
#include "track.h"

enum { BLOCKS_PER_S = 100, BLOCK_MAX = 65536 };

/* Room left above the highest envelope of a recording, for what the audio filter may add to it. */
static const double room_db = 2.0;

/* Live, in integers: room for noise on top of a signal near full scale. */
static const double live_gain_db = -6.0;

static double rate_hz;
static uint64_t iq_channel;
static const char *format, *track_path, *audio_format;

static const app_option options[] = {
    APP_RATE_OPTION("rate", "sample rate of a raw input, which does not tell it", &rate_hz, 1e9),
    APP_WORD_OPTION("format", "samples of a pipe: cf32, ci16, ci8, cu8", &format),
    APP_IQ_CHANNEL_OPTION(&iq_channel),
    APP_KEY_OPTION("offset", "HZ", "where to look for the carrier; the key receive.offset", "receive.offset"),
    APP_KEY_OPTION("span", "HZ", "how far to both sides; the key receive.span", "receive.span"),
    APP_KEY_OPTION("look-ahead", "WHEN",
                   "off, a time, or all: the whole recording in two passes; receive.look_ahead",
                   "receive.look_ahead"),
    APP_KEY_OPTION("audio-rate", "HZ", "sample rate of the audio written; the key audio.rate", "audio.rate"),
    APP_WORD_OPTION("audio-format", "samples of the audio: s16, s24 or f32 (s24 in files)", &audio_format),
    {.name = "track",
     .argument = "FILE.csv",
     .meaning = "what the receiver did, every 10 ms",
     .kind = APP_TEXT,
     .target = (void *)&track_path},
};

static const app_program program = {
    .name = "mb-receive",
    .summary = "Recovers the missing carrier of a double-sideband suppressed-carrier signal, and the voice.",
    .from = "IQ samples: .sigmf-meta .wav .rf64 .cf32 .ci16 .ci8 .cu8, or - for a pipe",
    .to = "audio: .wav .flac .rf64, or - for a pipe",
    .example = "mb-receive --from heard.sigmf-meta --to heard.wav --look-ahead all --track track.csv",
    .common = APP_FROM | APP_TO | APP_JSON,
    .options = options,
    .option_count = sizeof options / sizeof options[0],
};

typedef struct reception {
    const app_common *common;
    bool whole;  /* --look-ahead all */
    bool native; /* the input is ci16 and stays so */
    mb_iq_reader *reader;
    mb_receive *live;
    mb_recording *recording;
    mb_audio_writer *writer;
    app_track track;
    size_t block;
    void *samples; /* mb_cf32 or mb_ci16, block of them */
    float *audio;
    size_t audio_bound;
    double audio_rate_hz;
    bool gain_chosen;
    float gain; /* of the audio, one for all of it */
    double gain_db;
    mb_receive_state state;
} reception;

static int open_input(reception *job)
{
    const app_iq_input input = {.path = job->common->from,
                                .rate_hz = rate_hz,
                                .format = format,
                                .channel = iq_channel,
                                .rewindable = job->whole};
    int code = app_iq_open(&program, &input, &job->reader);

    if (code == APP_CONTINUE) {
        rate_hz = mb_iq_reader_info(job->reader).rate_hz;
        job->native = mb_iq_reader_info(job->reader).format == MB_IQ_CI16;
    }
    return code;
}

static int create_chain(reception *job)
{
    mb_receive_settings settings;
    mb_status status = mb_receive_settings_from_config(job->common->config, rate_hz, &settings);

    if (status == MB_OK) {
        status = job->whole ? mb_recording_create(&settings, &job->recording)
                            : mb_receive_create(&settings, &job->live);
    }
    if (status != MB_OK) {
        return app_refuse(&program, status);
    }
    job->audio_rate_hz = settings.audio_rate_hz;
    job->block = job->whole ? BLOCK_MAX : (size_t)llround(rate_hz / BLOCKS_PER_S);
    job->audio_bound = job->whole ? mb_recording_output_bound(job->recording, job->block)
                                  : mb_receive_output_bound(job->live, job->block);
    job->samples = mb_allocate(job->block, sizeof(mb_cf32));
    job->audio = mb_allocate(job->audio_bound, sizeof *job->audio);
    return job->samples != NULL && job->audio != NULL ? APP_CONTINUE : app_fail(&program, MB_ERROR_MEMORY);
}

static void set_gain(reception *job, double gain_db)
{
    job->gain_db = gain_db;
    job->gain = (float)pow(10.0, gain_db / 20.0);
    job->gain_chosen = true;
}

static int create_outputs(reception *job)
{
    mb_audio_writer_settings settings = mb_audio_writer_settings_default();

    if (audio_format != NULL && mb_audio_format_parse(audio_format, &settings.format) != MB_OK) {
        return app_usage_error(&program, "--audio-format: %s", mb_last_fault()->text);
    }
    if (audio_format == NULL && app_is_pipe(job->common->to)) {
        return app_usage_error(&program, "--audio-format is missing: a pipe holds raw audio, s16 or f32");
    }
    if (audio_format == NULL) {
        settings.format = MB_AUDIO_S24; /* a faint signal is not coarsened, and everything plays it */
    }
    if (!job->whole && settings.format != MB_AUDIO_F32 &&
        !mb_config_switch(job->common->config, "receive.gain_control")) {
        set_gain(job, live_gain_db);
    }
    settings.rate_hz = job->audio_rate_hz;
    mb_status status = mb_audio_writer_create(job->common->to, &settings, &job->writer);
    if (status == MB_OK) {
        status = app_track_begin(&job->track, track_path);
    }
    return status == MB_OK ? APP_CONTINUE : app_refuse(&program, status);
}

static mb_status read_block(reception *job, size_t *taken)
{
    return job->native ? mb_iq_read_ci16(job->reader, job->samples, job->block, taken)
                       : mb_iq_read(job->reader, job->samples, job->block, taken);
}

static mb_status pump(reception *job, const char *doing, app_step step)
{
    const app_pass pass = {.doing = doing,
                           .rate_hz = rate_hz,
                           .samples = mb_iq_reader_info(job->reader).samples,
                           .step = step,
                           .job = job};

    return app_pump(&program, job->common, &pass);
}

/* ---- live ------------------------------------------------------------------------------------------------
 */

static mb_status put(reception *job, size_t made)
{
    for (size_t i = 0; i < made; i++) {
        job->audio[i] *= job->gain;
    }
    return mb_audio_writer_write(job->writer, job->audio, made);
}

static mb_status receive_samples(reception *job, size_t count)
{
    size_t made = job->native ? mb_receive_process_ci16(job->live, job->samples, count, job->audio)
                              : mb_receive_process_cf32(job->live, job->samples, count, job->audio);

    job->state = mb_receive_state_now(job->live);
    return put(job, made);
}

static mb_status receive_block(void *user, size_t *taken)
{
    reception *job = user;
    mb_status status = read_block(job, taken);

    if (status != MB_OK || *taken == 0) {
        return status;
    }
    status = receive_samples(job, *taken);
    mb_track_point point = app_track_live(&job->state.carrier);
    return status == MB_OK ? app_track_point(&job->track, &point) : status;
}

/* What is still inside when the input ends: so many zeros as the delay is long push it out. */
static mb_status flush_live(reception *job)
{
    uint64_t left = (uint64_t)ceil(mb_receive_delay_s(job->live) * rate_hz);
    mb_status status = MB_OK;

    memset(job->samples, 0, job->block * sizeof(mb_cf32));
    while (status == MB_OK && left > 0) {
        size_t count = left < job->block ? (size_t)left : job->block;
        status = receive_samples(job, count);
        left -= count;
    }
    return status;
}

static mb_status receive_live(reception *job)
{
    mb_status status = pump(job, "receiving", receive_block);

    return status == MB_OK ? flush_live(job) : status;
}

/* ---- a whole recording -----------------------------------------------------------------------------------
 */

static mb_status listen_block(void *user, size_t *taken)
{
    reception *job = user;
    mb_status status = read_block(job, taken);

    if (status != MB_OK) {
        return status;
    }
    return job->native ? mb_recording_listen_ci16(job->recording, job->samples, *taken)
                       : mb_recording_listen_cf32(job->recording, job->samples, *taken);
}

/* The track into its table, and the gain that brings the highest envelope of the baseband to room_db below
 * full scale. */
static mb_status take_points(reception *job)
{
    size_t count = mb_recording_point_count(job->recording);
    double peak_db = mb_power_db(pow(mb_recording_peak(job->recording), 2.0));
    mb_status status = MB_OK;

    for (size_t i = 0; i < count && status == MB_OK; i++) {
        mb_track_point point = mb_recording_point(job->recording, i);
        status = app_track_point(&job->track, &point);
    }
    if (!mb_config_switch(job->common->config, "receive.gain_control")) {
        set_gain(job, floor(-room_db - peak_db));
    }
    return status;
}

static mb_status process_block(void *user, size_t *taken)
{
    reception *job = user;
    mb_status status = read_block(job, taken);

    if (status != MB_OK || *taken == 0) {
        return status;
    }
    return put(job, job->native
                        ? mb_recording_process_ci16(job->recording, job->samples, *taken, job->audio)
                        : mb_recording_process_cf32(job->recording, job->samples, *taken, job->audio));
}

static mb_status receive_recording(reception *job)
{
    mb_status status = pump(job, "listening", listen_block);
    size_t made = 1;

    if (status != MB_OK || (status = mb_recording_resolve(job->recording)) != MB_OK ||
        (status = take_points(job)) != MB_OK || (status = mb_iq_rewind(job->reader)) != MB_OK) {
        return status;
    }
    job->state = mb_recording_state(job->recording);
    status = pump(job, "receiving", process_block);
    while (status == MB_OK && made > 0) {
        made = mb_recording_drain(job->recording, job->audio);
        status = put(job, made);
    }
    return status;
}

/* ---- the end ---------------------------------------------------------------------------------------------
 */

static mb_status commit(reception *job)
{
    mb_status status = mb_audio_writer_commit(job->writer);

    return status == MB_OK && job->track.table != NULL ? mb_table_writer_commit(job->track.table) : status;
}

static mb_status keep_partial(reception *job)
{
    mb_status status = mb_audio_writer_keep_partial(job->writer);

    return status == MB_OK && job->track.table != NULL ? mb_table_writer_keep_partial(job->track.table)
                                                       : status;
}

/* An interrupt before the second pass has nothing to keep. */
static int end_interrupted(reception *job)
{
    if (mb_audio_writer_state_of(job->writer).samples == 0) {
        app_error(&program, "interrupted before any audio was made; nothing was written");
        return 128 + app_interrupted();
    }
    mb_status status = keep_partial(job);
    return app_fail(&program, status == MB_OK ? MB_ERROR_INTERRUPTED : status);
}

static int no_signal(const reception *job, const char *outcome)
{
    const mb_config *config = job->common->config;

    app_error(
        &program,
        "no suppressed-carrier signal was found in %s within %g Hz of %g Hz; %s; --offset and --span say "
        "where to look",
        app_is_pipe(job->common->from) ? "the input" : job->common->from,
        mb_config_number(config, "receive.span"), mb_config_number(config, "receive.offset"), outcome);
    return APP_NO_SIGNAL;
}

static void remarks(const reception *job)
{
    uint64_t clipped = mb_audio_writer_state_of(job->writer).clipped;

    app_iq_remarks(&program, job->common, job->common->from, job->reader);
    if (clipped > 0) {
        app_note(
            &program, job->common,
            "%llu samples of the audio were clipped; --set receive.gain_control=on, or --audio-format f32",
            (unsigned long long)clipped);
    }
}

/* The state, with the means over tracked voice where a live state knows only the last moment. */
static mb_carrier_state summary_of(const reception *job)
{
    mb_carrier_state carrier = job->state.carrier;
    app_track_means mean = app_track_mean(&job->track);

    if (!job->whole) {
        carrier.carrier_offset_hz = mean.carrier_offset_hz;
        carrier.lock_quality = mean.lock_quality;
        carrier.snr_db = mean.snr_db;
    }
    return carrier;
}

static int report_json(const reception *job, bool found)
{
    mb_carrier_state carrier = summary_of(job);
    double unknown = found ? 0.0 : (double)NAN;
    json_t *result = app_json_begin(&program);

    app_json_set_text(result, "from", job->common->from);
    app_json_set_text(result, "to", job->common->to);
    app_json_set_text(result, "track", track_path);
    app_json_set_text(result, "look_ahead", mb_config_text(job->common->config, "receive.look_ahead"));
    app_json_set_flag(result, "found", found);
    app_json_set(result, "duration_s", (double)mb_iq_reader_state_of(job->reader).samples / rate_hz, 6);
    app_json_set(result, "active_s", carrier.active_s + unknown, 3);
    app_json_set(result, "carrier_offset_hz", carrier.carrier_offset_hz + unknown, 4);
    app_json_set(result, "lock_quality", carrier.lock_quality + unknown, 4);
    app_json_set(result, "snr_estimate_db", carrier.snr_db + unknown, 3);
    app_json_set(result, "loss_estimate_db", app_track_mean(&job->track).loss_db + unknown, 4);
    app_json_set_whole(result, "locks", carrier.locks);
    app_json_set_whole(result, "holds", carrier.holds);
    app_json_set_flag(result, "polarity_certain", found && !carrier.polarity_uncertain);
    app_json_set(result, "audio_gain_db", job->gain_db, 3);
    app_json_set_whole(result, "audio_clipped", mb_audio_writer_state_of(job->writer).clipped);
    app_json_set_whole(result, "input_non_finite", mb_iq_reader_state_of(job->reader).non_finite);
    return app_json_print(&program, result, stdout);
}

static void print_summary(const reception *job, FILE *stream)
{
    mb_carrier_state carrier = summary_of(job);

    (void)fprintf(stream, "%s: %.2f s of audio at %.10g Hz, %.1f s of it speech\n",
                  app_is_pipe(job->common->to) ? program.name : job->common->to,
                  (double)mb_audio_writer_state_of(job->writer).samples / job->audio_rate_hz,
                  job->audio_rate_hz, carrier.active_s);
    (void)fprintf(stream, "  %-15s %.2f Hz (mean over speech)\n", "carrier offset",
                  carrier.carrier_offset_hz);
    (void)fprintf(stream, "  %-15s %.3f\n", "lock quality", carrier.lock_quality);
    (void)fprintf(stream, "  %-15s %.1f dB (estimate)\n", "SNR", carrier.snr_db);
    (void)fprintf(stream, "  %-15s %.3f dB against ideal detection (estimate)\n", "loss",
                  app_track_mean(&job->track).loss_db);
    (void)fprintf(stream, "  %-15s %llu, pauses held over %llu\n", "locks", (unsigned long long)carrier.locks,
                  (unsigned long long)carrier.holds);
    (void)fprintf(stream, "  %-15s %s\n", "polarity",
                  carrier.polarity_uncertain ? "not certain: a pause was too long" : "certain throughout");
    if (job->gain_chosen) {
        (void)fprintf(stream, "  %-15s %+.0f dB on the audio, the same throughout\n", "gain", job->gain_db);
    }
}

static int report(const reception *job)
{
    FILE *stream = app_summary_stream(job->common, track_path);

    if (job->common->json) {
        return report_json(job, true);
    }
    if (stream != NULL) {
        print_summary(job, stream);
    }
    return app_flush(&program);
}

static int end_without_signal(reception *job, const char *outcome)
{
    if (job->common->json && report_json(job, false) != APP_OK) {
        return APP_FAILURE;
    }
    return no_signal(job, outcome);
}

static int receive(reception *job)
{
    mb_status status = job->whole ? receive_recording(job) : receive_live(job);

    if (status == MB_ERROR_INTERRUPTED) {
        return end_interrupted(job);
    }
    if (status == MB_ERROR_NO_SIGNAL) {
        return end_without_signal(job, "no audio was written");
    }
    if (status == MB_OK) {
        status = commit(job);
    }
    if (status != MB_OK) {
        return app_fail(&program, status);
    }
    remarks(job);
    return job->whole || job->state.carrier.locks > 0 ? report(job)
                                                      : end_without_signal(job, "the audio is silent");
}

static int run(reception *job)
{
    const app_file files[] = {
        {"--from", job->common->from, false}, {"--to", job->common->to, true}, {"--track", track_path, true}};
    int code = app_files_check(&program, files, 3);

    job->whole = mb_look_ahead_all(job->common->config);
    if (code == APP_CONTINUE) {
        code = app_json_check(&program, job->common, "--track", track_path);
    }
    int (*const steps[])(reception *) = {open_input, create_chain, create_outputs, receive};
    for (size_t i = 0; i < sizeof steps / sizeof steps[0] && code == APP_CONTINUE; i++) {
        code = steps[i](job);
    }
    return code;
}

static void release(reception *job)
{
    mb_audio_writer_destroy(job->writer);
    mb_table_writer_destroy(job->track.table);
    mb_receive_destroy(job->live);
    mb_recording_destroy(job->recording);
    mb_iq_reader_close(job->reader);
    mb_release(job->samples);
    mb_release(job->audio);
}

int main(int argc, char **argv)
{
    app_common common;
    reception job = {.common = &common, .gain = 1.0f};
    int code = app_parse(&program, argc, argv, &common);

    if (code == APP_CONTINUE) {
        code = run(&job);
    }
    release(&job);
    app_finish(&common);
    return code;
}
