/** complex_parts.h - complex numbers in double from their parts, and their product without a look for
 * infinities. (CMPLX of the C standard is not in every compiler's headers.) */
#ifndef CHANNEL_COMPLEX_PARTS_H
#define CHANNEL_COMPLEX_PARTS_H

#include <complex.h>

static inline double complex complex_of(double re, double im)
{
    union {
        double part[2];
        double complex whole;
    } number = {{re, im}};

    return number.whole;
}

static inline double complex complex_times(double complex a, double complex b)
{
    return complex_of(creal(a) * creal(b) - cimag(a) * cimag(b), creal(a) * cimag(b) + cimag(a) * creal(b));
}

static inline double complex_square(double complex a)
{
    return creal(a) * creal(a) + cimag(a) * cimag(a);
}

#endif
