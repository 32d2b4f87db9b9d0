/** passages.h - audio through the transmit chain and IQ through the receivers, whole, for the chain tests. */
#ifndef TESTS_CHAIN_PASSAGES_H
#define TESTS_CHAIN_PASSAGES_H

#include "carrier/signals.h"
#include "mirrorband/chain.h"

/** IQ of a whole transmission; to be freed. */
typedef struct passage {
    mb_cf32 *samples;
    size_t count;
} passage;

/** The plain chain: no conditioning, so that what comes out is the message itself. */
static inline mb_transmit_settings plain_transmit(double audio_rate_hz, double rate_hz)
{
    mb_transmit_settings settings = mb_transmit_settings_default();

    settings.audio_rate_hz = audio_rate_hz;
    settings.rate_hz = rate_hz;
    settings.voice.conditioning = false;
    return settings;
}

/** Whole audio through a new chain, drained. */
static inline passage transmit_all(const mb_transmit_settings *settings, const float *audio, size_t count)
{
    mb_transmit *transmit = NULL;
    passage made = {NULL, 0};

    assert_ok(mb_transmit_create(settings, &transmit));
    size_t room = mb_transmit_output_bound(transmit, count) + mb_transmit_output_bound(transmit, 0);
    made.samples = calloc(room, sizeof *made.samples);
    assert_non_null(made.samples);
    made.count = mb_transmit_process(transmit, audio, count, made.samples);
    for (size_t more = 1; more > 0; made.count += more) {
        assert_true(made.count + mb_transmit_output_bound(transmit, 0) <= room ||
                    made.count >= (size_t)((double)count * settings->rate_hz / settings->audio_rate_hz));
        more = mb_transmit_drain(transmit, made.samples + made.count);
    }
    mb_transmit_destroy(transmit);
    return made;
}

/** Moves the carrier of a passage, as another oscillator at the receiver does. */
static inline void passage_shift(passage *p, double offset_hz, double rate_hz)
{
    mb_oscillator oscillator = {0};

    mb_oscillator_set(&oscillator, offset_hz, rate_hz);
    mb_oscillator_rotate(&oscillator, p->samples, p->count, p->samples);
}

/** Whole IQ through both passes of a new recording, drained; audio is freed by the caller. */
static inline float *record_all(const mb_receive_settings *settings, const passage *iq, size_t *audio_count,
                                mb_receive_state *summary)
{
    mb_recording *recording = NULL;

    assert_ok(mb_recording_create(settings, &recording));
    assert_ok(mb_recording_listen_cf32(recording, iq->samples, iq->count));
    assert_ok(mb_recording_resolve(recording));
    size_t room = mb_recording_output_bound(recording, iq->count) + mb_recording_output_bound(recording, 0);
    float *audio = calloc(room, sizeof *audio);
    assert_non_null(audio);
    *audio_count = mb_recording_process_cf32(recording, iq->samples, iq->count, audio);
    for (size_t more = 1; more > 0; *audio_count += more) {
        more = mb_recording_drain(recording, audio + *audio_count);
    }
    *summary = mb_recording_state(recording);
    mb_recording_destroy(recording);
    return audio;
}

/** Whole IQ through a new live receiver; audio is freed by the caller. */
static inline float *receive_all(const mb_receive_settings *settings, const passage *iq, size_t *audio_count,
                                 mb_receive_state *last)
{
    mb_receive *receive = NULL;

    assert_ok(mb_receive_create(settings, &receive));
    float *audio = calloc(mb_receive_output_bound(receive, iq->count), sizeof *audio);
    assert_non_null(audio);
    *audio_count = mb_receive_process_cf32(receive, iq->samples, iq->count, audio);
    *last = mb_receive_state_now(receive);
    mb_receive_destroy(receive);
    return audio;
}

/** Lag of audio behind message, in samples, by the peak of their correlation (either polarity) within
 * +-reach, between samples by a parabola. */
static inline double passage_lag(const float *message, const float *audio, size_t count, long reach)
{
    double best = 0.0, at = 0.0, beside[3];

    for (long lag = -reach; lag <= reach; lag++) {
        for (long k = -1; k <= 1; k++) {
            double sum = 0.0;
            for (size_t i = (size_t)reach + 1; i + (size_t)reach + 1 < count; i++) {
                sum += (double)message[i] * (double)audio[(size_t)((long)i + lag + k)];
            }
            beside[k + 1] = sum;
        }
        if (fabs(beside[1]) > best) {
            best = fabs(beside[1]);
            double curve = beside[0] - 2.0 * beside[1] + beside[2];
            at = (double)lag + 0.5 * (beside[0] - beside[2]) / curve;
        }
    }
    return at;
}

#endif
