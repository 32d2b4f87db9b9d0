#include "mirrorband/modulate.h"

/* I_n(x) = sum_k (x/2)^(n+2k) / (k! (n+k)!): all terms have one sign, so nothing cancels. */
double mb_bessel_i(unsigned order, double x)
{
    double term = 1.0, sum = 0.0;

    for (unsigned i = 1; i <= order; i++) {
        term *= 0.5 * x / (double)i;
    }
    for (unsigned k = 1; sum + term != sum && k < 1000; k++) {
        sum += term;
        term *= 0.25 * x * x / ((double)k * (double)(order + k));
    }
    return sum;
}
