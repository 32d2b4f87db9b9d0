/**
 * detect.h - from derotated baseband to audio: coherent detection, gain control, squelch.
 */
#ifndef MIRRORBAND_DETECT_H
#define MIRRORBAND_DETECT_H

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- coherent detector -----------------------------------------------------------------------------------
 */

typedef enum mb_sideband {
    MB_SIDEBAND_BOTH,  /* the in-phase arm: both sidebands add in voltage, their noise in power */
    MB_SIDEBAND_UPPER, /* what lies above the carrier only; 3 dB less in white noise */
    MB_SIDEBAND_LOWER
} mb_sideband;

typedef struct mb_coherent_settings {
    double rate_hz;       /* of baseband and audio, 8 kHz to 192 kHz */
    double low_hz;        /* audio is flat from here, 50 to 1000 Hz */
    double high_hz;       /* to here, 1000 Hz to 0.45 rate */
    double transition_hz; /* and 60 dB down this much farther out, 30 to 1000 Hz; low_hz where that is less */
    mb_sideband sideband;
} mb_coherent_settings;

typedef struct mb_coherent mb_coherent;

/** Settings for 16 kHz, 250 to 2750 Hz, both sidebands. Thread: any. */
MB_API mb_coherent_settings mb_coherent_settings_default(void);

/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_coherent_create(const mb_coherent_settings *settings, mb_coherent **out);

/**
 * n derotated samples in, n audio samples out, mb_coherent_delay_samples late: the in-phase arm through a
 * linear-phase band-pass. A single sideband is taken by the same band-pass moved to one side and gives the
 * same level. Non-finite input counts as zero. Thread: stream.
 */
MB_API void mb_coherent_process(mb_coherent *coherent, const mb_cf32 *in, size_t n, float *out);
MB_API size_t mb_coherent_delay_samples(const mb_coherent *coherent);
MB_API void mb_coherent_reset(mb_coherent *coherent);
/** Accepts NULL. Thread: control. */
MB_API void mb_coherent_destroy(mb_coherent *coherent);

/* ---- gain control ----------------------------------------------------------------------------------------
 */

typedef struct mb_gain_control_settings {
    double rate_hz;       /* 8 kHz to 192 kHz */
    double level_dbfs;    /* root mean square that speech is brought to, -60 to -6 dBFS */
    double attack_s;      /* time to follow a louder voice, 1 ms to 1 s */
    double release_s;     /* and a fainter one, 10 ms to 20 s */
    double gain_limit_db; /* most gain, 0 to 120 dB */
} mb_gain_control_settings;

typedef struct mb_gain_control mb_gain_control;

/** Usual settings. Thread: any. */
MB_API mb_gain_control_settings mb_gain_control_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_gain_control_create(const mb_gain_control_settings *settings, mb_gain_control **out);
/** n in, n out, no delay; output is bounded to full scale. in may be out. Thread: stream. */
MB_API void mb_gain_control_process(mb_gain_control *control, const float *in, size_t n, float *out);
/** While held (the voice pauses) the gain does not rise. Thread: stream. */
MB_API void mb_gain_control_hold(mb_gain_control *control, bool hold);
/** Gain now, dB; back to the start. Thread: stream. */
MB_API double mb_gain_control_gain_db(const mb_gain_control *control);
MB_API void mb_gain_control_reset(mb_gain_control *control);
/** Accepts NULL. Thread: control. */
MB_API void mb_gain_control_destroy(mb_gain_control *control);

/* ---- squelch ---------------------------------------------------------------------------------------------
 */

typedef struct mb_squelch_settings {
    double rate_hz;       /* 8 kHz to 192 kHz */
    double open_quality;  /* lock quality that opens, 0 to 1 */
    double close_quality; /* lock quality that closes, 0 to open_quality */
    double hang_s;        /* stays open this long in a pause, 0 to 10 s */
    double fade_s;        /* of opening and closing, 0.1 ms to 1 s */
} mb_squelch_settings;

typedef struct mb_squelch mb_squelch;

/** Usual settings. Thread: any. */
MB_API mb_squelch_settings mb_squelch_settings_default(void);
/** Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_squelch_create(const mb_squelch_settings *settings, mb_squelch **out);
/** What the carrier recovery says from now on: voice tracked at this moment, and its quality. Thread: stream.
 */
MB_API void mb_squelch_report(mb_squelch *squelch, bool tracked, double lock_quality);
/** n in, n out, no delay. in may be out. Thread: stream. */
MB_API void mb_squelch_process(mb_squelch *squelch, const float *in, size_t n, float *out);
MB_API bool mb_squelch_is_open(const mb_squelch *squelch);
MB_API void mb_squelch_reset(mb_squelch *squelch);
/** Accepts NULL. Thread: control. */
MB_API void mb_squelch_destroy(mb_squelch *squelch);

#ifdef __cplusplus
}
#endif

#endif
