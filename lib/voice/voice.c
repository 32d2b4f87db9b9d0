#include "mirrorband/voice.h"

#include <math.h>

#include "level.h"
#include "look_ahead.h"
#include "mirrorband/filter.h"

enum { CHUNK = 256 };

/* Edges of the band limit: how wide, and how far down beyond. */
static const double edge_hz = 200.0;
static const double edge_attenuation_db = 80.0;

/* The changing gain spreads the message by this much at most, as far as peaks between samples go. */
static const double spread_hz = 400.0;

/* Largest input magnitude taken; beyond it samples are clipped. */
static const float input_limit = 8.0f;

struct mb_voice {
    mb_voice_settings settings;
    mb_fir *band;
    mb_level level;
    mb_look_ahead ahead;
    double sample_peak; /* bound of the samples, which bounds what lies between them by settings.peak */
    float *delayed;     /* ring of the band-limited message */
    size_t delay, slot;
    double gain;
    double peak;
    uint64_t non_finite;
    float chunk[CHUNK];
};

mb_voice_settings mb_voice_settings_default(void)
{
    return (mb_voice_settings){
        .rate_hz = 48000.0,
        .low_hz = 300.0,
        .high_hz = 2700.0,
        .peak = 0.891,
        .conditioning = true,
        .gain_db = 0.0,
        .drive_db = 10.0,
        .level_s = 4.0,
        .max_gain_db = 30.0,
        .compression_ratio = 3.0,
        .compression_threshold_db = -20.0,
        .attack_s = 0.005,
        .release_s = 0.08,
        .look_ahead_s = 0.010,
    };
}

/* Ranges that depend on no other field. */
static mb_status check_settings(const mb_voice_settings *settings)
{
    const struct {
        const char *field;
        double value, low, high;
        const char *unit;
    } rows[] = {
        {"rate_hz", settings->rate_hz, 16000.0, 192000.0, "Hz"},
        {"low_hz", settings->low_hz, 100.0, 1000.0, "Hz"},
        {"high_hz", settings->high_hz, settings->low_hz + 500.0, fmin(6000.0, 0.4 * settings->rate_hz), "Hz"},
        {"peak", settings->peak, 0.001, 1.0, ""},
        {"gain_db", settings->gain_db, -60.0, 60.0, "dB"},
        {"drive_db", settings->drive_db, -20.0, 20.0, "dB"},
        {"level_s", settings->level_s, 0.1, 30.0, "s"},
        {"max_gain_db", settings->max_gain_db, 0.0, 60.0, "dB"},
        {"compression_ratio", settings->compression_ratio, 1.0, 20.0, ""},
        {"compression_threshold_db", settings->compression_threshold_db, -60.0, 0.0, "dB"},
        {"attack_s", settings->attack_s, 0.001, 1.0, "s"},
        {"release_s", settings->release_s, 0.01, 5.0, "s"},
        {"look_ahead_s", settings->look_ahead_s, 0.002, 0.015, "s"},
    };

    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        mb_status status =
            mb_check_range(rows[i].field, rows[i].value, rows[i].low, rows[i].high, rows[i].unit);
        if (status != MB_OK) {
            return status;
        }
    }
    return MB_OK;
}

static mb_status start_band(mb_voice *voice)
{
    mb_fir_settings fir = {0};
    float *taps = NULL;
    mb_status status =
        mb_design_bandpass(voice->settings.low_hz, voice->settings.high_hz, edge_hz, edge_attenuation_db,
                           voice->settings.rate_hz, &taps, &fir.tap_count);

    if (status == MB_OK) {
        fir.taps = taps;
        status = mb_fir_create(&fir, &voice->band);
        mb_release(taps);
    }
    return status;
}

static mb_status start_parts(mb_voice *voice)
{
    const mb_voice_settings *settings = &voice->settings;
    size_t length = (size_t)lround(settings->look_ahead_s * settings->rate_hz);
    mb_status status = start_band(voice);

    if (status == MB_OK) {
        status = mb_look_ahead_start(&voice->ahead, length);
    }
    if (status != MB_OK) {
        return status;
    }
    voice->delay = length - 1;
    voice->delayed = mb_allocate(voice->delay, sizeof *voice->delayed);
    if (voice->delayed == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "look_ahead_s", "no memory for %zu samples", voice->delay);
    }
    voice->sample_peak =
        settings->peak * (1.0 - 1e-6) * cos(MB_PI * (settings->high_hz + spread_hz) / settings->rate_hz);
    mb_level_start(&voice->level, settings);
    mb_voice_reset(voice);
    return MB_OK;
}

mb_status mb_voice_create(const mb_voice_settings *settings, mb_voice **out)
{
    *out = NULL;
    mb_status status = check_settings(settings);
    if (status != MB_OK) {
        return status;
    }
    mb_voice *voice = mb_allocate(1, sizeof *voice);
    if (voice == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the voice stage");
    }
    voice->settings = *settings;
    status = start_parts(voice);
    if (status != MB_OK) {
        mb_voice_destroy(voice);
        return status;
    }
    *out = voice;
    return MB_OK;
}

/* Copies finite samples of bounded magnitude into the chunk. */
static void take_in(mb_voice *voice, const float *in, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        voice->chunk[i] = in[i];
    }
    voice->non_finite += mb_scrub_f32(voice->chunk, count);
    for (size_t i = 0; i < count; i++) {
        voice->chunk[i] = fminf(input_limit, fmaxf(-input_limit, voice->chunk[i]));
    }
}

static float next_sample(mb_voice *voice, float sample)
{
    double magnitude = fabs((double)sample);
    double wanted = mb_level_next(&voice->level, (double)sample);

    if (magnitude * wanted > voice->sample_peak) {
        wanted = voice->sample_peak / magnitude;
    }
    voice->gain = mb_look_ahead_next(&voice->ahead, wanted);
    double result = (double)voice->delayed[voice->slot] * voice->gain;
    voice->delayed[voice->slot] = sample;
    voice->slot = voice->slot + 1 == voice->delay ? 0 : voice->slot + 1;
    voice->peak = fmax(voice->peak, fabs(result));
    return (float)result;
}

void mb_voice_process(mb_voice *voice, const float *in, size_t count, float *out)
{
    while (count > 0) {
        size_t now = count < CHUNK ? count : CHUNK;
        take_in(voice, in, now);
        mb_fir_process_f32(voice->band, voice->chunk, now, voice->chunk);
        for (size_t i = 0; i < now; i++) {
            out[i] = next_sample(voice, voice->chunk[i]);
        }
        in += now;
        out += now;
        count -= now;
    }
}

size_t mb_voice_delay_samples(const mb_voice *voice)
{
    return mb_fir_delay_samples(voice->band) + voice->delay;
}

mb_voice_levels mb_voice_state(const mb_voice *voice)
{
    double gain_db = 20.0 * log10(fmax(voice->gain, 1e-20));

    return (mb_voice_levels){
        .gain_db = gain_db,
        .limiting_db = fmax(0.0, 20.0 * log10(voice->level.gain) - gain_db),
        .speech_level_db = voice->level.speech_db,
        .noise_level_db = voice->level.noise_db,
        .peak = voice->peak,
        .non_finite = voice->non_finite,
    };
}

void mb_voice_reset(mb_voice *voice)
{
    mb_fir_reset(voice->band);
    mb_level_clear(&voice->level);
    mb_look_ahead_clear(&voice->ahead, voice->level.gain);
    for (size_t i = 0; i < voice->delay; i++) {
        voice->delayed[i] = 0.0f;
    }
    voice->slot = 0;
    voice->gain = voice->level.gain;
    voice->peak = 0.0;
    voice->non_finite = 0;
}

void mb_voice_destroy(mb_voice *voice)
{
    if (voice != NULL) {
        mb_fir_destroy(voice->band);
        mb_look_ahead_stop(&voice->ahead);
        mb_release(voice->delayed);
        mb_release(voice);
    }
}
