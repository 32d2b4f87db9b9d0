#include "noise_floor.h"

#include <math.h>
#include <stdlib.h>

static int by_value(const void *a, const void *b)
{
    double left = *(const double *)a, right = *(const double *)b;

    return (left > right) - (left < right);
}

/* The median of an average of K exponentials lies at (1 - 1/(9 K))^3 of their mean (Wilson and Hilferty
 * 1931). */
double mb_noise_floor(double *values, size_t count, double averages)
{
    if (count == 0) {
        return 0.0;
    }
    qsort(values, count, sizeof *values, by_value);
    return values[count / 2] / pow(1.0 - 1.0 / (9.0 * averages), 3.0);
}
