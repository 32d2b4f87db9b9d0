/** tracking.h - one block through the Kalman tracker: measure, gate, update, hold. */
#ifndef CARRIER_TRACKING_H
#define CARRIER_TRACKING_H

#include "follower.h"

/** State at the middle of a sighted stretch of the given length. */
mb_phase_state tracking_first_state(const mb_recovery_settings *settings, const mb_sighting *seen,
                                    double length_s);

/** Sets noise level and quality for a new track from the stretch that was sighted. */
void tracking_begin(follower *follower, const mb_sighting *seen, const mb_cf32 *samples, size_t length);

/** Takes in one block, follower->state being the prediction for its middle, and writes its knot. */
void tracking_block(follower *follower, const mb_cf32 *samples, knot *out);

/** Lock quality over the last active speech, 0 to 1. */
double tracking_quality(const follower *follower);

#endif
