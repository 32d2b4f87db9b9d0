/** branch.h - the ambiguity of a carrier phase known modulo pi. */
#ifndef CARRIER_BRANCH_H
#define CARRIER_BRANCH_H

/** phase + the multiple of pi that brings it nearest to target. */
double nearest_branch(double phase_rad, double target_rad);

#endif
