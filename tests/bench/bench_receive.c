/* The receive path at 16 kHz baseband, in multiples of real time on one core: live and whole recordings, on a
 * synthetic voice of pitch harmonics in syllables with noise at 15 dB. */
#include "bench.h"

#include <math.h>
#include <stdio.h>

#include "mirrorband/chain.h"

enum { RATE_HZ = 16000, SECONDS = 60, SAMPLES = RATE_HZ * SECONDS, BLOCK = 160, REPEATS = 5 };

static void make_signal(mb_cf32 *iq)
{
    mb_random random;
    double phase = 0.0, pitch = 0.0;

    mb_random_seed(&random, 5, 0);
    for (size_t i = 0; i < SAMPLES; i++) {
        double t = (double)i / RATE_HZ, message = 0.0;
        double syllable = fmod(t, 4.0) < 3.0 ? fmax(0.0, sin(2.0 * MB_PI * 2.5 * t)) : 0.0;
        pitch += 2.0 * MB_PI * (120.0 + 25.0 * sin(2.0 * MB_PI * 0.7 * t)) / RATE_HZ;
        for (int k = 3; k < 20; k++) {
            message += sin(pitch * k + k * k) / k;
        }
        message *= 0.2 * syllable;
        phase += 2.0 * MB_PI * (137.0 + 0.2 * t) / RATE_HZ;
        iq[i].re = (float)(message * cos(phase) + 0.01 * mb_random_normal(&random));
        iq[i].im = (float)(message * sin(phase) + 0.01 * mb_random_normal(&random));
    }
}

static double live(const mb_receive_settings *settings, const mb_cf32 *iq, float *audio)
{
    mb_receive *receive = NULL;

    bench_require(mb_receive_create(settings, &receive));
    double begun = mb_clock_s();
    for (size_t at = 0; at < SAMPLES; at += BLOCK) {
        (void)mb_receive_process_cf32(receive, iq + at, BLOCK, audio);
    }
    double took = mb_clock_s() - begun;
    mb_receive_destroy(receive);
    return SECONDS / took;
}

static double recorded(const mb_receive_settings *settings, const mb_cf32 *iq, float *audio)
{
    mb_recording *recording = NULL;

    bench_require(mb_recording_create(settings, &recording));
    double begun = mb_clock_s();
    bench_require(mb_recording_listen_cf32(recording, iq, SAMPLES));
    bench_require(mb_recording_resolve(recording));
    for (size_t at = 0; at < SAMPLES; at += BLOCK) {
        (void)mb_recording_process_cf32(recording, iq + at, BLOCK, audio);
    }
    double took = mb_clock_s() - begun;
    mb_recording_destroy(recording);
    return SECONDS / took;
}

void bench_receive(void)
{
    static mb_cf32 iq[SAMPLES];
    mb_receive_settings settings = mb_receive_settings_default();
    double live_speed[REPEATS], recorded_speed[REPEATS];

    settings.rate_hz = RATE_HZ;
    make_signal(iq);
    mb_receive *probe = NULL;
    bench_require(mb_receive_create(&settings, &probe));
    float *audio = mb_allocate(mb_receive_output_bound(probe, 4 * BLOCK), sizeof *audio);
    mb_receive_destroy(probe);
    bench_require(audio == NULL ? MB_ERROR_MEMORY : MB_OK);
    for (int i = 0; i < REPEATS; i++) {
        live_speed[i] = live(&settings, iq, audio);
        recorded_speed[i] = recorded(&settings, iq, audio);
    }
    mb_release(audio);
    printf("receive path, 16 kHz, live: %.0f times real time; whole recording: %.0f times (median of %d)\n",
           bench_median(live_speed, REPEATS), bench_median(recorded_speed, REPEATS), REPEATS);
}
