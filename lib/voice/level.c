#include "level.h"

#include <math.h>

static const double hop_s = 0.001;

/* The background is the lowest level lately: it is followed down fast and up slowly. */
static const double noise_fall_s = 0.05;
static const double noise_rise_db_per_s = 3.0;
static const double noise_start_db = -60.0;
static const double noise_least_db = -90.0;

/* Speech is what stands this far above the background; only speech moves the slow level. */
static const double speech_margin_db = 10.0;
static const double speech_start_db = -20.0;
static const double speech_rise_s = 0.1;

static const double least_db = -120.0;
static const double compressor_cut_db = 30.0;

static double share_of_way(double time_constant_s)
{
    return 1.0 - exp(-hop_s / time_constant_s);
}

void mb_level_start(mb_level *level, const mb_voice_settings *settings)
{
    *level = (mb_level){.settings = *settings, .hop = (size_t)lround(hop_s * settings->rate_hz)};
    level->noise_fall = share_of_way(noise_fall_s);
    level->speech_rise = share_of_way(fmin(speech_rise_s, settings->level_s));
    level->speech_fall = share_of_way(settings->level_s);
    level->attack = share_of_way(settings->attack_s);
    level->release = share_of_way(settings->release_s);
    mb_level_clear(level);
}

static void follow_noise(mb_level *level, double now_db)
{
    if (now_db < level->noise_db) {
        level->noise_db += level->noise_fall * (now_db - level->noise_db);
    } else {
        level->noise_db = fmin(now_db, level->noise_db + noise_rise_db_per_s * hop_s);
    }
    level->noise_db = fmax(level->noise_db, noise_least_db);
}

/* In pauses the slow level is held. */
static void follow_speech(mb_level *level, double now_db)
{
    if (now_db > level->noise_db + speech_margin_db) {
        double way_db = now_db - level->speech_db;
        level->speech_db += (way_db > 0.0 ? level->speech_rise : level->speech_fall) * way_db;
    }
}

/* What the compressor adds to a weak syllable and takes from a strong one. Never lifts the background. */
static double compressor_db(const mb_level *level)
{
    const mb_voice_settings *settings = &level->settings;
    double below_db = level->speech_db - level->syllable_db;
    double lift_db = (1.0 - 1.0 / settings->compression_ratio) *
                     fmax(-compressor_cut_db, fmin(below_db, -settings->compression_threshold_db));
    double above_noise_db = level->syllable_db - level->noise_db - speech_margin_db;

    return fmin(lift_db, fmax(0.0, above_noise_db));
}

static double wanted_gain(const mb_level *level)
{
    const mb_voice_settings *settings = &level->settings;

    if (!settings->conditioning) {
        return pow(10.0, settings->gain_db / 20.0);
    }
    double level_gain_db = 20.0 * log10(settings->peak) + settings->drive_db - level->speech_db;
    return pow(10.0, fmin(settings->max_gain_db, level_gain_db + compressor_db(level)) / 20.0);
}

static void finish_hop(mb_level *level)
{
    double held = 0.0;

    level->peaks[level->oldest] = level->hop_peak;
    level->oldest = (level->oldest + 1) % MB_LEVEL_HOPS;
    for (size_t i = 0; i < MB_LEVEL_HOPS; i++) {
        held = fmax(held, level->peaks[i]);
    }
    double now_db = held > 0.0 ? fmax(least_db, 20.0 * log10(held)) : least_db;
    follow_noise(level, now_db);
    follow_speech(level, now_db);
    double way_db = now_db - level->syllable_db;
    level->syllable_db += (way_db > 0.0 ? level->attack : level->release) * way_db;
    level->gain = wanted_gain(level);
    level->position = 0;
    level->hop_peak = 0.0;
}

double mb_level_next(mb_level *level, double sample)
{
    level->hop_peak = fmax(level->hop_peak, fabs(sample));
    if (++level->position == level->hop) {
        finish_hop(level);
    }
    return level->gain;
}

void mb_level_clear(mb_level *level)
{
    level->position = level->oldest = 0;
    level->hop_peak = 0.0;
    for (size_t i = 0; i < MB_LEVEL_HOPS; i++) {
        level->peaks[i] = 0.0;
    }
    level->speech_db = speech_start_db;
    level->syllable_db = least_db;
    level->noise_db = noise_start_db;
    level->gain = wanted_gain(level);
}
