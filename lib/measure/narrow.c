#include "narrow.h"

#include "mirrorband/filter.h"

#include <string.h>

enum { LANES = 8, ROOM = 4096 };

struct mb_narrow {
    size_t factor;
    size_t tap_count; /* a multiple of LANES; the oldest taps are zero */
    float *taps;      /* oldest sample first */
    mb_cf32 *history; /* tap_count - 1 old samples, then up to ROOM new ones */
    size_t fill;      /* samples in history */
    size_t start;     /* where the window of the next output begins */
};

static mb_status design(mb_narrow *narrow, const mb_narrow_settings *settings)
{
    float *taps = NULL;
    size_t count = 0;
    mb_status status = mb_design_lowpass((settings->pass_hz + settings->stop_hz) / 2.0,
                                         settings->stop_hz - settings->pass_hz, settings->attenuation_db,
                                         settings->rate_hz, &taps, &count);

    if (status != MB_OK) {
        return status;
    }
    narrow->tap_count = (count + LANES - 1) / LANES * LANES;
    narrow->taps = mb_allocate(narrow->tap_count, sizeof *narrow->taps);
    narrow->history = mb_allocate(narrow->tap_count - 1 + ROOM, sizeof *narrow->history);
    if (narrow->taps == NULL || narrow->history == NULL) {
        status = mb_fail(MB_ERROR_MEMORY, "", "no memory for a filter of %zu taps", count);
    } else {
        /* linear phase: the taps read the same from either end */
        memcpy(narrow->taps + (narrow->tap_count - count), taps, count * sizeof *taps);
    }
    mb_release(taps);
    return status;
}

mb_status mb_narrow_create(const mb_narrow_settings *settings, mb_narrow **out)
{
    *out = NULL;
    mb_narrow *narrow = mb_allocate(1, sizeof *narrow);
    if (narrow == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a filter");
    }
    narrow->factor = settings->factor;
    mb_status status = design(narrow, settings);
    if (status != MB_OK) {
        mb_narrow_destroy(narrow);
        return status;
    }
    mb_narrow_reset(narrow);
    *out = narrow;
    return MB_OK;
}

void mb_narrow_reset(mb_narrow *narrow)
{
    narrow->fill = narrow->tap_count - 1;
    narrow->start = 0;
    memset(narrow->history, 0, narrow->fill * sizeof *narrow->history);
}

void mb_narrow_destroy(mb_narrow *narrow)
{
    if (narrow == NULL) {
        return;
    }
    mb_release(narrow->taps);
    mb_release(narrow->history);
    mb_release(narrow);
}

/* Lanes written out, so that the order of additions is the same however the compiler arranges them. */
static mb_cf32 weighted_sum(const mb_cf32 *samples, const float *taps, size_t count)
{
    float re[LANES] = {0.0f}, im[LANES] = {0.0f};

    for (size_t i = 0; i < count; i += LANES) {
        for (size_t k = 0; k < LANES; k++) {
            re[k] += samples[i + k].re * taps[i + k];
            im[k] += samples[i + k].im * taps[i + k];
        }
    }
    for (size_t half = LANES / 2; half > 0; half /= 2) {
        for (size_t k = 0; k < half; k++) {
            re[k] += re[k + half];
            im[k] += im[k + half];
        }
    }
    return (mb_cf32){re[0], im[0]};
}

/* Moves what later outputs still need to the front. start may lie beyond fill when the factor is large. */
static void make_room(mb_narrow *narrow)
{
    size_t drop = narrow->start < narrow->fill ? narrow->start : narrow->fill;

    memmove(narrow->history, narrow->history + drop, (narrow->fill - drop) * sizeof *narrow->history);
    narrow->fill -= drop;
    narrow->start -= drop;
}

size_t mb_narrow_process(mb_narrow *narrow, const mb_cf32 *in, size_t count, mb_cf32 *out)
{
    size_t made = 0, used = 0;

    while (used < count) {
        size_t room = narrow->tap_count - 1 + ROOM - narrow->fill;
        size_t part = count - used < room ? count - used : room;
        memcpy(narrow->history + narrow->fill, in + used, part * sizeof *in);
        narrow->fill += part;
        used += part;
        while (narrow->start + narrow->tap_count <= narrow->fill) {
            out[made++] = weighted_sum(narrow->history + narrow->start, narrow->taps, narrow->tap_count);
            narrow->start += narrow->factor;
        }
        make_room(narrow);
    }
    return made;
}
