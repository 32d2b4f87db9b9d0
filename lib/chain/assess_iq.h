/** assess_iq.h - what the assessment of IQ samples holds, and what the picture takes from it. */
#ifndef CHAIN_ASSESS_IQ_H
#define CHAIN_ASSESS_IQ_H

#include "mirrorband/assess.h"
#include "mirrorband/filter.h"

enum { ASSESS_CHUNK = 8192, ASSESS_SCATTER = 2048, ASSESS_TRACK = 1500 };

/** Turns samples back by the track of a recording about its mean offset: straight lines between the points.
 */
typedef struct track_turner {
    const mb_recording *recording;
    double rate_hz, from_centre_hz; /* receive.offset_hz less the mean offset */
    mb_oscillator oscillator;
    size_t at;         /* the straight line from point `at` to the next is being followed */
    uint64_t position; /* of the next sample */
} track_turner;

track_turner track_turner_begin(const mb_recording *recording, double rate_hz, double receive_offset_hz,
                                double mean_hz);

/** n samples turned; in may be out. */
void track_turner_process(track_turner *turner, const mb_cf32 *in, size_t n, mb_cf32 *out);

/** Mean offset over the points with voice, and its least-squares slope; the summary of the recording and 0
 * without such points. */
void track_mean(const mb_recording *recording, double *offset_hz, double *drift_hz_per_s);

/** Share of the time with speech: ITU-T P.56 on the envelope less its noise. Errors: MEMORY. */
mb_status track_activity(const mb_recording *recording, double *activity);

/** The track held against the truth, row by row in order of time. */
typedef struct truth_judge {
    const mb_recording *recording;
    bool any;
    double last_s, last_hz; /* the row before */
    size_t at;              /* next point of the track */
    uint64_t count;         /* points with voice compared */
    double truth_sum, error_sum, error_square;
} truth_judge;

/** Called with each point of the track that the truth has reached. */
typedef void (*truth_at_point)(void *user, size_t index, double truth_hz);

void truth_judge_row(truth_judge *judge, double time_s, double offset_hz, truth_at_point callback,
                     void *user);

/** Points in the plane of the arms, thinned evenly: when full, every other one goes. */
typedef struct scatter {
    mb_fir *low_pass;
    float *taps;
    mb_cf32 *baseband;      /* of a chunk */
    double rate_hz, lead_s; /* time of the track = sample / rate + lead */
    uint64_t position, seen, stride;
    size_t count;
    double in_phase[ASSESS_SCATTER], quadrature[ASSESS_SCATTER];
} scatter;

mb_status scatter_create(const mb_recording *recording, double high_hz, scatter *out);
void scatter_destroy(scatter *s);

/** Takes a chunk of the input of the second pass. */
void scatter_take(scatter *s, mb_recording *recording, const mb_cf32 *in, size_t n);

struct mb_assess_iq {
    mb_assess_iq_settings settings;
    double half_width_hz;
    bool resolved, found;
    double carrier_hz, drift_hz_per_s, activity;
    mb_recording *recording;
    mb_emission *emission;
    track_turner turner;
    mb_cf32 *turned; /* a chunk */
    truth_judge judge;
    scatter *scatter; /* NULL: no picture */
    double *truth_hz; /* at every track_stride-th point of the track; NULL: no picture */
    size_t track_stride, track_count;
};

#endif
