#include "track.h"

#include <math.h>

static const char *const columns[] = {"time_s",        "carrier_offset_hz", "lock_quality",    "snr_db",
                                      "in_phase_dbfs", "quadrature_dbfs",   "phase_sigma_rad", "mode"};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

mb_status app_track_begin(app_track *track, const char *path)
{
    *track = (app_track){.table = NULL};
    if (path == NULL) {
        return MB_OK;
    }
    return mb_table_writer_create(path, columns, COLUMNS,
                                  "track of mb-receive; mode: 0 search, 1 locked, 2 hold (pause), 3 lost",
                                  &track->table);
}

static double mode_number(mb_carrier_mode mode)
{
    switch (mode) {
    case MB_CARRIER_LOCKED:
        return 1.0;
    case MB_CARRIER_HOLD:
        return 2.0;
    case MB_CARRIER_LOST:
        return 3.0;
    case MB_CARRIER_SEARCH:
        break;
    }
    return 0.0;
}

mb_status app_track_point(app_track *track, const mb_track_point *point)
{
    /* 10 log10 of 1/cos^2 of a small error e is 10/ln(10) e^2 */
    const double loss_db_per_rad2 = 10.0 / log(10.0);
    const double row[COLUMNS] = {point->time_s,          point->carrier_offset_hz, point->lock_quality,
                                 point->snr_db,          point->in_phase_dbfs,     point->quadrature_dbfs,
                                 point->phase_sigma_rad, mode_number(point->mode)};

    if (point->mode == MB_CARRIER_LOCKED) {
        track->sum.count++;
        track->sum.carrier_offset_hz += point->carrier_offset_hz;
        track->sum.lock_quality += point->lock_quality;
        track->sum.snr_db += point->snr_db;
        track->sum.loss_db += loss_db_per_rad2 * point->phase_sigma_rad * point->phase_sigma_rad;
    }
    return track->table != NULL ? mb_table_writer_row(track->table, row) : MB_OK;
}

app_track_means app_track_mean(const app_track *track)
{
    app_track_means mean = track->sum;
    double share = mean.count > 0 ? 1.0 / (double)mean.count : (double)NAN;

    mean.carrier_offset_hz *= share;
    mean.lock_quality *= share;
    mean.snr_db *= share;
    mean.loss_db *= share;
    return mean;
}

mb_track_point app_track_live(const mb_carrier_state *state)
{
    return (mb_track_point){.time_s = state->time_s,
                            .carrier_offset_hz = state->carrier_offset_hz,
                            .phase_sigma_rad = state->phase_sigma_rad,
                            .lock_quality = state->lock_quality,
                            .snr_db = state->snr_db,
                            .in_phase_dbfs = state->in_phase_dbfs,
                            .quadrature_dbfs = state->quadrature_dbfs,
                            .mode = state->mode};
}
