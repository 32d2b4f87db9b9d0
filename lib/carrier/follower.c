#include "follower.h"

#include <math.h>
#include <string.h>

#include "tracking.h"

#define BLOCK_S   0.01
#define HISTORY_S 1.2

enum {
    SEARCH_EVERY = 2,    /* blocks between looks while searching */
    CHECK_EVERY = 40,    /* blocks between checks of a lock */
    CHECK_NEW_EVERY = 8, /* of one that no check has confirmed yet */
    DOUBTS_TO_LOSE = 3,
    DOUBTS_TO_LOSE_NEW = 2,
    RIVALS_TO_MOVE = 3
};

static size_t history_samples(const follower *f)
{
    return f->history_blocks * f->block;
}

mb_status follower_create(const mb_recovery_settings *settings, follower *out)
{
    *out = (follower){.settings = *settings};
    out->block = (size_t)lround(settings->rate_hz * BLOCK_S);
    out->block_s = (double)out->block / settings->rate_hz;
    out->history_blocks = (size_t)lround(HISTORY_S / out->block_s);
    out->history = mb_allocate(2 * history_samples(out), sizeof *out->history);
    out->knots = mb_allocate(FOLLOWER_KNOTS, sizeof *out->knots);
    mb_status status = MB_OK;
    if (out->history == NULL || out->knots == NULL) {
        status = mb_fail(MB_ERROR_MEMORY, "", "no memory for the carrier tracker");
    }
    if (status == MB_OK) {
        status = acquisition_create(settings, &out->acquisition);
    }
    if (status == MB_OK) {
        status = block_meter_create(settings->rate_hz, settings->high_cut_hz, out->block, &out->meter);
    }
    if (status != MB_OK) {
        follower_destroy(out);
        return status;
    }
    follower_reset(out);
    return MB_OK;
}

void follower_destroy(follower *f)
{
    acquisition_destroy(&f->acquisition);
    block_meter_destroy(&f->meter);
    mb_release(f->history);
    mb_release(f->knots);
    f->history = NULL;
    f->knots = NULL;
}

void follower_reset(follower *f)
{
    memset(f->history, 0, 2 * history_samples(f) * sizeof *f->history);
    memset(f->knots, 0, FOLLOWER_KNOTS * sizeof *f->knots);
    f->history_end = history_samples(f);
    acquisition_reset(&f->acquisition);
    f->count = 0;
    f->tracking = f->has_old_state = f->polarity_uncertain = false;
    f->noise_power = f->active_i = f->active_q = f->active_energy = f->active_noise = 0.0;
    f->surprise = 1.0;
    f->idle_blocks = f->doubts = f->rivals = 0;
    f->confirmations = f->contradictions = 0;
    f->active_blocks = f->locks = f->holds = 0;
}

static void keep(follower *f, const mb_cf32 *block)
{
    if (f->history_end == 2 * history_samples(f)) {
        memcpy(f->history, f->history + history_samples(f), history_samples(f) * sizeof *f->history);
        f->history_end = history_samples(f);
    }
    memcpy(f->history + f->history_end, block, f->block * sizeof *block);
    mb_scrub_cf32(f->history + f->history_end, f->block);
    f->history_end += f->block;
}

const knot *follower_knot(const follower *f, uint64_t block)
{
    return &f->knots[block % FOLLOWER_KNOTS];
}

double follower_middle(const follower *f, uint64_t block)
{
    return (double)block * (double)f->block + 0.5 * ((double)f->block - 1.0) - (double)f->meter.delay;
}

static void forget_old_agreement(follower *f)
{
    acquisition_reset(&f->acquisition);
    f->doubts = f->rivals = 0;
}

/* Starts the tracker at the oldest kept block from what a sighting of the newest `length` samples says. */
static size_t begin_track(follower *f, const mb_sighting *seen, size_t length)
{
    size_t blocks = f->count < f->history_blocks ? (size_t)f->count : f->history_blocks;
    uint64_t first = f->count - blocks;
    double middle = (double)f->count * (double)f->block - 0.5 * ((double)length + 1.0);
    mb_phase_state state = tracking_first_state(&f->settings, seen, (double)length / f->settings.rate_hz);

    if (f->has_old_state) {
        mb_phase_state old = f->old_state;
        double gap_s = (middle - follower_middle(f, f->old_block)) / f->settings.rate_hz;
        mb_phase_predict(&old, &f->settings.noise, gap_s);
        state.phase_rad = nearest_branch(state.phase_rad, old.phase_rad);
        f->polarity_uncertain = f->polarity_uncertain || sqrt(old.covariance[0]) > 0.5;
    }
    double back_s = (follower_middle(f, first) - middle) / f->settings.rate_hz;
    mb_phase_predict(&state, &f->settings.noise, back_s);
    f->state = state;
    f->tracking = true;
    f->confirmed = false;
    f->locks++;
    tracking_begin(f, seen, f->history + f->history_end - length, length);
    double lead = 0.5 * ((double)f->block - 1.0) - (double)f->meter.delay;
    block_meter_start(&f->meter, state.phase_rad, state.frequency_rad_s, lead);
    for (size_t i = 0; i < blocks; i++) {
        const mb_cf32 *samples = f->history + f->history_end - (blocks - i) * f->block;
        knot *written = &f->knots[(first + i) % FOLLOWER_KNOTS];
        tracking_block(f, samples, written);
        written->restart = i == 0;
    }
    forget_old_agreement(f);
    return blocks;
}

static void stop_track(follower *f)
{
    f->has_old_state = true;
    f->old_state = f->state;
    f->old_block = f->count; /* the state is the prediction for the next block */
    f->tracking = false;
    forget_old_agreement(f);
}

/* Holds a lock against a long look: lost when what is there does not mirror, moved when it mirrors elsewhere.
 */
static size_t check_lock(follower *f)
{
    double tracked_hz = f->state.frequency_rad_s / (2.0 * MB_PI);
    mb_sighting elsewhere;
    mb_sighting here =
        acquisition_check(&f->acquisition, f->history + f->history_end, tracked_hz, &elsewhere);

    if (here.coherence > 0.15 && here.purity > (f->confirmed ? 0.6 : 0.75)) {
        f->confirmations++;
        f->confirmed = true;
        f->doubts = f->rivals = 0;
    } else if (elsewhere.accepted && fabs(elsewhere.offset_hz - tracked_hz) > 2.5) {
        f->rivals = f->rivals > 0 && fabs(elsewhere.offset_hz - f->rival_hz) < 1.5 ? f->rivals + 1 : 1;
        f->rival_hz = elsewhere.offset_hz;
    } else if (here.occupied > 0.4 && here.purity < 0.35) {
        f->doubts++;
        f->contradictions++;
    }
    if (f->rivals >= RIVALS_TO_MOVE) {
        stop_track(f);
        return begin_track(f, &elsewhere, acquisition_length(&f->acquisition));
    }
    if (f->doubts >= (f->confirmed ? DOUBTS_TO_LOSE : DOUBTS_TO_LOSE_NEW)) {
        stop_track(f);
    }
    return 1;
}

static size_t search(follower *f)
{
    mb_sighting seen;
    size_t length;

    if (f->count % SEARCH_EVERY != 0 ||
        !acquisition_look(&f->acquisition, f->history + f->history_end, &seen, &length)) {
        return 1;
    }
    return begin_track(f, &seen, length);
}

size_t follower_take(follower *f, const mb_cf32 *block)
{
    knot *newest = &f->knots[f->count % FOLLOWER_KNOTS];

    keep(f, block);
    f->count++;
    *newest = (knot){.mode = f->locks > 0 ? MB_CARRIER_LOST : MB_CARRIER_SEARCH};
    if (!f->tracking) {
        return search(f);
    }
    tracking_block(f, f->history + f->history_end - f->block, newest);
    return f->count % (f->confirmed ? CHECK_EVERY : CHECK_NEW_EVERY) == 0 ? check_lock(f) : 1;
}

mb_carrier_state follower_state(const follower *f)
{
    mb_carrier_state state = {.mode = MB_CARRIER_SEARCH, .in_phase_dbfs = -400.0, .quadrature_dbfs = -400.0};

    if (f->count == 0) {
        return state;
    }
    const knot *newest = follower_knot(f, f->count - 1);
    state.mode = (mb_carrier_mode)newest->mode;
    state.time_s = (double)f->count * f->block_s;
    if (newest->known) {
        state.carrier_offset_hz = newest->filtered.frequency_rad_s / (2.0 * MB_PI);
        state.drift_hz_s = newest->filtered.drift_rad_s2 / (2.0 * MB_PI);
        state.phase_sigma_rad = sqrt(fmax(newest->filtered.covariance[0], 0.0));
        state.in_phase_dbfs = mb_power_db((double)newest->in_phase_power);
        state.quadrature_dbfs = mb_power_db((double)newest->quadrature_power);
    }
    state.lock_quality = (double)newest->quality;
    state.snr_db = (double)newest->snr_db;
    state.active_s = (double)f->active_blocks * f->block_s;
    state.locks = f->locks;
    state.holds = f->holds;
    state.polarity_uncertain = f->polarity_uncertain;
    return state;
}
