#include "score.h"

#include <string.h>

void mb_score_restart_bands(mb_score *score)
{
    mb_fir_reset(score->band[0]);
    mb_fir_reset(score->band[1]);
    score->settle = mb_fir_delay_samples(score->band[0]);
    score->queue[0].tail = score->queue[1].tail = score->settle;
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

/* What finds no room has no partner either: the other stream has ended. */
static void push(mb_score_queue *queue, const float *samples, size_t count)
{
    size_t drop = queue->drop < count ? queue->drop : count, room = queue->room - queue->fill;

    queue->drop -= drop;
    count = count - drop < room ? count - drop : room;
    memcpy(queue->samples + queue->fill, samples + drop, count * sizeof *samples);
    queue->fill += count;
}

static void pop(mb_score_queue *queue, size_t count)
{
    queue->fill -= count;
    memmove(queue->samples, queue->samples + count, queue->fill * sizeof *queue->samples);
}

static void take_fit(mb_score *score, const size_t count[2], size_t skip)
{
    push(&score->queue[0], score->chunk[0] + skip, count[0]);
    push(&score->queue[1], score->chunk[1] + skip, count[1]);
    size_t both = score->queue[0].fill < score->queue[1].fill ? score->queue[0].fill : score->queue[1].fill;
    for (size_t i = 0; i < both; i++) {
        take_pair(score, score->queue[0].samples[i], score->queue[1].samples[i]);
    }
    pop(&score->queue[0], both);
    pop(&score->queue[1], both);
}

/* Copies one stream, or zeros if it has ended, into its chunk and band-limits it there. Returns how many
 * values were not finite. */
static size_t fill_chunk(mb_score *score, int stream, const float *samples, size_t count)
{
    float *chunk = score->chunk[stream];
    size_t bad = 0;

    if (samples != NULL) {
        memcpy(chunk, samples, count * sizeof *samples);
        bad = mb_scrub_f32(chunk, count);
    } else {
        memset(chunk, 0, count * sizeof *chunk);
    }
    mb_fir_process_f32(score->band[stream], chunk, count, chunk);
    return bad;
}

/* Of a stream that has ended only what its filter still held belongs to it. */
static size_t length_left(mb_score_queue *queue, const float *samples, size_t count)
{
    if (samples == NULL) {
        count = queue->tail < count ? queue->tail : count;
        queue->tail -= count;
    }
    return count;
}

static void take_chunk(mb_score *score, const float *message, const float *audio, size_t count)
{
    size_t bad = fill_chunk(score, 0, message, count) + fill_chunk(score, 1, audio, count);
    size_t drop = score->settle < count ? score->settle : count, left = count - drop;

    score->settle -= drop;
    if (score->pass == MB_PASS_ALIGN) {
        score->non_finite += bad;
        mb_lag_finder_add(score->finder, score->chunk[0] + drop, score->chunk[1] + drop, left);
        take_frames(score, score->chunk[0] + drop, left);
    } else {
        const size_t counts[2] = {length_left(&score->queue[0], message, left),
                                  length_left(&score->queue[1], audio, left)};
        take_fit(score, counts, drop);
    }
}

void mb_score_take(mb_score *score, const float *message, const float *audio, size_t count)
{
    while (count > 0) {
        size_t part = count < MB_SCORE_CHUNK ? count : MB_SCORE_CHUNK;
        take_chunk(score, message, audio, part);
        message = message != NULL ? message + part : NULL;
        audio = audio != NULL ? audio + part : NULL;
        count -= part;
    }
}
