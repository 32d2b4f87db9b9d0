#include "mirrorband/carrier.h"

#include <math.h>
#include <string.h>

#include "follower.h"
#include "rotation.h"

struct mb_recovery {
    follower follower;
    mb_costas *costas; /* NULL: the Kalman tracker rotates */
    size_t lag_blocks;
    size_t delay;  /* samples */
    mb_cf32 *line; /* the last delay + block samples, a ring */
    size_t line_length;
    mb_cf32 *block;      /* being filled */
    mb_cf32 *rotated;    /* Costas: the block before, rotated */
    size_t filled;       /* samples in block */
    uint64_t count;      /* samples taken in */
    mb_phase_state last; /* right end of the segment before */
    bool last_known;
    phase_segment segment;
    bool segment_known;
};

static mb_status create_costas(const mb_recovery_settings *settings, mb_costas **out)
{
    mb_costas_settings loop = mb_costas_settings_default();

    loop.rate_hz = settings->rate_hz;
    loop.loop_bandwidth_hz = settings->loop_bandwidth_hz;
    loop.damping = settings->damping;
    loop.offset_limit_hz = settings->span_hz + 50.0;
    return mb_costas_create(&loop, out);
}

static mb_status allocate(mb_recovery *r, const mb_recovery_settings *settings)
{
    mb_status status = follower_create(settings, &r->follower);

    if (status != MB_OK) {
        return status;
    }
    size_t block = r->follower.block;
    r->lag_blocks = (size_t)lround(settings->look_ahead_s / r->follower.block_s);
    r->delay = (r->lag_blocks + 1) * block + (block + 1) / 2 + r->follower.meter.delay;
    if (settings->tracker == MB_TRACKER_COSTAS) {
        r->delay = block;
        status = create_costas(settings, &r->costas);
    }
    r->line_length = r->delay + block;
    r->line = mb_allocate(r->line_length, sizeof *r->line);
    r->block = mb_allocate(block, sizeof *r->block);
    r->rotated = mb_allocate(block, sizeof *r->rotated);
    if (status == MB_OK && (r->line == NULL || r->block == NULL || r->rotated == NULL)) {
        status = mb_fail(MB_ERROR_MEMORY, "", "no memory for the carrier recovery");
    }
    return status;
}

mb_status mb_recovery_create(const mb_recovery_settings *settings, mb_recovery **out)
{
    *out = NULL;
    mb_status status = mb_recovery_settings_check(settings);
    if (status != MB_OK) {
        return status;
    }
    mb_recovery *recovery = mb_allocate(1, sizeof *recovery);
    if (recovery == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the carrier recovery");
    }
    status = allocate(recovery, settings);
    if (status != MB_OK) {
        mb_recovery_destroy(recovery);
        return status;
    }
    *out = recovery;
    return MB_OK;
}

void mb_recovery_destroy(mb_recovery *recovery)
{
    if (recovery != NULL) {
        follower_destroy(&recovery->follower);
        mb_costas_destroy(recovery->costas);
        mb_release(recovery->line);
        mb_release(recovery->block);
        mb_release(recovery->rotated);
        mb_release(recovery);
    }
}

void mb_recovery_reset(mb_recovery *r)
{
    follower_reset(&r->follower);
    if (r->costas != NULL) {
        mb_costas_reset(r->costas);
    }
    memset(r->line, 0, r->line_length * sizeof *r->line);
    memset(r->rotated, 0, r->follower.block * sizeof *r->rotated);
    r->filled = 0;
    r->count = 0;
    r->last_known = r->segment_known = false;
}

size_t mb_recovery_delay_samples(const mb_recovery *recovery)
{
    return recovery->delay;
}

mb_carrier_state mb_recovery_state(const mb_recovery *recovery)
{
    mb_carrier_state state = follower_state(&recovery->follower);

    if (recovery->costas != NULL && state.mode != MB_CARRIER_SEARCH && state.mode != MB_CARRIER_LOST) {
        mb_costas_state loop = mb_costas_state_get(recovery->costas);
        state.carrier_offset_hz = loop.carrier_offset_hz;
        state.mode = loop.holding ? MB_CARRIER_HOLD : MB_CARRIER_LOCKED;
    }
    return state;
}

/* Smoothed state of a knot, from the newest knot back; false where the track is unknown. */
static bool smoothed_knot(const mb_recovery *r, uint64_t at, mb_phase_state *out)
{
    const follower *f = &r->follower;
    const knot *newest = follower_knot(f, f->count - 1);
    mb_phase_state later = newest->filtered;

    if (!newest->known || !follower_knot(f, at)->known) {
        return false;
    }
    for (uint64_t i = f->count - 1; i > at; i--) {
        mb_phase_state state = follower_knot(f, i - 1)->filtered;
        mb_phase_smooth(&state, &f->settings.noise, f->block_s, &later);
        later = state;
    }
    *out = later;
    return true;
}

/* After a block: the segment of phase that the next block of output lies in. */
static void next_segment(mb_recovery *r, size_t written)
{
    const follower *f = &r->follower;
    mb_phase_state left = r->last, right;
    bool left_known = r->last_known && written == 1;

    r->segment_known = false;
    r->last_known = false;
    if (f->count <= r->lag_blocks + 1) {
        return;
    }
    uint64_t at = f->count - 1 - r->lag_blocks;
    if (!left_known) {
        left_known = smoothed_knot(r, at - 1, &left);
    }
    if (!smoothed_knot(r, at, &right)) {
        return;
    }
    if (left_known) {
        r->segment = phase_segment_between(follower_middle(f, at - 1), &left, &right, (double)f->block,
                                           f->settings.rate_hz);
        r->segment_known = true;
    }
    r->last = right;
    r->last_known = true;
}

static void costas_block(mb_recovery *r, size_t written)
{
    const follower *f = &r->follower;

    if (!f->tracking) {
        memset(r->rotated, 0, f->block * sizeof *r->rotated);
        return;
    }
    if (written > 1) {
        /* the state is the prediction for the middle of the next block: carry it to the start of this one */
        mb_phase_state start = f->state;
        double samples = follower_middle(f, f->count) - (double)((f->count - 1) * f->block);
        mb_phase_predict(&start, &f->settings.noise, -samples / f->settings.rate_hz);
        mb_costas_steer(r->costas, start.phase_rad, start.frequency_rad_s / (2.0 * MB_PI));
    }
    mb_costas_process(r->costas, r->block, f->block, r->rotated);
}

static void end_block(mb_recovery *r)
{
    size_t written = follower_take(&r->follower, r->block);

    r->filled = 0;
    if (r->costas != NULL) {
        costas_block(r, written);
    } else {
        next_segment(r, written);
    }
}

/* Output for the run of inputs that starts at sample r->count, none of which ends a block before its last. */
static void emit(mb_recovery *r, size_t n, mb_cf32 *out)
{
    if (r->costas != NULL) {
        memcpy(out, r->rotated + r->filled, n * sizeof *out);
        return;
    }
    if (!r->segment_known || r->count < r->delay) {
        memset(out, 0, n * sizeof *out);
        return;
    }
    uint64_t from = r->count - r->delay;
    for (size_t done = 0; done < n;) {
        size_t at = (size_t)((from + done) % r->line_length);
        size_t run = r->line_length - at < n - done ? r->line_length - at : n - done;
        phase_segment_rotate(&r->segment, (double)(from + done), r->line + at, run, out + done);
        done += run;
    }
}

void mb_recovery_process(mb_recovery *r, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    size_t block = r->follower.block;

    for (size_t done = 0; done < n;) {
        size_t run = block - r->filled < n - done ? block - r->filled : n - done;
        for (size_t i = 0; i < run; i++) {
            mb_cf32 sample = in[done + i];
            mb_scrub_cf32(&sample, 1);
            r->block[r->filled + i] = sample;
            r->line[(size_t)((r->count + i) % r->line_length)] = sample;
        }
        emit(r, run, out + done);
        r->filled += run;
        r->count += run;
        done += run;
        if (r->filled == block) {
            end_block(r);
        }
    }
}
