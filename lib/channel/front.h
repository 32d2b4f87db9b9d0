/** front.h - faults of a receiver's front end: unequal rails, DC, clipping, quantisation. */
#ifndef CHANNEL_FRONT_H
#define CHANNEL_FRONT_H

#include "mirrorband/core.h"

/** Everything is off when zeroed, but for `limit` (INFINITY: off). */
typedef struct channel_front {
    bool unequal;            /* rails are mixed by the next two */
    double from_re, from_im; /* quadrature out = from_re * in-phase + from_im * quadrature */
    double dc_re, dc_im;
    float limit;      /* of each rail */
    float steps;      /* per unit: 2^(bits-1); 0: no quantisation */
    uint64_t clipped; /* samples with a limited rail */
} channel_front;

/** Sets rails, DC, limit and quantiser. dc_dbfs may be -INFINITY, limit INFINITY, bits 0. Thread: any. */
void channel_front_set_rails(channel_front *front, double gain_db, double phase_deg);
void channel_front_set_dc(channel_front *front, double dc_dbfs, double phase_rad);
void channel_front_set_limits(channel_front *front, double limit, unsigned bits);

/** count samples in place. Thread: stream. */
void channel_front_apply(channel_front *front, mb_cf32 *samples, size_t count);

#endif
