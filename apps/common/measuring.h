/** measuring.h - the passes of mb-measure over its inputs, and their results as figures. */
#ifndef APPS_COMMON_MEASURING_H
#define APPS_COMMON_MEASURING_H

#include "figures.h"
#include "mirrorband/assess.h"
#include "mirrorband/files.h"
#include "program.h"

/** IQ samples on their own. */
typedef struct iq_measurement {
    const app_program *program;
    const app_common *common;
    const char *path, *truth_path; /* truth_path: NULL = none */
    mb_iq_reader *reader;          /* rewindable, at its start */
    mb_assess_iq_settings settings;
    mb_assess_iq *assess;
    mb_assess_iq_result result;
    char why[1024]; /* nothing was found: the sentence */
} iq_measurement;

/** Both passes. Returns MB_OK also when no carrier was found (result.found tells). */
mb_status iq_measure(iq_measurement *job);
void iq_figures(const iq_measurement *job, app_figures *figures);
void iq_measurement_release(iq_measurement *job);

/** What is taken as the message. The band filter of a transmitter is longer than the filter that a score
 * leaves free, and conditioning changes the gain from moment to moment: neither is a fault of reception. */
typedef enum message_kind {
    MESSAGE_RECORDED,   /* as it is in the file */
    MESSAGE_LIMITED,    /* limited to the band of transmit.* */
    MESSAGE_CONDITIONED /* that, and conditioned by transmit.* */
} message_kind;

/** Audio on its own, or against its message, or an ideal receiver against it. */
typedef struct audio_measurement {
    const app_program *program;
    const app_common *common;
    mb_audio_reader *message, *audio; /* rewindable, at their start; message NULL: level only */
    mb_iq_reader *reader;             /* with truth_path: ideal detection too; NULL = none */
    const char *truth_path;
    double skip_s;
    bool has_score, has_ideal;
    message_kind kind; /* the message that fitted best */
    mb_speech_meter_result level;
    mb_score_result score, ideal;
} audio_measurement;

mb_status audio_measure(audio_measurement *job);
void audio_figures(const audio_measurement *job, app_figures *figures);

#endif
