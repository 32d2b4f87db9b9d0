#include "acquisition.h"

#include <math.h>

/*
 * One sideband alone passes a single short look now and then (0.4 % of 0.2 s looks at twelve voices), because
 * its pitch lines can mirror each other for a moment; but its pitch moves, so such looks do not agree for
 * long. Asking for six short looks in a row within 2.5 Hz, or three long ones within 1 Hz, leaves almost
 * none, and what is left is thrown out by the check of the lock that follows.
 */
enum { BRIEF_LOOKS = 6, LASTING_LOOKS = 3, LASTING_EVERY = 3 };
#define BRIEF_S           0.2
#define LASTING_S         0.6
#define BRIEF_SPREAD_HZ   2.5
#define LASTING_SPREAD_HZ 1.0

mb_status acquisition_create(const mb_recovery_settings *settings, acquisition *out)
{
    mb_sighting_settings look = mb_sighting_settings_default();

    *out = (acquisition){0};
    look.rate_hz = settings->rate_hz;
    look.span_hz = settings->span_hz;
    look.low_cut_hz = settings->low_cut_hz;
    look.high_cut_hz = settings->high_cut_hz;
    look.length_s = BRIEF_S;
    look.coherence_min = 0.4;
    look.purity_min = 0.9;
    mb_status status = mb_sighter_create(&look, &out->brief);
    if (status != MB_OK) {
        return status;
    }
    look.length_s = LASTING_S;
    look.coherence_min = 0.2;
    look.purity_min = 0.8;
    status = mb_sighter_create(&look, &out->lasting);
    if (status != MB_OK) {
        acquisition_destroy(out);
    }
    return status;
}

void acquisition_destroy(acquisition *a)
{
    mb_sighter_destroy(a->brief);
    mb_sighter_destroy(a->lasting);
    a->brief = a->lasting = NULL;
}

void acquisition_reset(acquisition *a)
{
    a->brief_looks = a->lasting_looks = (agreement){0.0, 0};
    a->ticks = 0;
}

size_t acquisition_length(const acquisition *a)
{
    return mb_sighter_length(a->lasting);
}

static bool agree(agreement *looks, const mb_sighting *seen, double spread_hz, unsigned needed)
{
    bool same = looks->count > 0 && fabs(seen->offset_hz - looks->offset_hz) <= spread_hz;

    looks->count = !seen->accepted ? 0 : (same ? looks->count + 1 : 1);
    looks->offset_hz = seen->offset_hz;
    return looks->count >= needed;
}

bool acquisition_look(acquisition *a, const mb_cf32 *end, mb_sighting *found, size_t *length)
{
    *length = mb_sighter_length(a->brief);
    *found = mb_sighter_look(a->brief, end - *length);
    if (agree(&a->brief_looks, found, BRIEF_SPREAD_HZ, BRIEF_LOOKS)) {
        return true;
    }
    if (++a->ticks % LASTING_EVERY != 0) {
        return false;
    }
    *length = mb_sighter_length(a->lasting);
    *found = mb_sighter_look(a->lasting, end - *length);
    return agree(&a->lasting_looks, found, LASTING_SPREAD_HZ, LASTING_LOOKS);
}

mb_sighting acquisition_check(acquisition *a, const mb_cf32 *end, double offset_hz, mb_sighting *elsewhere)
{
    return mb_sighter_look_at(a->lasting, end - mb_sighter_length(a->lasting), offset_hz, elsewhere);
}
