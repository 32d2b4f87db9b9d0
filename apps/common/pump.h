/** pump.h - the loop of every program: block after block, with progress, until the end or an interrupt. */
#ifndef APPS_COMMON_PUMP_H
#define APPS_COMMON_PUMP_H

#include "program.h"

/** One block of work: sets *taken to the input samples it took, 0 at the end of the input. */
typedef mb_status (*app_step)(void *job, size_t *taken);

/** A pass over an input. */
typedef struct app_pass {
    const char *doing; /* for the progress line, such as "receiving" */
    double rate_hz;    /* of the input */
    uint64_t samples;  /* of the input; 0 = unknown */
    app_step step;
    void *job;
} app_pass;

/**
 * Calls the step until the input ends. Returns MB_OK, what the step failed with, or MB_ERROR_INTERRUPTED
 * after SIGINT or SIGTERM.
 */
mb_status app_pump(const app_program *program, const app_common *common, const app_pass *pass);

#endif
