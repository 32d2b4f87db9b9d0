/* What the assessment takes from the track of a carrier: turning back, drift, activity, errors. */
#include "assess_iq.h"

#include <math.h>

/* Rate at which the envelope is handed to the speech meter, the lowest it takes. */
static const double meter_rate_hz = 1000.0;

track_turner track_turner_begin(const mb_recording *recording, double rate_hz, double receive_offset_hz,
                                double mean_hz)
{
    return (track_turner){
        .recording = recording, .rate_hz = rate_hz, .from_centre_hz = receive_offset_hz - mean_hz};
}

/* Sets the oscillator to the line that holds the next sample; returns how many samples lie on it. */
static size_t enter_line(track_turner *t)
{
    size_t count = mb_recording_point_count(t->recording);

    if (count < 2) {
        return SIZE_MAX;
    }
    mb_track_point from = mb_recording_point(t->recording, t->at),
                   to = mb_recording_point(t->recording, t->at + 1);
    while (t->at + 2 < count && (double)t->position >= ceil(to.time_s * t->rate_hz)) {
        from = to;
        to = mb_recording_point(t->recording, ++t->at + 1);
    }
    double slope_hz = (to.phase_rad - from.phase_rad) / (2.0 * MB_PI * (to.time_s - from.time_s));
    mb_oscillator_set(&t->oscillator, -(slope_hz + t->from_centre_hz), t->rate_hz);
    double end = ceil(to.time_s * t->rate_hz);
    return (double)t->position < end ? (size_t)(end - (double)t->position) : SIZE_MAX;
}

void track_turner_process(track_turner *t, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    for (size_t done = 0; done < n;) {
        size_t left = enter_line(t), run = left < n - done ? left : n - done;
        mb_oscillator_rotate(&t->oscillator, in + done, run, out + done);
        t->position += run;
        done += run;
    }
}

static bool has_voice(const mb_track_point *point)
{
    return point->mode == MB_CARRIER_LOCKED;
}

void track_mean(const mb_recording *recording, double *offset_hz, double *drift_hz_per_s)
{
    size_t points = mb_recording_point_count(recording);
    double count = 0.0, mean_s = 0.0, mean_hz = 0.0, square = 0.0, product = 0.0;

    for (size_t i = 0; i < points; i++) {
        mb_track_point point = mb_recording_point(recording, i);
        if (has_voice(&point)) {
            count += 1.0;
            double from_s = point.time_s - mean_s;
            mean_s += from_s / count;
            mean_hz += (point.carrier_offset_hz - mean_hz) / count;
            square += from_s * (point.time_s - mean_s);
            product += from_s * (point.carrier_offset_hz - mean_hz);
        }
    }
    *offset_hz = count > 0.0 ? mean_hz : mb_recording_state(recording).carrier.carrier_offset_hz;
    *drift_hz_per_s = square > 0.0 ? product / square : 0.0;
}

/* Both arms hold half of the noise each, so their difference is the power of the message alone; where it
 * pauses the difference is as often negative and counts as silence. */
static double message_magnitude(const mb_track_point *point)
{
    return sqrt(fmax(mb_db_power(point->in_phase_dbfs) - mb_db_power(point->quadrature_dbfs), 0.0));
}

mb_status track_activity(const mb_recording *recording, double *activity)
{
    enum { PART = 64 };
    size_t points = mb_recording_point_count(recording);
    mb_speech_meter *meter = NULL;
    mb_status status = mb_speech_meter_create(meter_rate_hz, &meter);
    double begun_s = points > 0 ? mb_recording_point(recording, 0).time_s : 0.0;
    uint64_t fed = 0;

    if (status != MB_OK) {
        return status;
    }
    for (size_t i = 0; i < points; i++) {
        mb_track_point point = mb_recording_point(recording, i);
        double end_s = i + 1 < points ? mb_recording_point(recording, i + 1).time_s : point.time_s;
        uint64_t end = (uint64_t)llround((end_s - begun_s) * meter_rate_hz);
        float envelope[PART];
        size_t run = end - fed < PART ? (size_t)(end - fed) : PART;
        for (size_t k = 0; k < run; k++) {
            envelope[k] = (float)message_magnitude(&point);
        }
        mb_speech_meter_process_f32(meter, envelope, run);
        fed = end;
    }
    *activity = mb_speech_meter_state(meter).activity;
    mb_speech_meter_destroy(meter);
    return MB_OK;
}

static void judge_point(truth_judge *judge, const mb_track_point *point, double truth_hz)
{
    if (has_voice(point)) {
        double error = point->carrier_offset_hz - truth_hz;
        judge->count++;
        judge->truth_sum += truth_hz;
        judge->error_sum += error;
        judge->error_square += error * error;
    }
}

void truth_judge_row(truth_judge *judge, double time_s, double offset_hz, truth_at_point callback, void *user)
{
    size_t points = mb_recording_point_count(judge->recording);

    if (!isfinite(time_s) || !isfinite(offset_hz) || (judge->any && time_s <= judge->last_s)) {
        return;
    }
    while (judge->at < points) {
        mb_track_point point = mb_recording_point(judge->recording, judge->at);
        if (point.time_s > time_s) {
            break;
        }
        if (judge->any && point.time_s >= judge->last_s) {
            double share = (point.time_s - judge->last_s) / (time_s - judge->last_s);
            double truth_hz = judge->last_hz + share * (offset_hz - judge->last_hz);
            judge_point(judge, &point, truth_hz);
            callback(user, judge->at, truth_hz);
        }
        judge->at++;
    }
    judge->any = true;
    judge->last_s = time_s;
    judge->last_hz = offset_hz;
}
