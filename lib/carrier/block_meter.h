/** block_meter.h - energies and phase of a block of 10 ms about a predicted carrier. */
#ifndef CARRIER_BLOCK_METER_H
#define CARRIER_BLOCK_METER_H

#include "mirrorband/carrier.h"
#include "mirrorband/filter.h"

/** Derotates blocks by a continuous oscillator, low-passes them to the message band and sums their squares.
 */
typedef struct block_meter {
    double rate_hz;
    size_t block; /* samples */
    size_t delay; /* of the low-pass, samples */
    mb_fir *low_pass;
    float *taps;
    mb_cf32 *scratch;          /* one block */
    double noise_bandwidth_hz; /* two-sided, of the low-pass */
    double phase_rad;          /* of the oscillator at the next sample, in one turn */
    double turned_rad;         /* whole turns taken off so far, to give phases unwrapped */
} block_meter;

typedef struct block_reading {
    double reference_rad; /* phase of the oscillator at the middle of what was measured, unwrapped */
    double energy;        /* sum |z|^2 */
    double square_re;     /* sum z^2 about the oscillator */
    double square_im;
} block_reading;

mb_status block_meter_create(double rate_hz, double high_cut_hz, size_t block, block_meter *out);
void block_meter_destroy(block_meter *meter);

/** Sets the oscillator so that it has phase_rad at `lead` samples after the next one, with the given
 * frequency. */
void block_meter_start(block_meter *meter, double phase_rad, double frequency_rad_s, double lead);

/** Measures the next block, the oscillator running at frequency_rad_s through it. */
block_reading block_meter_read(block_meter *meter, const mb_cf32 *samples, double frequency_rad_s);

#endif
