/** progress.h - one line on a terminal that says how far the work is and how fast it goes. */
#ifndef APPS_COMMON_PROGRESS_H
#define APPS_COMMON_PROGRESS_H

#include "program.h"

/** State of the line; made by app_progress_begin, no ownership. */
typedef struct app_progress {
    const char *program, *doing;
    double total_s; /* 0 = unknown */
    double begun_s, shown_s;
    bool visible; /* stderr is a terminal and --quiet was not given */
    bool drawn;
} app_progress;

/**
 * Starts the line. doing: such as "receiving". total_s: signal time to be worked through, 0 = unknown (pipe).
 * Nothing is ever written unless stderr is a terminal.
 */
app_progress app_progress_begin(const app_program *program, const app_common *common, const char *doing,
                                double total_s);

/** Tells how many seconds of signal are done; draws at most five times a second. */
void app_progress_update(app_progress *progress, double done_s);

/** Clears the line. */
void app_progress_end(app_progress *progress);

/** The text of the line: "mb-receive: receiving 42 %, 310 x real time". elapsed_s: time worked. */
void app_progress_text(const app_progress *progress, double done_s, double elapsed_s, char *out, size_t size);

#endif
