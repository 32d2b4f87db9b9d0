#include "mirrorband/chain.h"

bool mb_look_ahead_all(const mb_config *config)
{
    return mb_config_is(config, "receive.look_ahead", "all");
}

static mb_sideband sideband(const mb_config *config)
{
    if (mb_config_is(config, "receive.sideband", "upper")) {
        return MB_SIDEBAND_UPPER;
    }
    return mb_config_is(config, "receive.sideband", "lower") ? MB_SIDEBAND_LOWER : MB_SIDEBAND_BOTH;
}

mb_status mb_receive_settings_from_config(const mb_config *config, double rate_hz,
                                          mb_receive_settings *settings)
{
    mb_receive_settings s = mb_receive_settings_default();

    s.rate_hz = rate_hz;
    s.offset_hz = mb_config_number(config, "receive.offset");
    s.span_hz = mb_config_number(config, "receive.span");
    s.baseband_rate_hz = mb_config_number(config, "receive.baseband_rate");
    s.audio_rate_hz = mb_config_number(config, "audio.rate");
    s.low_hz = mb_config_number(config, "receive.low_cut");
    s.high_hz = mb_config_number(config, "receive.high_cut");
    s.sideband = sideband(config);
    s.look_ahead_s = mb_config_number_or(config, "receive.look_ahead", 0.0);
    s.tracker = mb_config_is(config, "receive.tracker", "costas") ? MB_TRACKER_COSTAS : MB_TRACKER_KALMAN;
    s.loop_bandwidth_hz = mb_config_number(config, "receive.loop_bandwidth");
    s.damping = mb_config_number(config, "receive.damping");
    s.gain_control = mb_config_switch(config, "receive.gain_control");
    s.level_dbfs = mb_config_number(config, "receive.level");
    s.squelch = mb_config_switch(config, "receive.squelch");
    s.squelch_quality = mb_config_number(config, "receive.squelch_quality");
    *settings = s;
    return MB_OK;
}
