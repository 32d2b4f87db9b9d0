#include "signals.h"

#include <signal.h>
#include <stddef.h>

static volatile sig_atomic_t stop_signal;

static void ask_to_stop(int number)
{
    stop_signal = number;
}

void app_signals_install(void)
{
    struct sigaction action = {.sa_handler = ask_to_stop};

    /* the default comes back after the first one, so that a second ends a process that hangs; no SA_RESTART,
     * so that a read that waits on a pipe returns */
    action.sa_flags = (int)SA_RESETHAND;
    (void)sigemptyset(&action.sa_mask);
    (void)sigaction(SIGINT, &action, NULL);
    (void)sigaction(SIGTERM, &action, NULL);
    action.sa_handler = SIG_IGN;
    action.sa_flags = 0;
    (void)sigaction(SIGPIPE, &action, NULL);
    (void)sigaction(SIGXFSZ, &action, NULL);
    stop_signal = 0;
}

int app_interrupted(void)
{
    return stop_signal;
}
