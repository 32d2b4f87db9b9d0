/* Audio against its message: both brought to the rate of the score and kept in step. */
#include "mirrorband/assess.h"

#include <math.h>
#include <string.h>

#include "mirrorband/filter.h"

static const double score_rate_hz = 8000.0, flat_hz = 3000.0, lead_limit_s = 2.0;

enum { LANES = 2, SCORE_PART = 1024 };

typedef struct lane {
    double rate_hz;
    mb_resampler *resampler; /* NULL: at the rate of the score already */
    double delay_s;          /* of the resampler, less what is dropped at the start */
    size_t drop_at_start, drop;
    float *queue; /* at the rate of the score, waiting for the other lane */
    size_t fill, room;
    uint64_t taken, made; /* samples in, samples at the rate of the score in all */
    bool ended;
} lane;

struct mb_assess_audio {
    mb_assess_audio_settings settings;
    lane lanes[LANES];
    mb_score *score;
    bool fitting; /* second pass */
};

mb_assess_audio_settings mb_assess_audio_settings_default(void)
{
    return (mb_assess_audio_settings){
        .message_rate_hz = 48000.0, .audio_rate_hz = 16000.0, .max_delay_s = 1.0, .skip_s = 0.0};
}

static mb_status lane_create(double rate_hz, lane *out)
{
    *out = (lane){.rate_hz = rate_hz};
    size_t burst = (size_t)score_rate_hz;
    if (rate_hz < score_rate_hz || rate_hz > score_rate_hz) {
        mb_resampler_settings change = mb_resampler_settings_default();
        change.rate_in_hz = rate_hz;
        change.rate_out_hz = score_rate_hz;
        change.passband_hz = fmin(flat_hz, 0.45 * rate_hz);
        mb_status status = mb_resampler_create(&change, &out->resampler);
        if (status != MB_OK) {
            return status;
        }
        double delay = mb_resampler_delay_s(out->resampler) * score_rate_hz;
        out->drop_at_start = (size_t)lround(delay);
        out->delay_s = (delay - (double)out->drop_at_start) / score_rate_hz;
        burst = mb_resampler_output_bound(out->resampler, (size_t)ceil(rate_hz));
    }
    out->drop = out->drop_at_start;
    out->room = (size_t)(lead_limit_s * score_rate_hz) + burst + out->drop_at_start;
    out->queue = mb_allocate(out->room, sizeof *out->queue);
    return out->queue != NULL ? MB_OK : mb_fail(MB_ERROR_MEMORY, "", "no memory for the audio to be scored");
}

static mb_status score_create(const mb_assess_audio_settings *settings, mb_score **out)
{
    mb_score_settings score = mb_score_settings_default();

    score.rate_hz = score_rate_hz;
    score.max_delay_s = settings->max_delay_s;
    score.skip_s = settings->skip_s;
    return mb_score_create(&score, out);
}

mb_status mb_assess_audio_create(const mb_assess_audio_settings *settings, mb_assess_audio **out)
{
    *out = NULL;
    if (mb_check_range("message_rate_hz", settings->message_rate_hz, 6000.0, 192000.0, "Hz") != MB_OK ||
        mb_check_range("audio_rate_hz", settings->audio_rate_hz, 6000.0, 192000.0, "Hz") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_assess_audio *assess = mb_allocate(1, sizeof *assess);
    if (assess == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory to score audio");
    }
    assess->settings = *settings;
    mb_status status = score_create(settings, &assess->score);
    if (status == MB_OK) {
        status = lane_create(settings->message_rate_hz, &assess->lanes[MB_ASSESS_MESSAGE]);
    }
    if (status == MB_OK) {
        status = lane_create(settings->audio_rate_hz, &assess->lanes[MB_ASSESS_AUDIO]);
    }
    if (status != MB_OK) {
        mb_assess_audio_destroy(assess);
        return status;
    }
    *out = assess;
    return MB_OK;
}

void mb_assess_audio_destroy(mb_assess_audio *assess)
{
    if (assess != NULL) {
        for (int i = 0; i < LANES; i++) {
            mb_resampler_destroy(assess->lanes[i].resampler);
            mb_release(assess->lanes[i].queue);
        }
        mb_score_destroy(assess->score);
        mb_release(assess);
    }
}

mb_assess_lane mb_assess_audio_next(const mb_assess_audio *assess)
{
    const lane *message = &assess->lanes[MB_ASSESS_MESSAGE], *audio = &assess->lanes[MB_ASSESS_AUDIO];

    if (message->ended || audio->ended) {
        return !message->ended ? MB_ASSESS_MESSAGE : !audio->ended ? MB_ASSESS_AUDIO : MB_ASSESS_NEITHER;
    }
    bool behind = (double)message->taken / message->rate_hz <= (double)audio->taken / audio->rate_hz;
    return behind ? MB_ASSESS_MESSAGE : MB_ASSESS_AUDIO;
}

/* Hands over count samples of each lane; NULL stands for silence. */
static void score_part(mb_assess_audio *assess, const float *message, const float *audio, size_t count)
{
    static const float silence[SCORE_PART];

    while (count > 0) {
        size_t part = count < SCORE_PART ? count : SCORE_PART;
        const float *first = message != NULL ? message : silence, *second = audio != NULL ? audio : silence;
        if (assess->fitting) {
            mb_score_fit(assess->score, first, second, part);
        } else {
            mb_score_align(assess->score, first, second, part);
        }
        message = message != NULL ? message + part : NULL;
        audio = audio != NULL ? audio + part : NULL;
        count -= part;
    }
}

static void lane_consume(lane *l, size_t count)
{
    l->fill -= count;
    memmove(l->queue, l->queue + count, l->fill * sizeof *l->queue);
}

/* Scores what both lanes have; of a lane that has ended, silence behind its last sample. */
static void score_step(mb_assess_audio *assess)
{
    lane *message = &assess->lanes[MB_ASSESS_MESSAGE], *audio = &assess->lanes[MB_ASSESS_AUDIO];
    size_t both = message->fill < audio->fill ? message->fill : audio->fill;

    score_part(assess, message->queue, audio->queue, both);
    lane_consume(message, both);
    lane_consume(audio, both);
    if (message->fill > 0 && audio->ended) {
        score_part(assess, message->queue, NULL, message->fill);
        lane_consume(message, message->fill);
    }
    if (audio->fill > 0 && message->ended) {
        score_part(assess, NULL, audio->queue, audio->fill);
        lane_consume(audio, audio->fill);
    }
}

static void lane_take(lane *l, const float *in, size_t n)
{
    size_t made = n;

    if (l->resampler != NULL) {
        made = mb_resampler_process_f32(l->resampler, in, n, l->queue + l->fill);
    } else {
        memcpy(l->queue + l->fill, in, n * sizeof *in);
    }
    size_t drop = l->drop < made ? l->drop : made;
    l->drop -= drop;
    memmove(l->queue + l->fill, l->queue + l->fill + drop, (made - drop) * sizeof *l->queue);
    l->fill += made - drop;
    l->made += made - drop;
}

mb_status mb_assess_audio_push(mb_assess_audio *assess, mb_assess_lane which, const float *in, size_t n)
{
    lane *l = &assess->lanes[which == MB_ASSESS_MESSAGE ? 0 : 1];

    if (n == 0 || l->ended || which == MB_ASSESS_NEITHER) {
        return MB_OK;
    }
    if ((double)n > 0.5 * l->rate_hz || (double)l->fill > lead_limit_s * score_rate_hz) {
        return mb_fail(
            MB_ERROR_ARGUMENT, which == MB_ASSESS_MESSAGE ? "message" : "audio",
            "message and audio must be handed over in step, in parts of at most 0.5 s; one lane is "
            "%.1f s ahead",
            (double)l->fill / score_rate_hz);
    }
    lane_take(l, in, n);
    l->taken += n;
    score_step(assess);
    return MB_OK;
}

/* Pushes the last samples out of the resampler. */
static void lane_flush(lane *l)
{
    float silence[64] = {0};
    uint64_t wanted = (uint64_t)llround((double)l->taken * score_rate_hz / l->rate_hz);

    while (l->made < wanted && l->fill + mb_resampler_output_bound(l->resampler, 64) <= l->room) {
        lane_take(l, silence, 64);
    }
    size_t over = l->made > wanted ? (size_t)(l->made - wanted) : 0;
    l->fill -= over < l->fill ? over : l->fill;
}

void mb_assess_audio_end(mb_assess_audio *assess, mb_assess_lane which)
{
    lane *l = &assess->lanes[which == MB_ASSESS_MESSAGE ? 0 : 1];

    if (which == MB_ASSESS_NEITHER || l->ended) {
        return;
    }
    if (l->resampler != NULL) {
        lane_flush(l);
    }
    l->ended = true;
    score_step(assess);
}

static void lane_restart(lane *l)
{
    if (l->resampler != NULL) {
        mb_resampler_reset(l->resampler);
    }
    l->drop = l->drop_at_start;
    l->fill = 0;
    l->taken = l->made = 0;
    l->ended = false;
}

mb_status mb_assess_audio_aligned(mb_assess_audio *assess)
{
    mb_status status = mb_score_aligned(assess->score);

    for (int i = 0; i < LANES; i++) {
        lane_restart(&assess->lanes[i]);
    }
    assess->fitting = true;
    return status;
}

mb_status mb_assess_audio_finish(mb_assess_audio *assess, mb_score_result *result)
{
    mb_status status = mb_score_finish(assess->score, result);

    if (status == MB_OK) {
        result->delay_s += assess->lanes[MB_ASSESS_MESSAGE].delay_s - assess->lanes[MB_ASSESS_AUDIO].delay_s;
    }
    return status;
}
