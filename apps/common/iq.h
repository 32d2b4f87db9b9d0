/** iq.h - IQ samples in and out by endpoint: what --rate and --format say, and a sentence for what is wrong.
 */
#ifndef APPS_COMMON_IQ_H
#define APPS_COMMON_IQ_H

#include "mirrorband/files.h"
#include "program.h"

/** Endpoints end with this where more than this share of the samples stands at the end of the range. */
#define APP_CLIPPED_SHARE 1e-4

/** An IQ input as the command line names it. */
typedef struct app_iq_input {
    const char *path;
    double rate_hz;      /* --rate, 0 = not given */
    const char *format;  /* --format, NULL = not given */
    bool format_of_both; /* --format is that of the output too: it says nothing about a file with an ending */
    bool rewindable;     /* the input is read twice */
    uint64_t channel;    /* --iq-channel, which I/Q pair of several, 1 the first; 0 = not given */
} app_iq_input;

/** Opens it. Returns APP_CONTINUE, or the exit status with the sentence written. */
int app_iq_open(const app_program *program, const app_iq_input *input, mb_iq_reader **out);

/**
 * Starts an IQ output; format: --format, NULL = not given. settings->format is set from it. Returns
 * APP_CONTINUE, or the exit status with the sentence written.
 */
int app_iq_create(const app_program *program, const char *path, const char *format,
                  const mb_iq_writer_settings *settings, mb_iq_writer **out);

/** Remarks about an input read to its end: samples that are no numbers, and samples clipped when recorded. */
void app_iq_remarks(const app_program *program, const app_common *common, const char *path,
                    const mb_iq_reader *reader);

/** The remarks themselves, for any input: counts out of samples. */
void app_input_remarks(const app_program *program, const app_common *common, const char *path,
                       uint64_t samples, uint64_t non_finite, uint64_t at_full_scale);

/** As app_fail, but what the command line or the config asked for in vain (ARGUMENT) ends with APP_USAGE. */
int app_refuse(const app_program *program, mb_status status);

/** Whether a path is "-"; false for NULL. */
bool app_is_pipe(const char *path);

/** Annotation over all of a recording that names it as suppressed-carrier double sideband. */
mb_iq_annotation app_iq_annotation(double low_hz, double high_hz);

#endif
