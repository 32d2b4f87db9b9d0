/**
 * signals.h - interrupts end the work in order: loops ask app_interrupted() once a block, keep what was
 * written so far (the _keep_partial functions of files.h) and end with app_fail(program,
 * MB_ERROR_INTERRUPTED). A closed pipe and a limit on the size of files are errors of the write, not
 * the end of the process.
 */
#ifndef APPS_COMMON_SIGNALS_H
#define APPS_COMMON_SIGNALS_H

/** SIGINT and SIGTERM set a flag (a second one ends the process at once), SIGPIPE and SIGXFSZ are ignored. */
void app_signals_install(void);

/** Number of the signal that asked to stop, 0 if none did. */
int app_interrupted(void);

#endif
