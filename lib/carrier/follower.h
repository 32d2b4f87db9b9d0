/**
 * follower.h - search, lock, tracking and hold in blocks of 10 ms; what live recovery and the smoother share.
 *
 * Each block gives a knot: the filtered carrier state at the middle of the block. When a lock is found the
 * blocks kept so far are gone through again, so that the knots before the lock become known too.
 */
#ifndef CARRIER_FOLLOWER_H
#define CARRIER_FOLLOWER_H

#include "mirrorband/carrier.h"

#include "acquisition.h"
#include "block_meter.h"
#include "branch.h"

/** What is known about one block. */
typedef struct knot {
    mb_phase_state filtered; /* at the middle of the block */
    double measured_rad;     /* phase measured, unwrapped; valid if variance_rad2 > 0 */
    float variance_rad2;     /* of the measured phase; 0: the block was not used */
    float quality;
    float snr_db;
    float in_phase_power; /* per sample */
    float quadrature_power;
    unsigned char mode; /* mb_carrier_mode */
    bool known;         /* filtered holds a state */
    bool restart;       /* the track begins anew here */
} knot;

enum {
    FOLLOWER_KNOTS = 1024
}; /* kept in the ring; a power of two, more than look-ahead and replay together */

typedef struct follower {
    mb_recovery_settings settings;
    double block_s;
    size_t block;          /* samples in a block */
    size_t history_blocks; /* kept for looks and for going through again */
    mb_cf32 *history;      /* twice as long, so that the newest history_blocks are always in one piece */
    size_t history_end;    /* samples used in it */
    acquisition acquisition;
    block_meter meter;
    knot *knots;    /* ring of FOLLOWER_KNOTS */
    uint64_t count; /* blocks taken in */

    mb_phase_state state; /* predicted to the middle of the next block when tracking */
    bool tracking;
    bool confirmed;     /* a check of this lock has found it good */
    bool has_old_state; /* after a loss: old_state still tells which polarity comes nearest */
    mb_phase_state old_state;
    uint64_t old_block;        /* block old_state belongs to */
    double noise_power;        /* per arm and sample, while tracking */
    double active_i, active_q; /* decaying sums over active speech */
    double active_energy, active_noise;
    double surprise;      /* running mean of normalised squared innovations */
    bool heard;           /* the track has had an update */
    unsigned idle_blocks; /* since the last update */
    unsigned doubts, rivals;
    uint64_t confirmations, contradictions; /* long looks that agreed with the lock, and that did not */
    double rival_hz;
    uint64_t active_blocks;
    uint64_t locks, holds;
    bool polarity_uncertain;
} follower;

mb_status mb_recovery_settings_check(const mb_recovery_settings *settings);

mb_status follower_create(const mb_recovery_settings *settings, follower *out);
void follower_destroy(follower *follower);
void follower_reset(follower *follower);

/**
 * Takes in one block; returns how many of the newest knots were written: 1, or more when a lock was found and
 * the kept blocks were gone through again.
 */
size_t follower_take(follower *follower, const mb_cf32 *block);

/** Knot of a block, counted from the start; only the newest FOLLOWER_KNOTS are kept. */
const knot *follower_knot(const follower *follower, uint64_t block);

/** Middle of the measured part of a block, in samples from the start. */
double follower_middle(const follower *follower, uint64_t block);

/** State for the user, from the newest knot. */
mb_carrier_state follower_state(const follower *follower);

#endif
