#include "mirrorband/carrier.h"

#include "follower.h"

mb_recovery_settings mb_recovery_settings_default(void)
{
    const double turn = 2.0 * MB_PI;

    return (mb_recovery_settings){
        .rate_hz = 16000.0,
        .span_hz = 1000.0,
        .low_cut_hz = 300.0,
        .high_cut_hz = 2700.0,
        .look_ahead_s = 0.06,
        .tracker = MB_TRACKER_KALMAN,
        .loop_bandwidth_hz = 5.0,
        .damping = 0.7071,
        .noise = {0.003, (turn * 0.01) * (turn * 0.01), (turn * 0.004) * (turn * 0.004)},
        .drift_sigma_hz_s = 0.15,
    };
}

mb_status mb_recovery_settings_check(const mb_recovery_settings *s)
{
    if (mb_check_range("rate_hz", s->rate_hz, 12000.0, 48000.0, "Hz") != MB_OK ||
        mb_check_range("span_hz", s->span_hz, 10.0, 0.2 * s->rate_hz, "Hz") != MB_OK ||
        mb_check_range("low_cut_hz", s->low_cut_hz, 50.0, 1000.0, "Hz") != MB_OK ||
        mb_check_range("high_cut_hz", s->high_cut_hz, 1000.0, 0.4 * s->rate_hz, "Hz") != MB_OK ||
        mb_check_range("look_ahead_s", s->look_ahead_s, 0.0, 5.0, "s") != MB_OK ||
        mb_check_range("loop_bandwidth_hz", s->loop_bandwidth_hz, 0.1, s->rate_hz / 50.0, "Hz") != MB_OK ||
        mb_check_range("damping", s->damping, 0.3, 3.0, "") != MB_OK ||
        mb_check_range("noise.phase_rad2_s", s->noise.phase_rad2_s, 0.0, 1e4, "rad^2/s") != MB_OK ||
        mb_check_range("noise.frequency_rad2_s3", s->noise.frequency_rad2_s3, 0.0, 1e6, "rad^2/s^3") !=
            MB_OK ||
        mb_check_range("noise.drift_rad2_s5", s->noise.drift_rad2_s5, 0.0, 1e6, "rad^2/s^5") != MB_OK ||
        mb_check_range("drift_sigma_hz_s", s->drift_sigma_hz_s, 0.0, 100.0, "Hz/s") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    if (s->tracker != MB_TRACKER_KALMAN && s->tracker != MB_TRACKER_COSTAS) {
        return mb_fail(MB_ERROR_ARGUMENT, "tracker",
                       "tracker must be MB_TRACKER_KALMAN or MB_TRACKER_COSTAS");
    }
    return MB_OK;
}
