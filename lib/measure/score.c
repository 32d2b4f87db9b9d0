#include "score.h"

#include <math.h>
#include <string.h>

static const double low_hz = 250.0, high_hz = 2800.0, frame_s = 0.02, segment_fir_s = 0.002;

mb_score_settings mb_score_settings_default(void)
{
    return (mb_score_settings){
        .rate_hz = 8000.0, .max_delay_s = 1.0, .fir_span_s = 0.006, .skip_s = 0.0, .segment_s = 1.0};
}

static mb_status check(const mb_score_settings *settings)
{
    mb_status status = mb_check_range("rate_hz", settings->rate_hz, 6000.0, 16000.0, "Hz");

    if (status == MB_OK) {
        status = mb_check_range("max_delay_s", settings->max_delay_s, 0.01, 4.0, "s");
    }
    if (status == MB_OK) {
        status = mb_check_range("fir_span_s", settings->fir_span_s, 0.0005, 0.006, "s");
    }
    if (status == MB_OK) {
        status = mb_check_range("skip_s", settings->skip_s, 0.0, 3600.0, "s");
    }
    if (status == MB_OK) {
        status = mb_check_range("segment_s", settings->segment_s, 0.2, 10.0, "s");
    }
    return status;
}

/* Odd number of taps whose span is at most span_s. */
static size_t taps_of(double span_s, double rate_hz)
{
    return (size_t)(span_s * rate_hz / 2.0 + 1e-9) * 2 + 1;
}

static mb_status add_bands(mb_score *score)
{
    const double transition_hz = 309.0, attenuation_db = 81.3;
    mb_fir_settings settings = {0};
    float *taps = NULL;
    mb_status status = mb_design_bandpass(low_hz, high_hz, transition_hz, attenuation_db,
                                          score->settings.rate_hz, &taps, &settings.tap_count);

    settings.taps = taps;
    for (int i = 0; i < 2 && status == MB_OK; i++) {
        status = mb_fir_create(&settings, &score->band[i]);
    }
    mb_release(taps);
    return status;
}

static mb_status add_buffers(mb_score *score, size_t max_lag)
{
    bool had = true;

    for (int i = 0; i < 2; i++) {
        score->chunk[i] = mb_allocate(MB_SCORE_CHUNK, sizeof *score->chunk[i]);
        score->queue[i].room = max_lag + MB_SCORE_CHUNK;
        score->queue[i].samples = mb_allocate(score->queue[i].room, sizeof *score->queue[i].samples);
        had = had && score->chunk[i] != NULL && score->queue[i].samples != NULL;
    }
    return had ? MB_OK : mb_fail(MB_ERROR_MEMORY, "", "no memory for a score");
}

static mb_status build(mb_score *score)
{
    const mb_score_settings *settings = &score->settings;
    size_t max_lag = (size_t)(settings->max_delay_s * settings->rate_hz);
    mb_status status = add_bands(score);

    score->frame = (size_t)(frame_s * settings->rate_hz);
    score->segment.length = (size_t)(settings->segment_s * settings->rate_hz);
    if (status == MB_OK) {
        status = add_buffers(score, max_lag);
    }
    if (status == MB_OK) {
        status = mb_lag_finder_create(max_lag, &score->finder);
    }
    if (status == MB_OK) {
        status = mb_fir_fit_create(taps_of(settings->fir_span_s, settings->rate_hz), &score->whole);
    }
    if (status == MB_OK) {
        double span_s = fmin(segment_fir_s, settings->fir_span_s);
        status = mb_fir_fit_create(taps_of(span_s, settings->rate_hz), &score->segment.fit);
    }
    return status;
}

mb_status mb_score_create(const mb_score_settings *settings, mb_score **out)
{
    *out = NULL;
    mb_status status = check(settings);
    if (status != MB_OK) {
        return status;
    }
    mb_score *score = mb_allocate(1, sizeof *score);
    if (score == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a score");
    }
    score->settings = *settings;
    status = build(score);
    if (status != MB_OK) {
        mb_score_destroy(score);
        return status;
    }
    mb_score_reset(score);
    *out = score;
    return MB_OK;
}

void mb_score_reset(mb_score *score)
{
    score->pass = MB_PASS_ALIGN;
    mb_score_restart_bands(score);
    mb_lag_finder_reset(score->finder);
    memset(&score->levels, 0, sizeof score->levels);
    memset(&score->snrs, 0, sizeof score->snrs);
    score->frame_fill = 0;
    score->frame_square = 0.0;
    score->queue[0].fill = score->queue[1].fill = 0;
    score->scored = score->polarity_changes = score->non_finite = 0;
    mb_fir_fit_reset(score->whole);
    mb_score_restart_segment(&score->segment);
    score->segment.polarity = 0;
}

void mb_score_destroy(mb_score *score)
{
    if (score == NULL) {
        return;
    }
    for (int i = 0; i < 2; i++) {
        mb_fir_destroy(score->band[i]);
        mb_release(score->chunk[i]);
        mb_release(score->queue[i].samples);
    }
    mb_lag_finder_destroy(score->finder);
    mb_fir_fit_destroy(score->whole);
    mb_fir_fit_destroy(score->segment.fit);
    mb_release(score);
}

void mb_score_align(mb_score *score, const float *message, const float *audio, size_t count)
{
    if (score->pass == MB_PASS_ALIGN) {
        mb_score_take(score, message, audio, count);
    }
}

mb_status mb_score_aligned(mb_score *score)
{
    if (score->pass != MB_PASS_ALIGN) {
        return mb_fail(MB_ERROR_ARGUMENT, "", "the first pass of this score has ended already");
    }
    mb_score_take(score, NULL, NULL, mb_fir_delay_samples(score->band[0])); /* what the filters still hold */
    score->pass = MB_PASS_WAIT;
    mb_status status = mb_lag_finder_end(score->finder, &score->lag);
    if (status != MB_OK) {
        return status;
    }
    score->queue[0].drop = score->lag < 0 ? (size_t)-score->lag : 0;
    score->queue[1].drop = score->lag > 0 ? (size_t)score->lag : 0;
    score->skip = (uint64_t)(score->settings.skip_s * score->settings.rate_hz);
    score->active_floor = 0.1 * mb_frame_levels_active(&score->levels);
    mb_score_restart_bands(score);
    score->pass = MB_PASS_FIT;
    return MB_OK;
}

void mb_score_fit(mb_score *score, const float *message, const float *audio, size_t count)
{
    if (score->pass == MB_PASS_FIT) {
        mb_score_take(score, message, audio, count);
    }
}

mb_status mb_score_finish(mb_score *score, mb_score_result *result)
{
    *result = (mb_score_result){.segment_median_db = NAN, .segment_worst_db = NAN};
    if (score->pass != MB_PASS_FIT) {
        return mb_fail(MB_ERROR_ARGUMENT, "", "a score is finished once, after its second pass");
    }
    mb_score_take(score, NULL, NULL, mb_fir_delay_samples(score->band[0])); /* what the filters still hold */
    score->pass = MB_PASS_DONE;
    mb_fir_fit_result fit = mb_fir_fit_solve(score->whole);
    if (fit.message_power <= 0.0 || fit.error_power <= 0.0) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "",
                       "message or audio is silent in the %g s that were to be scored",
                       (double)score->scored / score->settings.rate_hz);
    }
    result->snr_db = mb_power_db(fit.fit_power) - mb_power_db(fit.error_power);
    result->gain_db = mb_power_db(fit.fit_power) - mb_power_db(fit.message_power);
    result->delay_s = (double)score->lag / score->settings.rate_hz;
    result->segments = score->snrs.total;
    result->segment_median_db = mb_snr_counts_median(&score->snrs);
    result->segment_worst_db = score->snrs.total > 0 ? score->snrs.worst : NAN;
    result->polarity_changes = score->polarity_changes;
    result->scored_s = (double)score->scored / score->settings.rate_hz;
    result->non_finite = score->non_finite;
    return MB_OK;
}
