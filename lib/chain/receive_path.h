/** receive_path.h - what live and recorded reception share: wideband to baseband, derotated baseband to
 * audio. */
#ifndef CHAIN_RECEIVE_PATH_H
#define CHAIN_RECEIVE_PATH_H

#include "mirrorband/chain.h"
#include "mirrorband/filter.h"

enum { WIDEBAND_CHUNK = 8192, AUDIO_BLOCKS_PER_S = 100 };

/** Baseband rate for the settings, checked; 0 with a fault when the input rate is too low for them. */
double receive_baseband_rate_hz(const mb_receive_settings *settings);

/** Checks the fields that no part checks itself. */
mb_status receive_settings_check(const mb_receive_settings *settings);

/** Settings of the carrier recovery inside. */
mb_recovery_settings receive_recovery_settings(const mb_receive_settings *settings, double baseband_rate_hz);

/** The decimator in front. */
mb_status receive_front_create(const mb_receive_settings *settings, double baseband_rate_hz,
                               mb_decimator **out);

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

/** room: most baseband samples given at once. */
mb_status receive_back_create(const mb_receive_settings *settings, double baseband_rate_hz, size_t room,
                              receive_back *out);
void receive_back_destroy(receive_back *back);
void receive_back_reset(receive_back *back);

/** What the carrier recovery says about the samples that follow. */
void receive_back_report(receive_back *back, mb_carrier_mode mode, double lock_quality);

/** n <= room derotated samples to audio; returns how many came out. */
size_t receive_back_process(receive_back *back, const mb_cf32 *in, size_t n, float *audio);
size_t receive_back_output_bound(const receive_back *back, size_t n);

#endif
