#include "score.h"

#include <string.h>

void mb_score_restart_bands(mb_score *score)
{
    mb_fir_reset(score->band[0]);
    mb_fir_reset(score->band[1]);
    score->settle = (size_t)mb_fir_delay_samples(score->band[0]);
}

void mb_score_restart_segment(mb_score_segment *segment)
{
    mb_fir_fit_reset(segment->fit);
    segment->fill = 0;
    segment->message_square = segment->product = 0.0;
}

static void take_frames(mb_score *score, const float *message, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        score->frame_square += (double)message[i] * (double)message[i];
        if (++score->frame_fill == score->frame) {
            mb_frame_levels_add(&score->levels, score->frame_square / (double)score->frame);
            score->frame_fill = 0;
            score->frame_square = 0.0;
        }
    }
}

static void end_segment(mb_score *score)
{
    mb_score_segment *segment = &score->segment;

    if (segment->message_square / (double)segment->length >= score->active_floor) {
        mb_fir_fit_result fit = mb_fir_fit_solve(segment->fit);
        mb_snr_counts_add(&score->snrs, mb_power_db(fit.fit_power) - mb_power_db(fit.error_power));
        int polarity = segment->product < 0.0 ? -1 : 1;
        score->polarity_changes += segment->polarity != 0 && polarity != segment->polarity;
        segment->polarity = polarity;
    }
    mb_score_restart_segment(segment);
}

/* One pair of aligned samples. */
static void take_pair(mb_score *score, float message, float audio)
{
    mb_score_segment *segment = &score->segment;

    if (score->skip > 0) {
        score->skip--;
        return;
    }
    score->scored++;
    mb_fir_fit_add(score->whole, &message, &audio, 1);
    mb_fir_fit_add(segment->fit, &message, &audio, 1);
    segment->message_square += (double)message * (double)message;
    segment->product += (double)message * (double)audio;
    if (++segment->fill == segment->length) {
        end_segment(score);
    }
}

static void push(mb_score_queue *queue, const float *samples, size_t count)
{
    size_t drop = queue->drop < count ? queue->drop : count;

    queue->drop -= drop;
    memcpy(queue->samples + queue->fill, samples + drop, (count - drop) * sizeof *samples);
    queue->fill += count - drop;
}

static void pop(mb_score_queue *queue, size_t count)
{
    queue->fill -= count;
    memmove(queue->samples, queue->samples + count, queue->fill * sizeof *queue->samples);
}

static void take_fit(mb_score *score, const float *message, const float *audio, size_t count)
{
    push(&score->queue[0], message, count);
    push(&score->queue[1], audio, count);
    size_t both = score->queue[0].fill < score->queue[1].fill ? score->queue[0].fill : score->queue[1].fill;
    for (size_t i = 0; i < both; i++) {
        take_pair(score, score->queue[0].samples[i], score->queue[1].samples[i]);
    }
    pop(&score->queue[0], both);
    pop(&score->queue[1], both);
}

/* Band-limits what stands in the chunks and hands it to the pass that is on. */
static void take_chunk(mb_score *score, size_t count)
{
    mb_fir_process_f32(score->band[0], score->chunk[0], count, score->chunk[0]);
    mb_fir_process_f32(score->band[1], score->chunk[1], count, score->chunk[1]);
    size_t drop = score->settle < count ? score->settle : count;
    const float *message = score->chunk[0] + drop, *audio = score->chunk[1] + drop;
    score->settle -= drop;
    if (score->pass == MB_PASS_ALIGN) {
        mb_lag_finder_add(score->finder, message, audio, count - drop);
        take_frames(score, message, count - drop);
    } else {
        take_fit(score, message, audio, count - drop);
    }
}

void mb_score_take(mb_score *score, const float *message, const float *audio, size_t count)
{
    while (count > 0) {
        size_t part = count < MB_SCORE_CHUNK ? count : MB_SCORE_CHUNK;
        memcpy(score->chunk[0], message, part * sizeof *message);
        memcpy(score->chunk[1], audio, part * sizeof *audio);
        size_t bad = mb_scrub_f32(score->chunk[0], part) + mb_scrub_f32(score->chunk[1], part);
        score->non_finite += score->pass == MB_PASS_ALIGN ? bad : 0;
        take_chunk(score, part);
        message += part;
        audio += part;
        count -= part;
    }
}

/* Zeros bring out what the band filters still hold. */
void mb_score_flush(mb_score *score)
{
    size_t left = (size_t)mb_fir_delay_samples(score->band[0]);

    while (left > 0) {
        size_t part = left < MB_SCORE_CHUNK ? left : MB_SCORE_CHUNK;
        memset(score->chunk[0], 0, part * sizeof *score->chunk[0]);
        memset(score->chunk[1], 0, part * sizeof *score->chunk[1]);
        take_chunk(score, part);
        left -= part;
    }
}
