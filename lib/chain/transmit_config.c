#include "mirrorband/chain.h"

#include <math.h>
#include <string.h>

/* Drive at which the physical modulators are taken: small enough for their linear law to hold. */
#define MESSAGE_PEAK_V 0.2
#define CARRIER_PEAK_V 1.0
/* The diodes are driven at the order of their thermal voltage. */
#define DIODE_MESSAGE_PEAK_V 0.01
#define DIODE_CARRIER_PEAK_V 0.1

static double share(const mb_config *config, const char *key)
{
    return 0.01 * mb_config_number(config, key);
}

static double radians(double degrees)
{
    return degrees * MB_PI / 180.0;
}

static mb_equivalent balanced(const mb_config *config)
{
    mb_balanced_settings settings = mb_balanced_settings_default();
    double linear = share(config, "transmit.linear_mismatch"),
           square = share(config, "transmit.quadratic_mismatch");

    settings.device[0].b *= 1.0 + 0.5 * linear;
    settings.device[1].b *= 1.0 - 0.5 * linear;
    settings.device[0].c *= 1.0 + 0.5 * square;
    settings.device[1].c *= 1.0 - 0.5 * square;
    return mb_balanced_equivalent(&settings, MESSAGE_PEAK_V, CARRIER_PEAK_V);
}

static mb_equivalent diode_pair(const mb_config *config)
{
    mb_diode_pair_settings settings = mb_diode_pair_settings_default();
    double linear = share(config, "transmit.linear_mismatch");

    settings.diode[0].saturation_current_a *= 1.0 + 0.5 * linear;
    settings.diode[1].saturation_current_a *= 1.0 - 0.5 * linear;
    settings.carrier_unbalance = share(config, "transmit.transformer_imbalance");
    return mb_diode_pair_equivalent(&settings, DIODE_MESSAGE_PEAK_V, DIODE_CARRIER_PEAK_V);
}

static mb_equivalent ring(const mb_config *config)
{
    mb_ring_modulator_settings settings = mb_ring_modulator_settings_default();

    settings.bias_v = mb_ring_modulator_bias_v(share(config, "transmit.switch_duty"), CARRIER_PEAK_V);
    settings.carrier_unbalance = share(config, "transmit.transformer_imbalance");
    return mb_ring_modulator_equivalent(&settings, MESSAGE_PEAK_V, CARRIER_PEAK_V);
}

static void choose_modulator(const mb_config *config, mb_transmit_settings *settings)
{
    settings->modulator = MB_MODULATOR_EQUIVALENT;
    if (mb_config_is(config, "transmit.modulator", "balanced")) {
        settings->equivalent = balanced(config);
    } else if (mb_config_is(config, "transmit.modulator", "diode")) {
        settings->equivalent = diode_pair(config);
    } else if (mb_config_is(config, "transmit.modulator", "ring")) {
        settings->equivalent = ring(config);
    } else {
        settings->modulator = MB_MODULATOR_PRODUCT;
    }
}

mb_status mb_transmit_settings_from_config(const mb_config *config, double audio_rate_hz, double rate_hz,
                                           mb_transmit_settings *settings)
{
    mb_transmit_settings s = mb_transmit_settings_default();

    s.audio_rate_hz = audio_rate_hz;
    s.rate_hz = rate_hz;
    s.offset_hz = mb_config_number(config, "transmit.offset");
    s.voice.low_hz = mb_config_number(config, "transmit.low_cut");
    s.voice.high_hz = mb_config_number(config, "transmit.high_cut");
    s.voice.look_ahead_s = fmin(fmax(s.voice.look_ahead_s, 3.0 / s.voice.low_hz), 0.015);
    s.voice.peak = sqrt(mb_db_power(mb_config_number(config, "transmit.peak")));
    s.voice.conditioning = mb_config_switch(config, "transmit.conditioning");
    s.voice.compression_ratio = mb_config_number(config, "transmit.compression");
    s.voice.gain_db = mb_config_number(config, "transmit.gain");
    s.product.leak_dbc = mb_config_number_or(config, "transmit.leak", -INFINITY);
    s.product.leak_phase_rad = radians(mb_config_number(config, "transmit.leak_phase"));
    s.product.iq_gain_db = mb_config_number(config, "transmit.iq_gain");
    s.product.iq_phase_deg = mb_config_number(config, "transmit.iq_phase");
    s.product.dc_re = share(config, "transmit.dc_i");
    s.product.dc_im = share(config, "transmit.dc_q");
    choose_modulator(config, &s);
    *settings = s;
    return MB_OK;
}
