/* The passes over audio, its message and the samples an ideal receiver hears; and their figures. */
#include <math.h>

#include "measuring.h"
#include "pump.h"

enum { BLOCK = 2048 };

static const double sent_rate_hz = 48000.0; /* of the message as sent */

static mb_status level_block(audio_measurement *job, mb_speech_meter *meter, float *block, size_t *taken)
{
    mb_status status = mb_audio_read(job->audio, block, BLOCK, taken);

    mb_speech_meter_process_f32(meter, block, *taken);
    return status;
}

typedef struct level_pass {
    audio_measurement *job;
    mb_speech_meter *meter;
    float block[BLOCK];
} level_pass;

static mb_status level_step(void *user, size_t *taken)
{
    level_pass *pass = user;

    return level_block(pass->job, pass->meter, pass->block, taken);
}

static mb_status measure_level(audio_measurement *job)
{
    mb_audio_info info = mb_audio_reader_info(job->audio);
    level_pass work = {.job = job};
    const app_pass pass = {.doing = "measuring",
                           .rate_hz = info.rate_hz,
                           .samples = info.samples,
                           .step = level_step,
                           .job = &work};
    mb_status status = mb_speech_meter_create(info.rate_hz, &work.meter);

    if (status == MB_OK) {
        status = app_pump(job->program, job->common, &pass);
    }
    if (status == MB_OK) {
        job->level = mb_speech_meter_state(work.meter);
        status = mb_audio_rewind(job->audio);
    }
    mb_speech_meter_destroy(work.meter);
    return status;
}

/* What is held against the message: audio from a file, or what an ideal receiver makes of IQ samples. */
typedef struct contest {
    audio_measurement *job;
    mb_assess_audio *assess;
    mb_assess_ideal *ideal; /* NULL: the audio of the file */
    mb_transmit *as_sent;   /* NULL: the message as recorded */
    mb_cf32 *sent;          /* what it makes of a block */
    float *message;         /* the real part of that */
    mb_table_reader *truth;
    mb_phase_point row; /* read but not yet handed over */
    bool row_waits, truth_ended, samples_ended;
    uint64_t position;
    mb_cf32 iq[BLOCK];
    float block[BLOCK];
    float *heard; /* what the ideal receiver gives */
} contest;

static const char *const truth_columns[] = {"time_s", "carrier_phase_rad"};

static mb_status next_row(contest *c)
{
    double row[2];
    bool more = false;
    mb_status status = mb_table_reader_row(c->truth, row, &more);

    if (status == MB_OK && !more) {
        mb_assess_ideal_truth_end(c->ideal);
        c->truth_ended = true;
    }
    c->row = (mb_phase_point){.time_s = row[0], .phase_rad = row[1]};
    c->row_waits = status == MB_OK && more;
    return status;
}

/* Hands over the truth as far as time_s. */
static mb_status truth_until(contest *c, double time_s)
{
    mb_status status = MB_OK;

    while (status == MB_OK && !c->truth_ended) {
        if (!c->row_waits) {
            status = next_row(c);
        }
        if (c->row_waits && (c->row.time_s > time_s || mb_assess_ideal_truth(c->ideal, &c->row, 1) == 0)) {
            break;
        }
        c->row_waits = false;
    }
    return status;
}

static mb_status push(contest *c, mb_assess_lane lane, const float *samples, size_t count)
{
    mb_status status = MB_OK;

    for (size_t done = 0; done < count && status == MB_OK;) {
        size_t part = count - done < BLOCK ? count - done : BLOCK;
        status = mb_assess_audio_push(c->assess, lane, samples + done, part);
        done += part;
    }
    return status;
}

/* One block of what an ideal receiver hears. */
static mb_status feed_ideal(contest *c, size_t *taken)
{
    const double ahead_s = 1.0;
    size_t got = 0, made = 0;
    double rate_hz = mb_iq_reader_info(c->job->reader).rate_hz;
    mb_status status = c->samples_ended ? MB_OK : mb_iq_read(c->job->reader, c->iq, BLOCK, &got);

    c->position += got;
    c->samples_ended = c->samples_ended || got == 0;
    if (status == MB_OK) {
        status = truth_until(c, (double)c->position / rate_hz + ahead_s);
    }
    if (status == MB_OK && c->samples_ended && !c->truth_ended) {
        mb_assess_ideal_truth_end(c->ideal);
        c->truth_ended = true;
    }
    if (status == MB_OK) {
        status = c->samples_ended ? mb_assess_ideal_drain(c->ideal, c->heard, &made)
                                  : mb_assess_ideal_process(c->ideal, c->iq, got, c->heard, &made);
    }
    if (status == MB_OK && c->samples_ended && made == 0) {
        mb_assess_audio_end(c->assess, MB_ASSESS_AUDIO);
    }
    *taken = got;
    return status == MB_OK ? push(c, MB_ASSESS_AUDIO, c->heard, made) : status;
}

static mb_status push_sent(contest *c, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        c->message[i] = c->sent[i].re;
    }
    return push(c, MB_ASSESS_MESSAGE, c->message, count);
}

/* One block of the message as the transmitter sends it. */
static mb_status feed_sent(contest *c, size_t *taken)
{
    mb_status status = mb_audio_read(c->job->message, c->block, BLOCK, taken);

    if (status == MB_OK && *taken > 0) {
        return push_sent(c, mb_transmit_process(c->as_sent, c->block, *taken, c->sent));
    }
    for (size_t made = 1; made > 0 && status == MB_OK;) {
        made = mb_transmit_drain(c->as_sent, c->sent);
        status = push_sent(c, made);
    }
    mb_assess_audio_end(c->assess, MB_ASSESS_MESSAGE);
    return status;
}

static mb_status feed_file(contest *c, mb_assess_lane lane, size_t *taken)
{
    mb_audio_reader *from = lane == MB_ASSESS_MESSAGE ? c->job->message : c->job->audio;
    mb_status status = mb_audio_read(from, c->block, BLOCK, taken);

    if (status != MB_OK) {
        return status;
    }
    if (*taken == 0) {
        mb_assess_audio_end(c->assess, lane);
        return MB_OK;
    }
    return mb_assess_audio_push(c->assess, lane, c->block, *taken);
}

static mb_status contest_step(void *user, size_t *taken)
{
    contest *c = user;
    mb_status status = MB_OK;
    mb_assess_lane lane = mb_assess_audio_next(c->assess);

    *taken = 0;
    while (status == MB_OK && lane != MB_ASSESS_NEITHER && *taken == 0) {
        if (lane == MB_ASSESS_AUDIO && c->ideal != NULL) {
            status = feed_ideal(c, taken);
        } else if (lane == MB_ASSESS_MESSAGE && c->as_sent != NULL) {
            status = feed_sent(c, taken);
        } else {
            status = feed_file(c, lane, taken);
        }
        lane = mb_assess_audio_next(c->assess);
    }
    return status;
}

static mb_status one_pass(contest *c, const char *doing)
{
    mb_audio_info message = mb_audio_reader_info(c->job->message);
    mb_audio_info audio = mb_audio_reader_info(c->job->audio);
    mb_iq_info iq = {0};
    mb_status status = MB_OK;

    if (c->as_sent != NULL) {
        mb_transmit_reset(c->as_sent);
    }
    if (c->ideal != NULL) {
        iq = mb_iq_reader_info(c->job->reader);
        mb_assess_ideal_reset(c->ideal);
        c->row_waits = c->truth_ended = c->samples_ended = false;
        c->position = 0;
        status = mb_table_reader_open(c->job->truth_path, truth_columns, 2, &c->truth);
    }
    const app_pass pass = {.doing = doing,
                           .rate_hz = message.rate_hz + (c->ideal != NULL ? iq.rate_hz : audio.rate_hz),
                           .samples = message.samples + (c->ideal != NULL ? iq.samples : audio.samples),
                           .step = contest_step,
                           .job = c};
    if (status == MB_OK) {
        status = mb_audio_rewind(c->job->message);
    }
    if (status == MB_OK) {
        status = c->ideal != NULL ? mb_iq_rewind(c->job->reader) : mb_audio_rewind(c->job->audio);
    }
    if (status == MB_OK) {
        status = app_pump(c->job->program, c->job->common, &pass);
    }
    mb_table_reader_close(c->truth);
    c->truth = NULL;
    return status;
}

/* Mean offset by the truth, from its first and last phase. */
static mb_status mean_offset(const char *path, double *offset_hz)
{
    mb_table_reader *table = NULL;
    mb_status status = mb_table_reader_open(path, truth_columns, 2, &table);
    double first[2] = {NAN, NAN}, last[2] = {NAN, NAN}, row[2];
    bool more = true;

    while (status == MB_OK && more) {
        status = mb_table_reader_row(table, row, &more);
        if (status == MB_OK && more && isfinite(row[0]) && isfinite(row[1])) {
            for (int i = 0; i < 2; i++) {
                first[i] = isfinite(first[i]) ? first[i] : row[i];
                last[i] = row[i];
            }
        }
    }
    mb_table_reader_close(table);
    *offset_hz = (last[1] - first[1]) / (2.0 * MB_PI * (last[0] - first[0]));
    if (status == MB_OK && !isfinite(*offset_hz)) {
        return mb_fail(MB_ERROR_FORMAT, "truth",
                       "%s holds no two rows of time_s and carrier_phase_rad; give the file that mb-channel "
                       "--truth wrote",
                       path);
    }
    return status;
}

static mb_status create_ideal(contest *c)
{
    mb_assess_ideal_settings settings = mb_assess_ideal_settings_default();
    mb_status status = mean_offset(c->job->truth_path, &settings.offset_hz);

    settings.rate_hz = mb_iq_reader_info(c->job->reader).rate_hz;
    settings.low_hz = mb_config_number(c->job->common->config, "receive.low_cut");
    settings.high_hz = mb_config_number(c->job->common->config, "receive.high_cut");
    if (status == MB_OK) {
        status = mb_assess_ideal_create(&settings, &c->ideal);
    }
    if (status == MB_OK) {
        c->heard = mb_allocate(mb_assess_ideal_bound(c->ideal, BLOCK), sizeof *c->heard);
        status = c->heard != NULL ? MB_OK : mb_fail(MB_ERROR_MEMORY, "", "no memory for ideal detection");
    }
    return status;
}

/* The ideal emission of the message at a rate of its own: its real part is the message as sent. */
static mb_status create_as_sent(contest *c, message_kind kind)
{
    mb_transmit_settings settings;
    mb_status status = mb_transmit_settings_from_config(
        c->job->common->config, mb_audio_reader_info(c->job->message).rate_hz, sent_rate_hz, &settings);

    settings.offset_hz = 0.0;
    settings.voice.conditioning = kind == MESSAGE_CONDITIONED;
    settings.modulator = MB_MODULATOR_PRODUCT;
    settings.product = mb_product_settings_default();
    if (status == MB_OK) {
        status = mb_transmit_create(&settings, &c->as_sent);
    }
    if (status == MB_OK) {
        size_t room = mb_transmit_output_bound(c->as_sent, BLOCK);
        c->sent = mb_allocate(room, sizeof *c->sent);
        c->message = mb_allocate(room, sizeof *c->message);
        if (c->sent == NULL || c->message == NULL) {
            status = mb_fail(MB_ERROR_MEMORY, "", "no memory for the message as it was sent");
        }
    }
    return status;
}

static mb_status prepare(contest *c, message_kind kind, bool ideal)
{
    bool as_sent = kind != MESSAGE_RECORDED;
    mb_assess_audio_settings settings = mb_assess_audio_settings_default();
    const audio_measurement *job = c->job;
    mb_status status = ideal ? create_ideal(c) : MB_OK;

    if (status == MB_OK && as_sent) {
        status = create_as_sent(c, kind);
    }
    if (status != MB_OK) {
        return status;
    }
    settings.message_rate_hz = as_sent ? sent_rate_hz : mb_audio_reader_info(job->message).rate_hz;
    settings.audio_rate_hz =
        ideal ? mb_assess_ideal_audio_rate_hz(c->ideal) : mb_audio_reader_info(job->audio).rate_hz;
    settings.skip_s = job->skip_s;
    return mb_assess_audio_create(&settings, &c->assess);
}

static void release(contest *c)
{
    mb_assess_audio_destroy(c->assess);
    mb_assess_ideal_destroy(c->ideal);
    mb_transmit_destroy(c->as_sent);
    mb_release(c->heard);
    mb_release(c->sent);
    mb_release(c->message);
    mb_release(c);
}

static mb_status hold_contest(audio_measurement *job, message_kind kind, bool ideal, mb_score_result *result)
{
    contest *c = mb_allocate(1, sizeof *c);
    if (c == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory to score audio");
    }
    c->job = job;
    mb_status status = prepare(c, kind, ideal);
    if (status == MB_OK) {
        status = one_pass(c, ideal ? "aligning the ideal" : "aligning");
    }
    if (status == MB_OK) {
        status = mb_assess_audio_aligned(c->assess);
    }
    if (status == MB_OK) {
        status = one_pass(c, ideal ? "scoring the ideal" : "scoring");
    }
    if (status == MB_OK) {
        status = mb_assess_audio_finish(c->assess, result);
    }
    release(c);
    return status;
}

/* Against every kind of message; the one that fits best was sent. */
static mb_status score_audio(audio_measurement *job)
{
    bool conditioning = mb_config_switch(job->common->config, "transmit.conditioning");
    message_kind last = conditioning ? MESSAGE_CONDITIONED : MESSAGE_LIMITED;
    mb_status status = hold_contest(job, MESSAGE_RECORDED, false, &job->score);

    job->kind = MESSAGE_RECORDED;
    for (message_kind kind = MESSAGE_LIMITED; kind <= last && status == MB_OK; kind++) {
        mb_score_result result = {0};
        status = hold_contest(job, kind, false, &result);
        if (status == MB_OK && result.snr_db > job->score.snr_db) {
            job->kind = kind;
            job->score = result;
        }
    }
    job->has_score = status == MB_OK;
    return status;
}

mb_status audio_measure(audio_measurement *job)
{
    mb_status status = measure_level(job);
    double length_s = (double)job->level.samples / mb_audio_reader_info(job->audio).rate_hz;

    if (status == MB_OK && job->skip_s > 0.0 && job->skip_s >= length_s) {
        return mb_fail(MB_ERROR_ARGUMENT, "skip",
                       "--skip %g s leaves nothing of the %.2f s of audio; give a shorter time", job->skip_s,
                       length_s);
    }
    if (status == MB_OK && job->message != NULL) {
        status = score_audio(job);
    }
    if (status == MB_OK && job->has_score && job->reader != NULL && job->truth_path != NULL) {
        status = hold_contest(job, job->kind, true, &job->ideal);
        job->has_ideal = status == MB_OK;
    }
    return status;
}

static void score_figures(const audio_measurement *job, app_figures *f)
{
    static const char *const kinds[] = {"as recorded", "band limited by transmit.*",
                                        "conditioned by transmit.*"};
    const mb_score_result *s = &job->score;

    app_figures_heading(f, "Against its message");
    app_figures_add(f, (app_figure){.kind = APP_FIGURE_TEXT_VALUE,
                                    .name = "message_taken",
                                    .label = "message taken",
                                    .text = kinds[job->kind]});
    app_figures_number(f, "snr_db", "SNR", "dB", s->snr_db, 2, "best filter of 6 ms, one gain, one polarity");
    if (job->has_ideal) {
        app_figures_number(f, "ideal_snr_db", "ideal detection", "dB", job->ideal.snr_db, 2,
                           "with the true carrier phase");
        app_figures_number(f, "loss_db", "loss", "dB", job->ideal.snr_db - s->snr_db, 3, "ideal less SNR");
    }
    app_figures_add(f, (app_figure){.kind = APP_FIGURE_WHOLE,
                                    .name = "polarity_changes",
                                    .label = "polarity changes",
                                    .whole = s->polarity_changes});
    app_figures_number(f, "delay_s", "delay", "s", s->delay_s, 5, "of the audio against the message");
    app_figures_number(f, "gain_db", "gain", "dB", s->gain_db, 2, NULL);
    app_figures_number(f, "segment_snr_median_db", "SNR by the second", "dB", s->segment_median_db, 2,
                       "median");
    app_figures_number(f, "segment_snr_worst_db", "", "dB", s->segment_worst_db, 2, "worst");
    app_figures_add(f, (app_figure){.kind = APP_FIGURE_WHOLE,
                                    .name = "segments",
                                    .label = "seconds with speech",
                                    .whole = s->segments});
    app_figures_number(f, "scored_s", "length scored", "s", s->scored_s, 2, NULL);
    app_figures_number(f, "skipped_s", job->skip_s > 0.0 ? "skipped at the start" : NULL, "s", job->skip_s, 2,
                       NULL);
}

void audio_figures(const audio_measurement *job, app_figures *f)
{
    mb_audio_info info = mb_audio_reader_info(job->audio);

    app_figures_heading(f, "Audio");
    app_figures_add(
        f, (app_figure){.kind = APP_FIGURE_TEXT_VALUE,
                        .name = "audio",
                        .label = mb_endpoint_kind(job->common->from) == MB_ENDPOINT_PIPE ? NULL : "file",
                        .text = job->common->from});
    app_figures_number(f, "audio_rate_hz", "rate", "Hz", info.rate_hz, 0, NULL);
    app_figures_number(f, "audio_duration_s", "length", "s", (double)job->level.samples / info.rate_hz, 2,
                       NULL);
    app_figures_number(f, "active_speech_level_dbfs", "active speech level", "dBFS",
                       job->level.active_level_db > -399.0 ? job->level.active_level_db : NAN, 2,
                       "ITU-T P.56");
    app_figures_number(f, "audio_activity_percent", "active speech", "%", 100.0 * job->level.activity, 1,
                       "of the time");
    app_figures_number(f, "audio_peak_dbfs", "peak", "dBFS",
                       job->level.peak > 0.0 ? 2.0 * mb_power_db(job->level.peak) : NAN, 2, NULL);
    if (job->has_score) {
        score_figures(job, f);
    }
}
