/** design.h - what the designs of the room share. */
#ifndef FILTER_DESIGN_H
#define FILTER_DESIGN_H

/** Modified Bessel function of the first kind and order 0, by its series. */
double mb_bessel_i0(double x);

#endif
