/** receive_path.h - what live and recorded reception share: wideband to baseband, derotated baseband to
 * audio. */
#ifndef CHAIN_RECEIVE_PATH_H
#define CHAIN_RECEIVE_PATH_H

#include "mirrorband/chain.h"
#include "mirrorband/filter.h"

enum { WIDEBAND_CHUNK = 8192, AUDIO_BLOCKS_PER_S = 100 };

/** Detector, gain control, squelch and change to the audio rate, for derotated baseband. */
typedef struct receive_back {
    mb_coherent *coherent;
    mb_gain_control *gain_control; /* NULL: off */
    mb_squelch *squelch;           /* NULL: off */
    mb_resampler *resampler;       /* NULL: audio at the baseband rate */
    float *audio;                  /* scratch of `room` samples */
    size_t room;
    double delay_s;
} receive_back;

void receive_back_reset(receive_back *back);

/** What the carrier recovery says about the samples that follow. */
void receive_back_report(receive_back *back, mb_carrier_mode mode, double lock_quality);

/** n <= room derotated samples to audio; returns how many came out. */
size_t receive_back_process(receive_back *back, const mb_cf32 *in, size_t n, float *audio);
size_t receive_back_output_bound(const receive_back *back, size_t n);

/** Both ends of reception and what lies between them but for the carrier recovery. */
typedef struct receive_path {
    mb_receive_settings settings;
    double baseband_rate_hz;
    mb_recovery_settings recovery; /* for the carrier recovery between the ends */
    mb_decimator *front;
    receive_back back;
    mb_cf32 *baseband; /* room for what WIDEBAND_CHUNK samples give */
} receive_path;

/** Checks all settings and makes the ends. Errors: ARGUMENT with the field, MEMORY; then there is nothing to
 * destroy. */
mb_status receive_path_create(const mb_receive_settings *settings, receive_path *out);
void receive_path_destroy(receive_path *path);

#endif
