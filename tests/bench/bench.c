/* Prints speeds and ratios of the quick paths, measured alternately in one run, and the peak of memory.
 * Ratios carry from machine to machine; speeds do not. */
#include "bench.h"

#include <stdio.h>
#include <stdlib.h>
#include <sys/resource.h>

#include "mirrorband/core.h"

static int ascending(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;

    return (x > y) - (x < y);
}

double bench_median(double *values, int count)
{
    qsort(values, (size_t)count, sizeof *values, ascending);
    return count % 2 == 1 ? values[count / 2] : 0.5 * (values[count / 2 - 1] + values[count / 2]);
}

void bench_require(int status)
{
    if (status != MB_OK) {
        fprintf(stderr, "bench: %s\n", mb_last_fault()->text);
        exit(1);
    }
}

int main(void)
{
    struct rusage usage;

    bench_decimate();
    bench_receive();
    if (getrusage(RUSAGE_SELF, &usage) == 0) {
        printf("peak memory %.1f MiB\n", (double)usage.ru_maxrss / 1024.0);
    }
    return 0;
}
