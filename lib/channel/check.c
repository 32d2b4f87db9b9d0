#include "parts.h"

#include <math.h>

/* A double field with its allowed range. */
typedef struct field_range {
    const char *name;
    double value, low, high;
    const char *unit;
} field_range;

static mb_status check_all(const field_range *fields, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        mb_status status =
            mb_check_range(fields[i].name, fields[i].value, fields[i].low, fields[i].high, fields[i].unit);
        if (status != MB_OK) {
            return status;
        }
    }
    return MB_OK;
}

/* A level that may be switched off by an infinity of the given sign. */
static bool is_off(double value, double infinity)
{
    return isinf(value) && (value > 0.0) == (infinity > 0.0);
}

static mb_status check_signal(const mb_channel_settings *s)
{
    mb_status status = mb_check_range("rate_hz", s->rate_hz, 8e3, 20e6, "Hz");
    if (status != MB_OK) {
        return status;
    }
    double half = s->rate_hz / 2.0;
    const field_range fields[] = {
        {"signal_power", s->signal_power, 1e-12, 1e3, ""},
        {"audio_bandwidth_hz", s->audio_bandwidth_hz, 100.0, half, "Hz"},
        {"message_low_hz", s->message_low_hz, 0.0, s->audio_bandwidth_hz, "Hz"},
        {"carrier_hz", s->carrier_hz, -half, half, "Hz"},
        {"leak_dbc", is_off(s->leak_dbc, -1.0) ? 0.0 : s->leak_dbc, -200.0, 40.0, "dBc"},
        {"leak_phase_rad", s->leak_phase_rad, -2.0 * MB_PI, 2.0 * MB_PI, "rad"},
    };
    return check_all(fields, sizeof fields / sizeof fields[0]);
}

static mb_status check_fading(const mb_channel_settings *s)
{
    if (s->paths > 2) {
        return mb_fail(MB_ERROR_ARGUMENT, "paths", "paths must be 0 (no fading), 1 or 2; it is %u", s->paths);
    }
    const field_range fields[] = {
        {"delay_s", s->delay_s, 0.0, 0.1, "s"},
        {"doppler_spread_hz", s->doppler_spread_hz == 0.0 ? 1.0 : s->doppler_spread_hz, 1e-4, 100.0,
         "Hz (or 0)"},
        {"second_path_db", s->second_path_db, -100.0, 100.0, "dB"},
    };
    return check_all(fields, sizeof fields / sizeof fields[0]);
}

static mb_status check_oscillator(const mb_channel_settings *s)
{
    double half = s->rate_hz / 2.0;
    const field_range fields[] = {
        {"offset_hz", s->offset_hz, -half, half, "Hz"},
        {"drift_hz_per_s", s->drift_hz_per_s, -1e4, 1e4, "Hz/s"},
        {"phase_rad", s->phase_rad, -1e3, 1e3, "rad"},
        {"phase_noise_linewidth_hz", s->phase_noise_linewidth_hz, 0.0, s->rate_hz / 100.0, "Hz"},
    };
    return check_all(fields, sizeof fields / sizeof fields[0]);
}

static mb_status check_level(const mb_channel_settings *s)
{
    const field_range fields[] = {
        {"gain_db", s->gain_db, -200.0, 200.0, "dB"},
        {"level_step_at_s", s->level_step_at_s, 0.0, 1e9, "s"},
        {"level_step_db", s->level_step_db, -200.0, 200.0, "dB"},
        {"gap_at_s", s->gap_at_s, 0.0, 1e9, "s"},
        {"gap_length_s", s->gap_length_s, 0.0, 1e9, "s"},
    };
    return check_all(fields, sizeof fields / sizeof fields[0]);
}

static mb_status check_disturbances(const mb_channel_settings *s)
{
    double half = s->rate_hz / 2.0;

    if (s->interferer != MB_INTERFERER_NONE && s->interferer != MB_INTERFERER_TONE) {
        return mb_fail(MB_ERROR_ARGUMENT, "interferer", "interferer must be none or tone; it is %d",
                       (int)s->interferer);
    }
    const field_range fields[] = {
        {"interferer_offset_hz", s->interferer_offset_hz, -half, half, "Hz"},
        {"interferer_db", s->interferer_db, -200.0, 200.0, "dB"},
        {"noise_snr_db", is_off(s->noise_snr_db, 1.0) ? 0.0 : s->noise_snr_db, -100.0, 200.0, "dB"},
        {"impulse_rate_hz", s->impulse_rate_hz, 0.0, s->rate_hz / 10.0, "Hz"},
        {"impulse_db", s->impulse_db, -200.0, 200.0, "dB"},
    };
    return check_all(fields, sizeof fields / sizeof fields[0]);
}

static mb_status check_front(const mb_channel_settings *s)
{
    const field_range fields[] = {
        {"iq_gain_db", s->iq_gain_db, -20.0, 20.0, "dB"},
        {"iq_phase_deg", s->iq_phase_deg, -80.0, 80.0, "deg"},
        {"dc_dbfs", is_off(s->dc_dbfs, -1.0) ? 0.0 : s->dc_dbfs, -200.0, 20.0, "dBFS"},
        {"dc_phase_rad", s->dc_phase_rad, -2.0 * MB_PI, 2.0 * MB_PI, "rad"},
        {"clip_level", is_off(s->clip_level, 1.0) ? 1.0 : s->clip_level, 1e-6, 1e6, ""},
        {"quantise_bits", s->quantise_bits == 0 ? 2.0 : (double)s->quantise_bits, 2.0, 24.0, "bits (or 0)"},
    };
    return check_all(fields, sizeof fields / sizeof fields[0]);
}

mb_status channel_check(const mb_channel_settings *settings)
{
    mb_status (*const checks[])(const mb_channel_settings *) = {
        check_signal, check_fading, check_oscillator, check_level, check_disturbances, check_front,
    };

    for (size_t i = 0; i < sizeof checks / sizeof checks[0]; i++) {
        mb_status status = checks[i](settings);
        if (status != MB_OK) {
            return status;
        }
    }
    return MB_OK;
}
