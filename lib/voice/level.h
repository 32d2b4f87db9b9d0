/** level.h - slow level control and syllabic compressor: the gain a voice should have (voice room). */
#ifndef MB_VOICE_LEVEL_H
#define MB_VOICE_LEVEL_H

#include "mirrorband/voice.h"

enum { MB_LEVEL_HOPS = 5 };

/** Works in hops of 1 ms on the greatest magnitude of the last MB_LEVEL_HOPS of them, in dB of full scale. */
typedef struct mb_level {
    mb_voice_settings settings;
    size_t hop;      /* samples */
    size_t position; /* in the hop under way */
    size_t oldest;   /* of the peaks */
    double hop_peak;
    double peaks[MB_LEVEL_HOPS];
    double speech_db;   /* level of strong syllables */
    double noise_db;    /* level of the background */
    double syllable_db; /* level that the compressor sees: attack and release */
    double gain;        /* in force, as a factor */
    double noise_fall, speech_rise, speech_fall, attack, release; /* shares of the way a hop */
} mb_level;

void mb_level_start(mb_level *level, const mb_voice_settings *settings);

/** Takes the newest sample, returns the gain wanted for it. Stream. */
double mb_level_next(mb_level *level, double sample);

void mb_level_clear(mb_level *level);

#endif
