#include "mirrorband/measure.h"

#include <math.h>

enum { ROOM = 4098 }; /* 4096 points ahead, and one on each side of the moment */

struct mb_ideal {
    mb_ideal_settings settings;
    mb_phase_point ring[ROOM];
    uint64_t first;    /* oldest point kept, counted from the first one offered */
    uint64_t taken;    /* points taken in all */
    uint64_t at;       /* the last point that is not later than the sample */
    uint64_t position; /* sample */
    uint64_t non_finite;
    bool ended;
};

mb_ideal_settings mb_ideal_settings_default(void)
{
    return (mb_ideal_settings){.rate_hz = 16000.0, .linear = false};
}

mb_status mb_ideal_create(const mb_ideal_settings *settings, mb_ideal **out)
{
    *out = NULL;
    mb_status status = mb_check_range("rate_hz", settings->rate_hz, 1000.0, 64e6, "Hz");
    if (status != MB_OK) {
        return status;
    }
    mb_ideal *ideal = mb_allocate(1, sizeof *ideal);
    if (ideal == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for ideal detection");
    }
    ideal->settings = *settings;
    *out = ideal;
    return MB_OK;
}

void mb_ideal_reset(mb_ideal *ideal)
{
    ideal->first = ideal->taken = ideal->at = ideal->position = ideal->non_finite = 0;
    ideal->ended = false;
}

void mb_ideal_destroy(mb_ideal *ideal)
{
    mb_release(ideal);
}

uint64_t mb_ideal_non_finite(const mb_ideal *ideal)
{
    return ideal->non_finite;
}

static const mb_phase_point *point(const mb_ideal *ideal, uint64_t index)
{
    return &ideal->ring[index % ROOM];
}

size_t mb_ideal_track(mb_ideal *ideal, const mb_phase_point *points, size_t count)
{
    size_t used = 0;

    while (used < count && ideal->taken - ideal->first < ROOM) {
        const mb_phase_point *next = &points[used++];
        bool later = ideal->taken == 0 || next->time_s > point(ideal, ideal->taken - 1)->time_s;
        if (later && isfinite(next->time_s) && isfinite(next->phase_rad)) {
            ideal->ring[ideal->taken++ % ROOM] = *next;
        }
    }
    return used;
}

void mb_ideal_track_end(mb_ideal *ideal)
{
    ideal->ended = true;
}

/* Goes on to the points around a time; false when the track does not reach there yet. */
static bool advance(mb_ideal *ideal, double time_s)
{
    while (ideal->at + 1 < ideal->taken && point(ideal, ideal->at + 1)->time_s <= time_s) {
        ideal->at++;
    }
    if (ideal->at > ideal->first + 1) {
        ideal->first = ideal->at - 1;
    }
    return ideal->ended || ideal->at + (ideal->settings.linear ? 1 : 2) < ideal->taken;
}

/* Slope of the straight line from one point to the next. */
static double chord(const mb_ideal *ideal, uint64_t index)
{
    const mb_phase_point *a = point(ideal, index), *b = point(ideal, index + 1);

    return (b->phase_rad - a->phase_rad) / (b->time_s - a->time_s);
}

/* Slope at a point of the parabola through it and its neighbours; at an end, of the parabola through the last
 * three points there; of the line with only two. A steady drift of frequency is followed exactly. */
static double slope_at(const mb_ideal *ideal, uint64_t index)
{
    uint64_t last = ideal->taken - 1, middle = index;

    if (last == ideal->first) {
        return 0.0;
    }
    if (last - ideal->first < 2) {
        return chord(ideal, ideal->first);
    }
    middle = middle == ideal->first ? middle + 1 : middle;
    middle = middle == last ? middle - 1 : middle;
    double before_s = point(ideal, middle)->time_s - point(ideal, middle - 1)->time_s;
    double after_s = point(ideal, middle + 1)->time_s - point(ideal, middle)->time_s;
    double before = chord(ideal, middle - 1), after = chord(ideal, middle);
    double bend = (after - before) / (before_s + after_s);
    double at_middle = (before * after_s + after * before_s) / (before_s + after_s);
    return at_middle + 2.0 * bend * (point(ideal, index)->time_s - point(ideal, middle)->time_s);
}

/* Cubic with given values and slopes at both ends, u from 0 to 1 over span_s. */
static double between(const mb_ideal *ideal, double time_s)
{
    const mb_phase_point *a = point(ideal, ideal->at), *b = point(ideal, ideal->at + 1);
    double span_s = b->time_s - a->time_s, u = (time_s - a->time_s) / span_s,
           rise = b->phase_rad - a->phase_rad;

    if (ideal->settings.linear) {
        return a->phase_rad + u * rise;
    }
    double from = slope_at(ideal, ideal->at) * span_s, to = slope_at(ideal, ideal->at + 1) * span_s;
    return a->phase_rad + u * (from + u * (3.0 * rise - 2.0 * from - to + u * (from + to - 2.0 * rise)));
}

static double phase_at(const mb_ideal *ideal, double time_s)
{
    if (ideal->taken == 0) {
        return 0.0;
    }
    const mb_phase_point *near = point(ideal, ideal->at);
    bool outside = time_s < near->time_s || ideal->at + 1 >= ideal->taken;
    return outside ? near->phase_rad + slope_at(ideal, ideal->at) * (time_s - near->time_s)
                   : between(ideal, time_s);
}

size_t mb_ideal_process(mb_ideal *ideal, const mb_cf32 *in, size_t count, float *out)
{
    size_t made = 0;

    while (made < count) {
        double time_s = (double)ideal->position / ideal->settings.rate_hz;
        if (!advance(ideal, time_s)) {
            break;
        }
        double phase = phase_at(ideal, time_s);
        bool good = isfinite(in[made].re) && isfinite(in[made].im);
        ideal->non_finite += !good;
        out[made] = good ? (float)(in[made].re * cos(phase) + in[made].im * sin(phase)) : 0.0f;
        made++;
        ideal->position++;
    }
    return made;
}
