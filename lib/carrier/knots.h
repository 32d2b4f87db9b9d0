/** knots.h - the knots of a whole recording, and their smoothing forward and back. */
#ifndef CARRIER_KNOTS_H
#define CARRIER_KNOTS_H

#include "follower.h"

/** A run of KNOTS_PER_PIECE knots. */
typedef struct knot_piece {
    knot *knots;
} knot_piece;

/** Grows in pieces, so that no knot is ever copied. */
typedef struct knot_list {
    knot_piece *pieces;
    size_t piece_count, piece_room;
    size_t count;
} knot_list;

enum { KNOTS_PER_PIECE = 4096 };

/** Makes room so that the list holds `count` knots; false without memory. */
bool knot_list_reserve(knot_list *list, size_t count);
knot *knot_list_at(const knot_list *list, size_t index);
void knot_list_free(knot_list *list);

/**
 * Replaces the filtered states by smoothed ones, with the branch of pi settled behind every pause; false if
 * one of them might as well be the other way round.
 */
bool knots_smooth(knot_list *list, const mb_recovery_settings *settings, double step_s);

#endif
