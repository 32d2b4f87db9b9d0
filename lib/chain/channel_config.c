#include "mirrorband/chain.h"

#include <math.h>

static double radians(double degrees)
{
    return degrees * MB_PI / 180.0;
}

static mb_status set_fading(const mb_config *config, mb_channel_settings *s)
{
    if (mb_config_is(config, "channel.fading", "off")) {
        return MB_OK;
    }
    if (mb_config_is(config, "channel.fading", "own")) {
        s->paths = 2;
        s->delay_s = mb_config_number(config, "channel.delay");
        s->doppler_spread_hz = mb_config_number(config, "channel.spread");
        s->second_path_db = mb_config_number(config, "channel.second_path");
        return MB_OK;
    }
    mb_status status = mb_channel_settings_fading(s, mb_config_word(config, "channel.fading"));
    if (mb_config_is(config, "channel.fading", "gentle")) {
        s->first_path_steady = true; /* a strong steady path and a weak one that moves about it */
    }
    return status;
}

mb_status mb_channel_settings_from_config(const mb_config *config, double rate_hz, uint64_t seed,
                                          double signal_power, mb_channel_settings *settings)
{
    mb_channel_settings s = mb_channel_settings_default();
    double level_db = mb_power_db(signal_power);

    s.rate_hz = rate_hz;
    s.seed = seed;
    s.signal_power = mb_db_power(mb_config_number_or(config, "channel.signal_level", level_db));
    s.carrier_hz = mb_config_number(config, "transmit.offset");
    s.noise_snr_db = mb_config_number_or(config, "channel.noise", INFINITY);
    s.offset_hz = mb_config_number(config, "channel.offset");
    s.drift_hz_per_s = mb_config_number(config, "channel.drift");
    s.random_phase = mb_config_is(config, "channel.phase", "random");
    s.phase_rad = radians(mb_config_number_or(config, "channel.phase", 0.0));
    s.phase_noise_linewidth_hz = mb_config_number(config, "channel.phase_noise");
    s.leak_dbc = mb_config_number_or(config, "channel.leak", -INFINITY);
    s.gain_db = mb_config_number(config, "channel.gain");
    s.iq_gain_db = mb_config_number(config, "channel.iq_gain");
    s.iq_phase_deg = mb_config_number(config, "channel.iq_phase");
    s.dc_dbfs = mb_config_number_or(config, "channel.dc", -INFINITY);
    s.impulse_rate_hz = mb_config_number(config, "channel.impulses");
    s.impulse_db = mb_config_number(config, "channel.impulse_level");
    s.interferer =
        mb_config_is(config, "channel.interferer", "tone") ? MB_INTERFERER_TONE : MB_INTERFERER_NONE;
    s.interferer_offset_hz = mb_config_number(config, "channel.interferer_offset");
    s.interferer_db = mb_config_number(config, "channel.interferer_level");
    s.quantise_bits = (unsigned)mb_config_number(config, "channel.quantise");
    s.gap_at_s = mb_config_number(config, "channel.gap_at");
    s.gap_length_s = mb_config_number(config, "channel.gap_length");
    s.level_step_at_s = mb_config_number(config, "channel.step_at");
    s.level_step_db = mb_config_number(config, "channel.step_level");
    s.events_keep_noise = false; /* the keys speak of the recording, not of the transmitter */
    mb_status status = set_fading(config, &s);
    if (status == MB_OK) {
        *settings = s;
    }
    return status;
}
