#include "knots.h"

#include <math.h>
#include <string.h>

enum { LONGEST_LOOK_BACK = 500 }; /* knots behind a pause that say how the voice goes on there */
#define SURE_SIGMA_RAD 0.15       /* phase predicted better than this needs no look behind the pause */

knot *knot_list_at(const knot_list *list, size_t index)
{
    return &list->pieces[index / KNOTS_PER_PIECE].knots[index % KNOTS_PER_PIECE];
}

static bool add_piece(knot_list *list)
{
    if (list->piece_count == list->piece_room) {
        size_t room = list->piece_room > 0 ? 2 * list->piece_room : 64;
        knot_piece *pieces = mb_allocate(room, sizeof *pieces);
        if (pieces == NULL) {
            return false;
        }
        if (list->piece_count > 0) {
            memcpy(pieces, list->pieces, list->piece_count * sizeof *pieces);
        }
        mb_release(list->pieces);
        list->pieces = pieces;
        list->piece_room = room;
    }
    knot *piece = mb_allocate(KNOTS_PER_PIECE, sizeof *piece);
    if (piece == NULL) {
        return false;
    }
    list->pieces[list->piece_count++].knots = piece;
    return true;
}

bool knot_list_reserve(knot_list *list, size_t count)
{
    while (list->piece_count * KNOTS_PER_PIECE < count) {
        if (!add_piece(list)) {
            return false;
        }
    }
    list->count = count > list->count ? count : list->count;
    return true;
}

void knot_list_free(knot_list *list)
{
    for (size_t i = 0; i < list->piece_count; i++) {
        mb_release(list->pieces[i].knots);
    }
    mb_release(list->pieces);
    *list = (knot_list){0};
}

/* One way of going through the knots. */
typedef struct pass {
    const knot_list *list;
    const mb_recovery_settings *settings;
    double step_s;
} pass;

/* First knot behind `from` that begins an uncertain pause, or a new track, or the end. */
static size_t stretch_end(const pass *p, size_t from)
{
    size_t end = from + LONGEST_LOOK_BACK, idle = 0;

    for (size_t i = from + 1; i < p->list->count && i < end; i++) {
        const knot *at = knot_list_at(p->list, i);
        idle = at->variance_rad2 > 0.0f ? 0 : idle + 1;
        if (at->restart || !at->known) {
            return i;
        }
        if (idle > 50) {
            return i - idle + 1;
        }
    }
    return end < p->list->count ? end : p->list->count;
}

/* State at knot `from` as the stretch of voice behind it alone tells it, going back in time. */
static mb_phase_state state_from_behind(const pass *p, size_t from)
{
    const double turn = 2.0 * MB_PI;
    size_t at = stretch_end(p, from) - 1;

    while (at > from && knot_list_at(p->list, at)->variance_rad2 <= 0.0f) {
        at--;
    }
    const knot *last = knot_list_at(p->list, at);
    double drift_sigma = turn * p->settings->drift_sigma_hz_s;
    mb_phase_state state = {
        .phase_rad = last->measured_rad,
        .frequency_rad_s = last->filtered.frequency_rad_s,
        .covariance = {(double)last->variance_rad2, 0.0, 0.0, (turn * 2.0) * (turn * 2.0), 0.0,
                       drift_sigma * drift_sigma},
    };
    while (at > from) {
        mb_phase_predict(&state, &p->settings->noise, -p->step_s);
        const knot *next = knot_list_at(p->list, --at);
        if (next->variance_rad2 > 0.0f) {
            mb_phase_update(&state, next->measured_rad - state.phase_rad, (double)next->variance_rad2);
        }
    }
    return state;
}

/*
 * Multiple of pi to add behind a pause: a is the prediction over it, b what is known behind it, both with
 * frequency and drift. d = b - a + k pi in phase is least surprising, d' inverse(S) d least, at real k =
 * -(inverse(S) d)_0 / (pi inverse(S)_00); the nearest whole number is taken. It is sure when the next one is
 * less likely by a factor of 100 or more, which the difference of the two quadratic forms tells.
 */
static double branch_step(const mb_phase_state *a, const mb_phase_state *b, bool *sure)
{
    double s[6], d[3] = {b->phase_rad - a->phase_rad, b->frequency_rad_s - a->frequency_rad_s,
                         b->drift_rad_s2 - a->drift_rad_s2};

    for (int i = 0; i < 6; i++) {
        s[i] = a->covariance[i] + b->covariance[i];
    }
    double i00 = s[3] * s[5] - s[4] * s[4]; /* first row of the inverse, times the determinant */
    double i01 = s[2] * s[4] - s[1] * s[5];
    double i02 = s[1] * s[4] - s[2] * s[3];
    double determinant = s[0] * i00 + s[1] * i01 + s[2] * i02;
    double best = -(d[0] + (i01 * d[1] + i02 * d[2]) / i00) / MB_PI, whole = nearbyint(best);
    double less_likely = MB_PI * MB_PI * i00 / determinant * (1.0 - 2.0 * fabs(best - whole));
    *sure = *sure && less_likely > 2.0 * log(100.0);
    return MB_PI * whole;
}

static mb_phase_state restart_state(const knot *at, const mb_phase_state *predicted)
{
    mb_phase_state state = at->filtered;

    state.phase_rad = nearest_branch(state.phase_rad, predicted->phase_rad);
    return state;
}

/* Filters forward with the branches settled; the knots get the states anew. False if a branch was not sure.
 */
static bool filter_forward(const pass *p, size_t first)
{
    bool sure = true;
    mb_phase_state state = knot_list_at(p->list, first)->filtered;
    double branch = 0.0; /* added to all that was measured from here on */

    for (size_t i = first; i < p->list->count; i++) {
        knot *at = knot_list_at(p->list, i);
        if (at->restart && i > first) {
            sure = false; /* what lies between two locks says nothing of the polarity */
            double before = at->filtered.phase_rad;
            state = restart_state(at, &state);
            branch = state.phase_rad - before;
        }
        if (at->variance_rad2 > 0.0f) {
            if (state.covariance[0] > SURE_SIGMA_RAD * SURE_SIGMA_RAD && i > first && !at->restart) {
                mb_phase_state behind = state_from_behind(p, i);
                behind.phase_rad += branch;
                branch += branch_step(&state, &behind, &sure);
            }
            double variance = (double)at->variance_rad2;
            double limit = 5.0 * sqrt(state.covariance[0] + variance);
            double innovation = at->measured_rad + branch - state.phase_rad;
            mb_phase_update(&state, fmax(-limit, fmin(limit, innovation)), variance);
        }
        at->filtered = state;
        mb_phase_predict(&state, &p->settings->noise, p->step_s);
    }
    return sure;
}

static void smooth_back(const pass *p, size_t first)
{
    for (size_t i = p->list->count - 1; i > first; i--) {
        const knot *later = knot_list_at(p->list, i);
        if (!later->restart) {
            mb_phase_smooth(&knot_list_at(p->list, i - 1)->filtered, &p->settings->noise, p->step_s,
                            &later->filtered);
        }
    }
}

/* What came before the first lock is told by what followed it. */
static void carry_to_start(const pass *p, size_t first)
{
    mb_phase_state state = knot_list_at(p->list, first)->filtered;

    for (size_t i = first; i > 0; i--) {
        mb_phase_predict(&state, &p->settings->noise, -p->step_s);
        knot_list_at(p->list, i - 1)->filtered = state;
    }
}

bool knots_smooth(knot_list *list, const mb_recovery_settings *settings, double step_s)
{
    pass p = {list, settings, step_s};
    size_t first = 0;

    while (first < list->count && !knot_list_at(list, first)->known) {
        first++;
    }
    if (first == list->count) {
        return true;
    }
    bool sure = filter_forward(&p, first);
    smooth_back(&p, first);
    carry_to_start(&p, first);
    return sure;
}
