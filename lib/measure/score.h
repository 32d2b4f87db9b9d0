/* What mb_score holds, and the work on its two streams; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_SCORE_H
#define MIRRORBAND_MEASURE_SCORE_H

#include "fir_fit.h"
#include "lag_finder.h"
#include "score_counts.h"

#include "mirrorband/filter.h"
#include "mirrorband/measure.h"

enum { MB_SCORE_CHUNK = 1024 };

typedef enum mb_score_pass { MB_PASS_ALIGN, MB_PASS_WAIT, MB_PASS_FIT, MB_PASS_DONE } mb_score_pass;

/* Filtered samples that wait for their partner in the other stream. */
typedef struct mb_score_queue {
    float *samples;
    size_t fill;
    size_t room;
    size_t drop; /* of the next samples, not to be queued */
    size_t tail; /* what the filter still gives after the end of the stream */
} mb_score_queue;

typedef struct mb_score_segment {
    mb_fir_fit *fit;
    size_t length, fill;
    double message_square, product;
    int polarity; /* of the last active one; 0: none yet */
} mb_score_segment;

struct mb_score {
    mb_score_settings settings;
    mb_score_pass pass;
    mb_fir *band[2]; /* of message and audio */
    float *chunk[2];
    size_t settle; /* filter outputs still to be dropped, so that its delay vanishes */
    mb_lag_finder *finder;
    mb_frame_levels levels;
    size_t frame, frame_fill;
    double frame_square;
    ptrdiff_t lag;
    double active_floor; /* mean square from which on a segment is active */
    mb_score_queue queue[2];
    uint64_t skip, scored;
    mb_fir_fit *whole;
    mb_score_segment segment;
    mb_snr_counts snrs;
    uint64_t polarity_changes, non_finite;
};

/* Starts the band filters anew and sees to it that their delay vanishes. */
void mb_score_restart_bands(mb_score *score);
/* Forgets the segment being filled. */
void mb_score_restart_segment(mb_score_segment *segment);
/* Takes samples of both streams through the band filters into the pass that is on; NULL: that stream has
 * ended. */
void mb_score_take(mb_score *score, const float *message, const float *audio, size_t count);

#endif
