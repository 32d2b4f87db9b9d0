#include "assess_iq.h"

#include <math.h>

mb_assess_iq_settings mb_assess_iq_settings_default(void)
{
    return (mb_assess_iq_settings){
        .receive = mb_receive_settings_default(), .half_width_hz = 4000.0, .resolution_hz = 10.0};
}

static mb_status check(const mb_assess_iq_settings *s)
{
    bool tones = s->tone_low_hz != 0.0 || s->tone_high_hz != 0.0;

    if (mb_check_range("half_width_hz", s->half_width_hz, 500.0, 20000.0, "Hz") != MB_OK ||
        mb_check_range("resolution_hz", s->resolution_hz, 2.0, 100.0, "Hz") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    if (tones && (mb_check_range("tone_low_hz", s->tone_low_hz, 50.0, 10000.0, "Hz") != MB_OK ||
                  mb_check_range("tone_high_hz", s->tone_high_hz, s->tone_low_hz, 10000.0, "Hz") != MB_OK)) {
        return MB_ERROR_ARGUMENT;
    }
    return MB_OK;
}

mb_status mb_assess_iq_create(const mb_assess_iq_settings *settings, mb_assess_iq **out)
{
    *out = NULL;
    if (check(settings) != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_assess_iq *assess = mb_allocate(1, sizeof *assess);
    if (assess == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory to assess IQ samples");
    }
    assess->settings = *settings;
    mb_status status = mb_recording_create(&settings->receive, &assess->recording);
    if (status == MB_OK && (assess->turned = mb_allocate(ASSESS_CHUNK, sizeof *assess->turned)) == NULL) {
        status = mb_fail(MB_ERROR_MEMORY, "", "no memory to assess IQ samples");
    }
    if (status != MB_OK) {
        mb_assess_iq_destroy(assess);
        return status;
    }
    *out = assess;
    return MB_OK;
}

void mb_assess_iq_destroy(mb_assess_iq *assess)
{
    if (assess != NULL) {
        mb_recording_destroy(assess->recording);
        mb_emission_destroy(assess->emission);
        if (assess->scatter != NULL) {
            scatter_destroy(assess->scatter);
        }
        mb_release(assess->scatter);
        mb_release(assess->truth_hz);
        mb_release(assess->turned);
        mb_release(assess);
    }
}

mb_status mb_assess_iq_listen(mb_assess_iq *assess, const mb_cf32 *in, size_t n)
{
    return mb_recording_listen_cf32(assess->recording, in, n);
}

/* The analyser, about the carrier; where the band ends close by, what lies as near on both sides. */
static mb_status create_emission(mb_assess_iq *assess)
{
    mb_emission_settings emission = mb_emission_settings_default();
    double rate_hz = assess->settings.receive.rate_hz;
    double room_hz = fmin(0.5 * rate_hz - fabs(assess->carrier_hz), 0.45 * rate_hz);

    assess->half_width_hz = fmin(assess->settings.half_width_hz, room_hz);
    emission.rate_hz = rate_hz;
    emission.carrier_offset_hz = assess->carrier_hz;
    emission.half_width_hz = assess->half_width_hz;
    emission.resolution_hz = assess->settings.resolution_hz;
    return mb_emission_create(&emission, &assess->emission);
}

static mb_status keep_for_picture(mb_assess_iq *assess)
{
    const mb_recording *recording = assess->recording;

    assess->scatter = mb_allocate(1, sizeof *assess->scatter);
    assess->truth_hz = mb_allocate(ASSESS_TRACK + 1, sizeof *assess->truth_hz);
    if (assess->scatter == NULL || assess->truth_hz == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the picture");
    }
    size_t points = mb_recording_point_count(recording);
    assess->track_stride = points / ASSESS_TRACK + 1;
    assess->track_count = points / assess->track_stride;
    for (size_t i = 0; i <= ASSESS_TRACK; i++) {
        assess->truth_hz[i] = NAN;
    }
    return scatter_create(recording, assess->settings.receive.high_hz, assess->scatter);
}

static mb_status follow_carrier(mb_assess_iq *assess)
{
    const mb_receive_settings *receive = &assess->settings.receive;

    track_mean(assess->recording, &assess->carrier_hz, &assess->drift_hz_per_s);
    assess->turner =
        track_turner_begin(assess->recording, receive->rate_hz, receive->offset_hz, assess->carrier_hz);
    assess->judge = (truth_judge){.recording = assess->recording};
    mb_status status = track_activity(assess->recording, &assess->activity);
    return status == MB_OK && assess->settings.picture ? keep_for_picture(assess) : status;
}

mb_status mb_assess_iq_resolve(mb_assess_iq *assess)
{
    mb_status heard = mb_recording_resolve(assess->recording);

    if (heard != MB_OK && heard != MB_ERROR_NO_SIGNAL) {
        return heard;
    }
    mb_fault why = *mb_last_fault();
    assess->found = heard == MB_OK;
    assess->carrier_hz = assess->settings.receive.offset_hz;
    mb_status status = assess->found ? follow_carrier(assess) : MB_OK;
    if (status == MB_OK) {
        status = create_emission(assess);
    }
    if (status != MB_OK) {
        return status;
    }
    assess->resolved = true;
    return assess->found ? MB_OK : mb_fail(MB_ERROR_NO_SIGNAL, why.field, "%s", why.text);
}

void mb_assess_iq_process(mb_assess_iq *assess, const mb_cf32 *in, size_t n)
{
    if (!assess->resolved) {
        return;
    }
    for (size_t done = 0; done < n;) {
        size_t run = n - done < ASSESS_CHUNK ? n - done : ASSESS_CHUNK;
        if (assess->found) {
            track_turner_process(&assess->turner, in + done, run, assess->turned);
            mb_emission_process(assess->emission, assess->turned, run);
        } else {
            mb_emission_process(assess->emission, in + done, run);
        }
        if (assess->scatter != NULL) {
            scatter_take(assess->scatter, assess->recording, in + done, run);
        }
        done += run;
    }
}

static void keep_truth(void *user, size_t index, double truth_hz)
{
    mb_assess_iq *assess = user;

    if (assess->truth_hz == NULL || index % assess->track_stride != 0) {
        return;
    }
    size_t kept = index / assess->track_stride;
    if (kept < assess->track_count) {
        assess->truth_hz[kept] = truth_hz;
    }
}

void mb_assess_iq_truth(mb_assess_iq *assess, double time_s, double carrier_offset_hz)
{
    if (assess->resolved && assess->found) {
        truth_judge_row(&assess->judge, time_s, carrier_offset_hz, keep_truth, assess);
    }
}

static void put_suppression(const mb_assess_iq *assess, mb_assess_iq_result *result)
{
    const mb_emission_result *e = &result->emission;
    double active_db = -mb_power_db(fmax(assess->activity, 1e-6));

    result->activity = assess->activity;
    result->sidebands_dbfs = mb_power_db(mb_db_power(e->upper_dbfs) + mb_db_power(e->lower_dbfs));
    result->sidebands_active_dbfs = result->sidebands_dbfs + active_db;
    result->carrier_mean_dbc = -e->carrier_suppression_db;
    result->carrier_dbc = -e->carrier_suppression_db - active_db;
    result->carrier_pep_db = -e->carrier_suppression_pep_db;
}

static void put_truth(const truth_judge *judge, mb_assess_iq_result *result)
{
    result->has_truth = judge->count > 0;
    if (result->has_truth) {
        double count = (double)judge->count;
        result->truth_offset_hz = judge->truth_sum / count;
        result->offset_error_hz = judge->error_sum / count;
        result->offset_rms_error_hz = sqrt(judge->error_square / count);
    }
}

static mb_status put_tones(const mb_assess_iq *assess, mb_assess_iq_result *result)
{
    const mb_assess_iq_settings *s = &assess->settings;

    if (!assess->found || s->tone_high_hz <= 0.0) {
        return MB_OK;
    }
    mb_status status =
        mb_two_tone(mb_emission_fine(assess->emission), s->tone_low_hz, s->tone_high_hz, &result->two_tone);
    result->has_two_tone = status == MB_OK;
    return status == MB_ERROR_NO_SIGNAL ? MB_OK : status;
}

mb_status mb_assess_iq_finish(const mb_assess_iq *assess, mb_assess_iq_result *result)
{
    *result = (mb_assess_iq_result){.found = assess->found,
                                    .half_width_hz = assess->half_width_hz,
                                    .carrier_offset_hz = NAN,
                                    .carrier_drift_hz_per_s = NAN,
                                    .lock_quality = NAN,
                                    .snr_db = NAN,
                                    .activity = NAN,
                                    .sidebands_dbfs = NAN,
                                    .sidebands_active_dbfs = NAN,
                                    .carrier_dbc = NAN,
                                    .carrier_mean_dbc = NAN,
                                    .carrier_pep_db = NAN,
                                    .truth_offset_hz = NAN,
                                    .offset_error_hz = NAN,
                                    .offset_rms_error_hz = NAN};
    if (!assess->resolved) {
        return mb_fail(MB_ERROR_NO_SIGNAL, "", "no samples were assessed");
    }
    mb_status status = mb_emission_finish(assess->emission, &result->emission);
    if (status == MB_OK && assess->found) {
        mb_carrier_state state = mb_recording_state(assess->recording).carrier;
        result->carrier_offset_hz = assess->carrier_hz;
        result->carrier_drift_hz_per_s = assess->drift_hz_per_s;
        result->lock_quality = state.lock_quality;
        result->snr_db = state.snr_db;
        put_suppression(assess, result);
        put_truth(&assess->judge, result);
        status = put_tones(assess, result);
    }
    return status;
}
