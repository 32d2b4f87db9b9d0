/* The table of keys: what may be set, what it may be, and what it means. The order is the order of the help.
 */
#include "keys.h"

#include <string.h>

const char *const config_switch_words[] = {"on", "off", NULL};
static const char *const words_off[] = {"off", NULL};
static const char *const words_auto[] = {"auto", NULL};
static const char *const words_random[] = {"random", NULL};
static const char *const words_look_ahead[] = {"off", "all", NULL};
static const char *const words_sideband[] = {"both", "upper", "lower", NULL};
static const char *const words_tracker[] = {"kalman", "costas", NULL};
static const char *const words_modulator[] = {"product", "balanced", "diode", "ring", NULL};
static const char *const words_interferer[] = {"off", "tone", NULL};
static const char *const words_fading[] = {"off",
                                           "gentle",
                                           "low-quiet",
                                           "low-moderate",
                                           "low-disturbed",
                                           "mid-quiet",
                                           "mid-moderate",
                                           "mid-disturbed",
                                           "mid-near-vertical",
                                           "high-quiet",
                                           "high-moderate",
                                           "high-disturbed",
                                           "own",
                                           NULL};

const config_section config_sections[] = {
    {"audio", "audio files and the audio written"},
    {"transmit", "from audio to the emission"},
    {"receive", "from IQ samples to audio"},
    {"channel", "what happens to the signal on its way"},
    {"station", "kept for the live station"},
    {"radio", "kept for the radio"},
    {"balance", "kept for nulling the carrier of a real transmitter"},
    {"trial", "kept for plans of many trials"},
    {"limits", "kept for the limits of what may be sent"},
};
const size_t config_section_total = sizeof config_sections / sizeof config_sections[0];

#define QUANTITY(unit_, low_, high_) .kind = CONFIG_QUANTITY, .unit = (unit_), .low = (low_), .high = (high_)
#define WHOLE(low_, high_)           QUANTITY(MB_UNIT_NUMBER, low_, high_), .whole = true
#define WORD(words_)                 .kind = CONFIG_WORD, .words = (words_)
#define SWITCH                       WORD(config_switch_words)
#define KEY(name_, initial_, ...)                                                                            \
    {                                                                                                        \
        .name = (name_), .initial = (initial_), __VA_ARGS__                                                  \
    }

/* clang-format off */
const config_key config_keys[] = {
    KEY("audio.channel", "1", WHOLE(1, 64),
        .meaning = "which channel of an audio file is taken"),
    KEY("audio.rate", "16 kHz", QUANTITY(MB_UNIT_HZ, 8e3, 192e3),
        .meaning = "sample rate of the audio written"),

    KEY("transmit.offset", "0 Hz", QUANTITY(MB_UNIT_HZ, -10e6, 10e6),
        .meaning = "frequency of the suppressed carrier from the centre of the output"),
    KEY("transmit.low_cut", "300 Hz", QUANTITY(MB_UNIT_HZ, 100, 1000),
        .meaning = "lower edge of the message"),
    KEY("transmit.high_cut", "2700 Hz", QUANTITY(MB_UNIT_HZ, 1000, 6000),
        .meaning = "upper edge of the message; half the bandwidth of the emission"),
    KEY("transmit.conditioning", "on", SWITCH,
        .meaning = "level control, compressor and peak limiter; off: band limit and gain only"),
    KEY("transmit.compression", "4", QUANTITY(MB_UNIT_NUMBER, 1, 20),
        .meaning = "compressor: dB at its input for one dB at its output"),
    KEY("transmit.gain", "0 dB", QUANTITY(MB_UNIT_DB, -60, 60),
        .meaning = "fixed gain of the message while conditioning is off"),
    KEY("transmit.peak", "-1 dBFS", QUANTITY(MB_UNIT_DBFS, -60, 0),
        .meaning = "highest envelope of the emission"),
    KEY("transmit.full_scale_power", "off", QUANTITY(MB_UNIT_W, 1e-3, 100e3), .words = words_off,
        .meaning = "power of an envelope at full scale, to give powers in watts too"),
    KEY("transmit.modulator", "product", WORD(words_modulator),
        .meaning = "ideal product, or what a physical modulator amounts to"),
    KEY("transmit.linear_mismatch", "0 %", QUANTITY(MB_UNIT_PERCENT, -50, 50),
        .meaning = "balanced, diode: difference of the linear terms of the two devices"),
    KEY("transmit.quadratic_mismatch", "0 %", QUANTITY(MB_UNIT_PERCENT, -50, 50),
        .meaning = "balanced: difference of the square-law terms of the two devices"),
    KEY("transmit.transformer_imbalance", "0 %", QUANTITY(MB_UNIT_PERCENT, -50, 50),
        .meaning = "diode, ring: imbalance of the transformer halves"),
    KEY("transmit.switch_duty", "50 %", QUANTITY(MB_UNIT_PERCENT, 10, 90),
        .meaning = "ring: part of a carrier period for which the switch conducts"),
    KEY("transmit.leak", "off", QUANTITY(MB_UNIT_DBC, -200, 40), .words = words_off,
        .meaning = "carrier left in the emission, over both sidebands of a full-scale sine"),
    KEY("transmit.leak_phase", "0 deg", QUANTITY(MB_UNIT_DEGREE, -360, 360),
        .meaning = "phase of that leak against the suppressed carrier"),
    KEY("transmit.iq_gain", "0 dB", QUANTITY(MB_UNIT_DB, -20, 20),
        .meaning = "gain of the quadrature rail over the in-phase rail"),
    KEY("transmit.iq_phase", "0 deg", QUANTITY(MB_UNIT_DEGREE, -80, 80),
        .meaning = "how far the rails are from 90 degrees apart"),
    KEY("transmit.dc_i", "0 %", QUANTITY(MB_UNIT_PERCENT, -100, 100),
        .meaning = "DC added to the in-phase rail, of full scale"),
    KEY("transmit.dc_q", "0 %", QUANTITY(MB_UNIT_PERCENT, -100, 100),
        .meaning = "DC added to the quadrature rail, of full scale"),

    KEY("receive.baseband_rate", "16 kHz", QUANTITY(MB_UNIT_HZ, 12e3, 48e3),
        .meaning = "sample rate of the receiver inside"),
    KEY("receive.offset", "0 Hz", QUANTITY(MB_UNIT_HZ, -10e6, 10e6),
        .meaning = "where to look for the suppressed carrier, from the centre of the input"),
    KEY("receive.span", "1 kHz", QUANTITY(MB_UNIT_HZ, 50, 9.6e3),
        .meaning = "how far from there, to both sides"),
    KEY("receive.look_ahead", "60 ms", QUANTITY(MB_UNIT_S, 0, 5), .words = words_look_ahead,
        .meaning = "how much later signal helps the tracker; all: the whole recording"),
    KEY("receive.tracker", "kalman", WORD(words_tracker),
        .meaning = "estimator of block phases, or a Costas loop for comparison"),
    KEY("receive.loop_bandwidth", "5 Hz", QUANTITY(MB_UNIT_HZ, 0.5, 200),
        .meaning = "costas: one-sided noise bandwidth of the loop"),
    KEY("receive.damping", "0.7071", QUANTITY(MB_UNIT_NUMBER, 0.3, 3),
        .meaning = "costas: damping of the loop"),
    KEY("receive.low_cut", "250 Hz", QUANTITY(MB_UNIT_HZ, 50, 600),
        .meaning = "lowest audio frequency kept flat"),
    KEY("receive.high_cut", "2750 Hz", QUANTITY(MB_UNIT_HZ, 1000, 6000),
        .meaning = "highest audio frequency kept flat"),
    KEY("receive.sideband", "both", WORD(words_sideband),
        .meaning = "both sidebands, or only one where the other is disturbed (3 dB less in noise)"),
    KEY("receive.gain_control", "off", SWITCH,
        .meaning = "hold the audio at receive.level"),
    KEY("receive.squelch", "off", SWITCH,
        .meaning = "mute while the lock quality is low"),
    KEY("receive.squelch_quality", "0.3", QUANTITY(MB_UNIT_NUMBER, 0, 1),
        .meaning = "lock quality below which the squelch mutes"),
    KEY("receive.level", "-20 dBFS", QUANTITY(MB_UNIT_DBFS, -60, -6),
        .meaning = "level of active speech that the gain control aims at"),

    KEY("channel.noise", "off", QUANTITY(MB_UNIT_DB, -20, 100), .words = words_off,
        .meaning = "SNR: both sidebands in active speech over the noise in 2 x 2700 Hz"),
    KEY("channel.signal_level", "auto", QUANTITY(MB_UNIT_DBFS, -120, 20), .words = words_auto,
        .meaning = "level of the incoming signal in active speech that the SNR refers to; auto: measured"),
    KEY("channel.offset", "0 Hz", QUANTITY(MB_UNIT_HZ, -10e6, 10e6),
        .meaning = "shift of frequency"),
    KEY("channel.drift", "0 Hz/s", QUANTITY(MB_UNIT_HZ_PER_S, -1000, 1000),
        .meaning = "change of that shift with time"),
    KEY("channel.phase", "0 deg", QUANTITY(MB_UNIT_DEGREE, -360, 360), .words = words_random,
        .meaning = "phase at the first sample; random: from the seed"),
    KEY("channel.phase_noise", "0 Hz", QUANTITY(MB_UNIT_HZ, 0, 1000),
        .meaning = "line width of an oscillator whose phase walks at random"),
    KEY("channel.leak", "off", QUANTITY(MB_UNIT_DBC, -200, 40), .words = words_off,
        .meaning = "carrier added, over the power of both sidebands in active speech"),
    KEY("channel.fading", "off", WORD(words_fading),
        .meaning = "two paths after ITU-R F.1487; gentle: weak second path; own: the next three keys"),
    KEY("channel.delay", "0 ms", QUANTITY(MB_UNIT_S, 0, 0.02),
        .meaning = "fading = own: delay of the second path"),
    KEY("channel.spread", "0 Hz", QUANTITY(MB_UNIT_HZ, 0, 50),
        .meaning = "fading = own: Doppler spread, two standard deviations"),
    KEY("channel.second_path", "0 dB", QUANTITY(MB_UNIT_DB, -60, 20),
        .meaning = "fading = own: power of the second path over the first"),
    KEY("channel.gain", "0 dB", QUANTITY(MB_UNIT_DB, -150, 60),
        .meaning = "gain of the signal; noise and interferer follow it"),
    KEY("channel.iq_gain", "0 dB", QUANTITY(MB_UNIT_DB, -20, 20),
        .meaning = "receiver: gain of the quadrature rail over the in-phase rail"),
    KEY("channel.iq_phase", "0 deg", QUANTITY(MB_UNIT_DEGREE, -80, 80),
        .meaning = "receiver: how far the rails are from 90 degrees apart"),
    KEY("channel.dc", "off", QUANTITY(MB_UNIT_DBFS, -150, 0), .words = words_off,
        .meaning = "receiver: DC in the middle of the tuned band"),
    KEY("channel.impulses", "0 Hz", QUANTITY(MB_UNIT_HZ, 0, 10e3),
        .meaning = "mean rate of impulses"),
    KEY("channel.impulse_level", "20 dB", QUANTITY(MB_UNIT_DB, -60, 100),
        .meaning = "peak power of an impulse, in 2 x 2700 Hz, over the signal in active speech"),
    KEY("channel.interferer", "off", WORD(words_interferer),
        .meaning = "another signal in the band"),
    KEY("channel.interferer_offset", "1 kHz", QUANTITY(MB_UNIT_HZ, -10e6, 10e6),
        .meaning = "its frequency from the centre"),
    KEY("channel.interferer_level", "0 dB", QUANTITY(MB_UNIT_DB, -100, 100),
        .meaning = "its power over the signal in active speech"),
    KEY("channel.quantise", "0", WHOLE(0, 16),
        .meaning = "bits each rail is quantised to, full scale clipped; 0: not at all"),
    KEY("channel.gap_at", "0 s", QUANTITY(MB_UNIT_S, 0, 1e6),
        .meaning = "when a gap in the signal begins"),
    KEY("channel.gap_length", "0 s", QUANTITY(MB_UNIT_S, 0, 600),
        .meaning = "how long it lasts; 0: no gap"),
    KEY("channel.step_at", "0 s", QUANTITY(MB_UNIT_S, 0, 1e6),
        .meaning = "when the level changes in one step"),
    KEY("channel.step_level", "0 dB", QUANTITY(MB_UNIT_DB, -100, 100),
        .meaning = "by how much; 0: no step"),
};
/* clang-format on */
const size_t config_key_total = sizeof config_keys / sizeof config_keys[0];

const config_relation config_relations[] = {
    {"transmit.high_cut", "transmit.low_cut", 1.0, 500.0},
    {"audio.rate", "receive.high_cut", 2.0, 0.0},
};
const size_t config_relation_total = sizeof config_relations / sizeof config_relations[0];

int config_key_find(const char *name)
{
    for (size_t i = 0; i < config_key_total; i++) {
        if (strcmp(config_keys[i].name, name) == 0) {
            return (int)i;
        }
    }
    return -1;
}

bool config_section_known(const char *name)
{
    for (size_t i = 0; i < config_section_total; i++) {
        if (strcmp(config_sections[i].name, name) == 0) {
            return true;
        }
    }
    return false;
}

bool config_key_in(const config_key *key, const char *section)
{
    size_t length = strlen(section);

    return strncmp(key->name, section, length) == 0 && key->name[length] == '.';
}

bool config_section_has_keys(const char *section)
{
    for (size_t i = 0; i < config_key_total; i++) {
        if (config_key_in(&config_keys[i], section)) {
            return true;
        }
    }
    return false;
}
