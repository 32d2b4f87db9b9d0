/* Every key of the config reaches the setting it is meant for. */
#include "check.h"
#include "mirrorband/chain.h"

/* An assignment and the field it must set, as a number of some kind. */
typedef enum field_kind { REAL, SWITCH, CHOICE } field_kind;

typedef struct mapping {
    const char *assignment;
    size_t offset;
    field_kind kind;
    double value;
} mapping;

#define FIELD(type, name) offsetof(type, name)
#define COUNT_OF(rows)    (sizeof(rows) / sizeof(rows)[0])

static double field_value(const void *settings, const mapping *m)
{
    const char *at = (const char *)settings + m->offset;
    double real = 0.0;
    bool on = false;
    int choice = 0;

    switch (m->kind) {
    case REAL:
        memcpy(&real, at, sizeof real);
        return real;
    case SWITCH:
        memcpy(&on, at, sizeof on);
        return on ? 1.0 : 0.0;
    case CHOICE:
        memcpy(&choice, at, sizeof choice);
        return (double)choice;
    }
    return NAN;
}

static void assert_mapped(const void *settings, const mapping *m)
{
    double value = field_value(settings, m);

    if (!(fabs(value - m->value) <= 1e-9 * fmax(1.0, fabs(m->value)))) {
        fail_msg("%s gives %.12g, expected %.12g", m->assignment, value, m->value);
    }
}

/* A config with one assignment, or none when it is NULL. */
static mb_config *config_with(const char *assignment)
{
    mb_config *config = NULL;

    assert_ok(mb_config_create(&config));
    if (assignment != NULL) {
        assert_ok(mb_config_set(config, assignment));
    }
    return config;
}

static void every_key_of_transmit_reaches_its_field(void **state)
{
    static const mapping rows[] = {
        {"transmit.offset=12.5 kHz", FIELD(mb_transmit_settings, offset_hz), REAL, 12500.0},
        {"transmit.low_cut=350 Hz", FIELD(mb_transmit_settings, voice.low_hz), REAL, 350.0},
        {"transmit.high_cut=3 kHz", FIELD(mb_transmit_settings, voice.high_hz), REAL, 3000.0},
        {"transmit.conditioning=off", FIELD(mb_transmit_settings, voice.conditioning), SWITCH, 0.0},
        {"transmit.conditioning=on", FIELD(mb_transmit_settings, voice.conditioning), SWITCH, 1.0},
        {"transmit.compression=7", FIELD(mb_transmit_settings, voice.compression_ratio), REAL, 7.0},
        {"transmit.gain=-6 dB", FIELD(mb_transmit_settings, voice.gain_db), REAL, -6.0},
        {"transmit.peak=-20 dBFS", FIELD(mb_transmit_settings, voice.peak), REAL, 0.1},
        {"transmit.leak=-43 dBc", FIELD(mb_transmit_settings, product.leak_dbc), REAL, -43.0},
        {"transmit.leak_phase=90 deg", FIELD(mb_transmit_settings, product.leak_phase_rad), REAL,
         MB_PI / 2.0},
        {"transmit.iq_gain=0.5 dB", FIELD(mb_transmit_settings, product.iq_gain_db), REAL, 0.5},
        {"transmit.iq_phase=3 deg", FIELD(mb_transmit_settings, product.iq_phase_deg), REAL, 3.0},
        {"transmit.dc_i=2 %", FIELD(mb_transmit_settings, product.dc_re), REAL, 0.02},
        {"transmit.dc_q=-3 %", FIELD(mb_transmit_settings, product.dc_im), REAL, -0.03},
        {"transmit.modulator=product", FIELD(mb_transmit_settings, modulator), CHOICE, MB_MODULATOR_PRODUCT},
        {"transmit.modulator=balanced", FIELD(mb_transmit_settings, modulator), CHOICE,
         MB_MODULATOR_EQUIVALENT},
        {"transmit.modulator=diode", FIELD(mb_transmit_settings, modulator), CHOICE, MB_MODULATOR_EQUIVALENT},
        {"transmit.modulator=ring", FIELD(mb_transmit_settings, modulator), CHOICE, MB_MODULATOR_EQUIVALENT},
    };

    (void)state;
    for (size_t i = 0; i < COUNT_OF(rows); i++) {
        mb_config *config = config_with(rows[i].assignment);
        mb_transmit_settings settings;
        assert_ok(mb_transmit_settings_from_config(config, 44100.0, 96000.0, &settings));
        assert_mapped(&settings, &rows[i]);
        assert_near(settings.audio_rate_hz, 44100.0, 0.0);
        assert_near(settings.rate_hz, 96000.0, 0.0);
        mb_config_destroy(config);
    }
}

/* Leak and even-order coefficient of the modulator that a config gives. */
static mb_equivalent equivalent_of(const char *modulator, const char *mismatch)
{
    mb_config *config = config_with(modulator);
    mb_transmit_settings settings;

    assert_ok(mb_config_set(config, mismatch));
    assert_ok(mb_transmit_settings_from_config(config, 48000.0, 240000.0, &settings));
    mb_config_destroy(config);
    return settings.equivalent;
}

/* A matched modulator leaks nothing; each mismatch shows where the closed forms say (FACTS.md B): b in the
 * carrier, c in no leak but in the even order, the transformer and the duty of the switch in theirs. */
static void every_mismatch_reaches_its_modulator(void **state)
{
    (void)state;
    assert_at_most(equivalent_of("transmit.modulator=balanced", "transmit.linear_mismatch=0 %").leak_dbc,
                   -150.0);
    assert_at_most(equivalent_of("transmit.modulator=diode", "transmit.linear_mismatch=0 %").leak_dbc,
                   -150.0);
    assert_at_most(equivalent_of("transmit.modulator=ring", "transmit.switch_duty=50 %").leak_dbc, -150.0);
    double two_percent =
        equivalent_of("transmit.modulator=balanced", "transmit.linear_mismatch=2 %").leak_dbc;
    double one_percent =
        equivalent_of("transmit.modulator=balanced", "transmit.linear_mismatch=1 %").leak_dbc;
    assert_near(two_percent - one_percent, 6.0206, 0.01);
    assert_at_least(equivalent_of("transmit.modulator=diode", "transmit.linear_mismatch=2 %").leak_dbc,
                    -80.0);
    assert_at_least(equivalent_of("transmit.modulator=diode", "transmit.transformer_imbalance=2 %").leak_dbc,
                    -80.0);
    double level =
        equivalent_of("transmit.modulator=balanced", "transmit.quadratic_mismatch=0 %").sideband_gain;
    double same =
        equivalent_of("transmit.modulator=balanced", "transmit.quadratic_mismatch=10 %").sideband_gain;
    assert_near(same / level, 1.0, 1e-9); /* c1 + c2 stays: half is added to one and taken from the other */
    mb_equivalent duty = equivalent_of("transmit.modulator=ring", "transmit.switch_duty=55 %");
    mb_equivalent even = equivalent_of("transmit.modulator=ring", "transmit.switch_duty=50 %");
    assert_near(duty.sideband_gain / even.sideband_gain, sin(0.55 * MB_PI), 0.01); /* (4/pi) sin(pi D) */
    assert_true(fabs(duty.feedthrough - even.feedthrough) > 0.01);                 /* 2 D - 1 leaks through */
}

static void every_key_of_receive_reaches_its_field(void **state)
{
    static const mapping rows[] = {
        {"receive.offset=-20 kHz", FIELD(mb_receive_settings, offset_hz), REAL, -20000.0},
        {"receive.span=2.5 kHz", FIELD(mb_receive_settings, span_hz), REAL, 2500.0},
        {"receive.baseband_rate=24 kHz", FIELD(mb_receive_settings, baseband_rate_hz), REAL, 24000.0},
        {"audio.rate=44.1 kHz", FIELD(mb_receive_settings, audio_rate_hz), REAL, 44100.0},
        {"receive.low_cut=200 Hz", FIELD(mb_receive_settings, low_hz), REAL, 200.0},
        {"receive.high_cut=3 kHz", FIELD(mb_receive_settings, high_hz), REAL, 3000.0},
        {"receive.sideband=both", FIELD(mb_receive_settings, sideband), CHOICE, MB_SIDEBAND_BOTH},
        {"receive.sideband=upper", FIELD(mb_receive_settings, sideband), CHOICE, MB_SIDEBAND_UPPER},
        {"receive.sideband=lower", FIELD(mb_receive_settings, sideband), CHOICE, MB_SIDEBAND_LOWER},
        {"receive.look_ahead=300 ms", FIELD(mb_receive_settings, look_ahead_s), REAL, 0.3},
        {"receive.look_ahead=off", FIELD(mb_receive_settings, look_ahead_s), REAL, 0.0},
        {"receive.look_ahead=all", FIELD(mb_receive_settings, look_ahead_s), REAL, 0.0},
        {"receive.tracker=kalman", FIELD(mb_receive_settings, tracker), CHOICE, MB_TRACKER_KALMAN},
        {"receive.tracker=costas", FIELD(mb_receive_settings, tracker), CHOICE, MB_TRACKER_COSTAS},
        {"receive.loop_bandwidth=12 Hz", FIELD(mb_receive_settings, loop_bandwidth_hz), REAL, 12.0},
        {"receive.damping=1", FIELD(mb_receive_settings, damping), REAL, 1.0},
        {"receive.gain_control=on", FIELD(mb_receive_settings, gain_control), SWITCH, 1.0},
        {"receive.gain_control=off", FIELD(mb_receive_settings, gain_control), SWITCH, 0.0},
        {"receive.level=-18 dBFS", FIELD(mb_receive_settings, level_dbfs), REAL, -18.0},
        {"receive.squelch=on", FIELD(mb_receive_settings, squelch), SWITCH, 1.0},
        {"receive.squelch_quality=0.45", FIELD(mb_receive_settings, squelch_quality), REAL, 0.45},
    };

    (void)state;
    for (size_t i = 0; i < COUNT_OF(rows); i++) {
        mb_config *config = config_with(rows[i].assignment);
        mb_receive_settings settings;
        assert_ok(mb_receive_settings_from_config(config, 96000.0, &settings));
        assert_mapped(&settings, &rows[i]);
        assert_near(settings.rate_hz, 96000.0, 0.0);
        assert_int_equal(mb_look_ahead_all(config),
                         strcmp(rows[i].assignment, "receive.look_ahead=all") == 0);
        mb_config_destroy(config);
    }
}

static void every_key_of_channel_reaches_its_field(void **state)
{
    static const mapping rows[] = {
        {"channel.noise=15 dB", FIELD(mb_channel_settings, noise_snr_db), REAL, 15.0},
        {"channel.signal_level=-20 dBFS", FIELD(mb_channel_settings, signal_power), REAL, 0.01},
        {"channel.signal_level=auto", FIELD(mb_channel_settings, signal_power), REAL, 0.25},
        {"channel.offset=137Hz", FIELD(mb_channel_settings, offset_hz), REAL, 137.0},
        {"channel.offset=137 Hz", FIELD(mb_channel_settings, offset_hz), REAL, 137.0},
        {"channel.drift=0.2 Hz/s", FIELD(mb_channel_settings, drift_hz_per_s), REAL, 0.2},
        {"channel.phase=90 deg", FIELD(mb_channel_settings, phase_rad), REAL, MB_PI / 2.0},
        {"channel.phase=random", FIELD(mb_channel_settings, random_phase), SWITCH, 1.0},
        {"channel.phase_noise=2 Hz", FIELD(mb_channel_settings, phase_noise_linewidth_hz), REAL, 2.0},
        {"channel.leak=-40 dBc", FIELD(mb_channel_settings, leak_dbc), REAL, -40.0},
        {"channel.gain=-50 dB", FIELD(mb_channel_settings, gain_db), REAL, -50.0},
        {"channel.iq_gain=0.5 dB", FIELD(mb_channel_settings, iq_gain_db), REAL, 0.5},
        {"channel.iq_phase=3 deg", FIELD(mb_channel_settings, iq_phase_deg), REAL, 3.0},
        {"channel.dc=-40 dBFS", FIELD(mb_channel_settings, dc_dbfs), REAL, -40.0},
        {"channel.impulses=10 Hz", FIELD(mb_channel_settings, impulse_rate_hz), REAL, 10.0},
        {"channel.impulse_level=30 dB", FIELD(mb_channel_settings, impulse_db), REAL, 30.0},
        {"channel.interferer=tone", FIELD(mb_channel_settings, interferer), CHOICE, MB_INTERFERER_TONE},
        {"channel.interferer_offset=700 Hz", FIELD(mb_channel_settings, interferer_offset_hz), REAL, 700.0},
        {"channel.interferer_level=10 dB", FIELD(mb_channel_settings, interferer_db), REAL, 10.0},
        {"channel.quantise=8", FIELD(mb_channel_settings, quantise_bits), CHOICE, 8.0},
        {"channel.gap_at=3 s", FIELD(mb_channel_settings, gap_at_s), REAL, 3.0},
        {"channel.gap_length=250 ms", FIELD(mb_channel_settings, gap_length_s), REAL, 0.25},
        {"channel.step_at=5 s", FIELD(mb_channel_settings, level_step_at_s), REAL, 5.0},
        {"channel.step_level=-30 dB", FIELD(mb_channel_settings, level_step_db), REAL, -30.0},
        {"channel.fading=gentle", FIELD(mb_channel_settings, paths), CHOICE, 2.0},
        {"channel.fading=mid-moderate", FIELD(mb_channel_settings, delay_s), REAL, 0.001},
        {"channel.fading=mid-moderate", FIELD(mb_channel_settings, doppler_spread_hz), REAL, 0.5},
        {"channel.fading=off", FIELD(mb_channel_settings, paths), CHOICE, 0.0},
        {"transmit.offset=5 kHz", FIELD(mb_channel_settings, carrier_hz), REAL, 5000.0},
    };

    (void)state;
    for (size_t i = 0; i < COUNT_OF(rows); i++) {
        mb_config *config = config_with(rows[i].assignment);
        mb_channel_settings settings;
        assert_ok(mb_channel_settings_from_config(config, 48000.0, 77, 0.25, &settings));
        assert_mapped(&settings, &rows[i]);
        assert_near(settings.rate_hz, 48000.0, 0.0);
        assert_int_equal(settings.seed, 77);
        mb_config_destroy(config);
    }
}

/* delay, spread and second_path count with fading = own, and only then. */
static void fading_of_ones_own_takes_delay_spread_and_second_path(void **state)
{
    static const char *const own[] = {"channel.delay=2 ms", "channel.spread=1.5 Hz",
                                      "channel.second_path=-6 dB"};
    mb_config *config = config_with(NULL);
    mb_channel_settings settings;

    (void)state;
    for (size_t i = 0; i < 3; i++) {
        assert_ok(mb_config_set(config, own[i]));
    }
    assert_ok(mb_channel_settings_from_config(config, 48000.0, 1, 0.1, &settings));
    assert_int_equal(settings.paths, 0);
    assert_ok(mb_config_set(config, "channel.fading=own"));
    assert_ok(mb_channel_settings_from_config(config, 48000.0, 1, 0.1, &settings));
    assert_int_equal(settings.paths, 2);
    assert_near(settings.delay_s, 0.002, 1e-12);
    assert_near(settings.doppler_spread_hz, 1.5, 1e-12);
    assert_near(settings.second_path_db, -6.0, 1e-12);
    mb_config_destroy(config);
}

/* What nobody set is the default of the chain, and all parts can be made from it. */
static void an_empty_config_gives_chains_that_can_be_made(void **state)
{
    mb_config *config = config_with(NULL);
    mb_transmit_settings transmit_settings;
    mb_receive_settings receive_settings;
    mb_channel_settings channel_settings;
    mb_transmit *transmit = NULL;
    mb_receive *receive = NULL;
    mb_channel *channel = NULL;

    (void)state;
    assert_ok(mb_transmit_settings_from_config(config, 48000.0, 240000.0, &transmit_settings));
    assert_near(transmit_settings.voice.low_hz, mb_transmit_settings_default().voice.low_hz, 0.0);
    assert_near(transmit_settings.voice.high_hz, mb_transmit_settings_default().voice.high_hz, 0.0);
    assert_true(transmit_settings.product.leak_dbc < -1e30);
    assert_ok(mb_transmit_create(&transmit_settings, &transmit));
    assert_ok(mb_receive_settings_from_config(config, 48000.0, &receive_settings));
    assert_near(receive_settings.look_ahead_s, mb_receive_settings_default().look_ahead_s, 1e-12);
    assert_near(receive_settings.span_hz, mb_receive_settings_default().span_hz, 0.0);
    assert_ok(mb_receive_create(&receive_settings, &receive));
    assert_ok(mb_channel_settings_from_config(config, 48000.0, 1, 0.1, &channel_settings));
    assert_ok(mb_channel_create(&channel_settings, &channel));
    mb_channel_destroy(channel);
    mb_receive_destroy(receive);
    mb_transmit_destroy(transmit);
    mb_config_destroy(config);
}

/* The ends of a key's range are settings that the parts take: no key promises what its stage refuses. */
static void the_ends_of_every_range_can_be_used(void **state)
{
    static const char *const transmits[] = {
        "transmit.low_cut=100 Hz", "transmit.low_cut=1 kHz",   "transmit.high_cut=6 kHz",
        "transmit.compression=1",  "transmit.compression=20",  "transmit.gain=-60 dB",
        "transmit.gain=60 dB",     "transmit.peak=-60 dBFS",   "transmit.peak=0 dBFS",
        "transmit.iq_gain=20 dB",  "transmit.iq_phase=80 deg", "transmit.dc_i=100 %",
        "transmit.leak=-200 dBc",  "transmit.leak=40 dBc",     "transmit.leak_phase=-360 deg",
    };
    static const char *const receives[] = {
        "receive.span=50 Hz",
        "receive.span=9.6 kHz",
        "receive.look_ahead=5 s",
        "receive.damping=0.3",
        "receive.damping=3",
        "receive.loop_bandwidth=0.5 Hz",
        "receive.loop_bandwidth=200 Hz",
        "receive.low_cut=50 Hz",
        "receive.low_cut=600 Hz",
        "receive.high_cut=1 kHz",
        "receive.high_cut=6 kHz",
        "receive.level=-60 dBFS",
        "receive.level=-6 dBFS",
        "receive.squelch_quality=1",
        "receive.baseband_rate=12 kHz",
        "receive.baseband_rate=48 kHz",
        "audio.rate=8 kHz",
        "audio.rate=192 kHz",
    };

    (void)state;
    for (size_t i = 0; i < COUNT_OF(transmits); i++) {
        mb_config *config = config_with(transmits[i]);
        mb_transmit_settings settings;
        mb_transmit *transmit = NULL;
        assert_ok(mb_transmit_settings_from_config(config, 48000.0, 240000.0, &settings));
        assert_ok(mb_transmit_create(&settings, &transmit));
        mb_transmit_destroy(transmit);
        mb_config_destroy(config);
    }
    for (size_t i = 0; i < COUNT_OF(receives); i++) {
        mb_config *config = config_with(receives[i]);
        mb_receive_settings settings;
        mb_receive *receive = NULL;
        assert_ok(mb_config_set(config, "receive.gain_control=on"));
        assert_ok(mb_receive_settings_from_config(config, 240000.0, &settings));
        assert_ok(mb_receive_create(&settings, &receive));
        mb_receive_destroy(receive);
        mb_config_destroy(config);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_key_of_transmit_reaches_its_field),
        cmocka_unit_test(every_mismatch_reaches_its_modulator),
        cmocka_unit_test(every_key_of_receive_reaches_its_field),
        cmocka_unit_test(every_key_of_channel_reaches_its_field),
        cmocka_unit_test(fading_of_ones_own_takes_delay_spread_and_second_path),
        cmocka_unit_test(an_empty_config_gives_chains_that_can_be_made),
        cmocka_unit_test(the_ends_of_every_range_can_be_used),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
