/** rotation.h - turning samples by a carrier phase known at two instants. */
#ifndef CARRIER_ROTATION_H
#define CARRIER_ROTATION_H

#include "mirrorband/carrier.h"

/** Cubic phase between two knots (Hermite, from phase and frequency at both ends). */
typedef struct phase_segment {
    double start;          /* sample position of the first knot */
    double length;         /* samples to the second */
    double coefficient[4]; /* of phase in rad, in powers of (position - start) / length */
} phase_segment;

phase_segment phase_segment_between(double start, const mb_phase_state *first, const mb_phase_state *second,
                                    double length, double rate_hz);

/** out = in x exp(-j phase); in[0] is the sample at `position`; the result does not depend on the cut. */
void phase_segment_rotate(const phase_segment *segment, double position, const mb_cf32 *in, size_t n,
                          mb_cf32 *out);

#endif
