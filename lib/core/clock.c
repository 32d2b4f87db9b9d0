#include "mirrorband/core.h"

#include <time.h>

double mb_clock_s(void)
{
    struct timespec now;

    if (clock_gettime(CLOCK_MONOTONIC, &now) != 0) {
        return 0.0;
    }
    return (double)now.tv_sec + 1e-9 * (double)now.tv_nsec;
}

const char *mb_version(void)
{
    return MB_VERSION;
}
