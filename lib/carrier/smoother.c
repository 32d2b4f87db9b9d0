#include "mirrorband/carrier.h"

#include <math.h>
#include <string.h>

#include "knots.h"
#include "rotation.h"

struct mb_smoother {
    follower follower;
    knot_list knots;
    mb_cf32 *block; /* being filled in the first pass */
    size_t filled;
    bool resolved;
    uint64_t position; /* of the second pass, samples */
    mb_carrier_state summary;
};

mb_status mb_smoother_create(const mb_recovery_settings *settings, mb_smoother **out)
{
    *out = NULL;
    mb_status status = mb_recovery_settings_check(settings);
    if (status != MB_OK) {
        return status;
    }
    mb_smoother *smoother = mb_allocate(1, sizeof *smoother);
    if (smoother == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the smoother");
    }
    status = follower_create(settings, &smoother->follower);
    if (status == MB_OK) {
        smoother->block = mb_allocate(smoother->follower.block, sizeof *smoother->block);
        if (smoother->block == NULL) {
            status = mb_fail(MB_ERROR_MEMORY, "", "no memory for the smoother");
        }
    }
    if (status != MB_OK) {
        mb_smoother_destroy(smoother);
        return status;
    }
    *out = smoother;
    return MB_OK;
}

void mb_smoother_destroy(mb_smoother *smoother)
{
    if (smoother != NULL) {
        follower_destroy(&smoother->follower);
        knot_list_free(&smoother->knots);
        mb_release(smoother->block);
        mb_release(smoother);
    }
}

static mb_status take_block(mb_smoother *s)
{
    const follower *f = &s->follower;
    size_t written = follower_take(&s->follower, s->block);

    s->filled = 0;
    if (!knot_list_reserve(&s->knots, (size_t)f->count)) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the carrier track of the recording");
    }
    for (uint64_t i = f->count - written; i < f->count; i++) {
        *knot_list_at(&s->knots, (size_t)i) = *follower_knot(f, i);
    }
    return MB_OK;
}

mb_status mb_smoother_listen(mb_smoother *s, const mb_cf32 *in, size_t n)
{
    size_t block = s->follower.block;

    for (size_t done = 0; done < n;) {
        size_t run = block - s->filled < n - done ? block - s->filled : n - done;
        memcpy(s->block + s->filled, in + done, run * sizeof *in);
        s->filled += run;
        done += run;
        if (s->filled == block) {
            mb_status status = take_block(s);
            if (status != MB_OK) {
                return status;
            }
        }
    }
    return MB_OK;
}

static void summarise(mb_smoother *s)
{
    double offset = 0.0, quality = 0.0, snr = 0.0;
    size_t active = 0;

    for (size_t i = 0; i < s->knots.count; i++) {
        const knot *at = knot_list_at(&s->knots, i);
        if (at->variance_rad2 > 0.0f) {
            offset += at->filtered.frequency_rad_s / (2.0 * MB_PI);
            quality += (double)at->quality;
            snr += mb_db_power((double)at->snr_db);
            active++;
        }
    }
    double count = active > 0 ? (double)active : 1.0;
    s->summary = follower_state(&s->follower);
    s->summary.carrier_offset_hz = offset / count;
    s->summary.lock_quality = quality / count;
    s->summary.snr_db = mb_power_db(snr / count);
    s->summary.active_s = (double)active * s->follower.block_s;
}

/* A lock counts as a signal when the long looks that followed it mostly agreed with it. */
static bool heard_a_signal(const follower *f)
{
    bool brief = (double)f->count * f->block_s < 3.0;

    if (f->locks == 0) {
        return false;
    }
    return f->confirmations >= (brief ? 1 : 2) && 4 * f->confirmations >= f->contradictions;
}

mb_status mb_smoother_resolve(mb_smoother *s)
{
    if (s->filled > 0) {
        memset(s->block + s->filled, 0, (s->follower.block - s->filled) * sizeof *s->block);
        mb_status status = take_block(s);
        if (status != MB_OK) {
            return status;
        }
    }
    if (!heard_a_signal(&s->follower)) {
        return mb_fail(
            MB_ERROR_NO_SIGNAL, "",
            "no suppressed-carrier signal within %g Hz of the tuned centre; if it lies farther off, tell "
            "the offset or widen the span",
            s->follower.settings.span_hz);
    }
    bool sure = knots_smooth(&s->knots, &s->follower.settings, s->follower.block_s);
    summarise(s);
    s->summary.polarity_uncertain = !sure;
    s->resolved = true;
    s->position = 0;
    return MB_OK;
}

void mb_smoother_rewind(mb_smoother *s)
{
    s->position = 0;
}

/* Segment that holds the sample at `position`, and how many samples of it lie from there on. */
static size_t segment_at(const mb_smoother *s, uint64_t position, phase_segment *segment)
{
    const follower *f = &s->follower;
    double origin = follower_middle(f, 0), block = (double)f->block;
    double index = floor(((double)position - origin) / block);
    double last = s->knots.count > 1 ? (double)(s->knots.count - 2) : 0.0;
    size_t at = (size_t)fmax(0.0, fmin(index, last));
    const mb_phase_state *first = &knot_list_at(&s->knots, at)->filtered;
    mb_phase_state second = *first;

    if (at + 1 < s->knots.count) {
        second = knot_list_at(&s->knots, at + 1)->filtered;
    } else {
        mb_phase_predict(&second, &f->settings.noise, f->block_s);
    }
    double start = origin + (double)at * block;
    *segment = phase_segment_between(start, first, &second, block, f->settings.rate_hz);
    if ((double)position >= start + block) {
        return SIZE_MAX; /* behind the last knot: carried on */
    }
    return (size_t)(ceil(start + block) - (double)position);
}

void mb_smoother_rotate(mb_smoother *s, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    phase_segment segment;

    for (size_t done = 0; done < n;) {
        size_t left = segment_at(s, s->position, &segment);
        size_t run = left < n - done ? left : n - done;
        phase_segment_rotate(&segment, (double)s->position, in + done, run, out + done);
        mb_scrub_cf32(out + done, run);
        done += run;
        s->position += run;
    }
}

size_t mb_smoother_point_count(const mb_smoother *s)
{
    return s->knots.count;
}

double mb_smoother_step_s(const mb_smoother *s)
{
    return s->follower.block_s;
}

mb_track_point mb_smoother_point(const mb_smoother *s, size_t index)
{
    const knot *at = knot_list_at(&s->knots, index);

    return (mb_track_point){
        .time_s = follower_middle(&s->follower, index) / s->follower.settings.rate_hz,
        .phase_rad = at->filtered.phase_rad,
        .carrier_offset_hz = at->filtered.frequency_rad_s / (2.0 * MB_PI),
        .phase_sigma_rad = sqrt(fmax(at->filtered.covariance[0], 0.0)),
        .lock_quality = (double)at->quality,
        .snr_db = (double)at->snr_db,
        .in_phase_dbfs = mb_power_db((double)at->in_phase_power),
        .quadrature_dbfs = mb_power_db((double)at->quadrature_power),
        .mode = (mb_carrier_mode)at->mode,
    };
}

mb_carrier_state mb_smoother_state(const mb_smoother *s)
{
    return s->summary;
}
