/** track.h - what a receiver did over time: the table of --track, and the means over tracked voice. */
#ifndef APPS_COMMON_TRACK_H
#define APPS_COMMON_TRACK_H

#include "mirrorband/carrier.h"
#include "mirrorband/files.h"

/** Means over the instants at which voice was tracked. */
typedef struct app_track_means {
    uint64_t count;
    double carrier_offset_hz;
    double lock_quality;
    double snr_db;
    double loss_db; /* against ideal detection: of cos^2 of the phase error by the tracker's own variance */
} app_track_means;

/** A track being written. */
typedef struct app_track {
    mb_table_writer *table; /* NULL: none is wanted, only means */
    app_track_means sum;
} app_track;

/** Starts the table; path NULL: means only. Errors: as mb_table_writer_create. */
mb_status app_track_begin(app_track *track, const char *path);

/** Takes one instant. Errors: FILE. */
mb_status app_track_point(app_track *track, const mb_track_point *point);

/** Means so far; NaN when no voice was tracked. */
app_track_means app_track_mean(const app_track *track);

/** An instant of live reception in the form of a point. */
mb_track_point app_track_live(const mb_carrier_state *state);

#endif
