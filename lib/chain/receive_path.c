#include "receive_path.h"

#include <math.h>

/* Highest rate the carrier recovery takes. */
#define BASEBAND_RATE_LIMIT_HZ 48000.0

static bool differ(double a, double b)
{
    return a < b || a > b;
}

static mb_status check_settings(const mb_receive_settings *s)
{
    if (mb_check_range("rate_hz", s->rate_hz, 8000.0, 25e6, "Hz") != MB_OK ||
        mb_check_range("offset_hz", s->offset_hz, -0.5 * s->rate_hz, 0.5 * s->rate_hz, "Hz") != MB_OK ||
        mb_check_range("span_hz", s->span_hz, 50.0, 9600.0, "Hz") != MB_OK ||
        mb_check_range("baseband_rate_hz", s->baseband_rate_hz, 12000.0, BASEBAND_RATE_LIMIT_HZ, "Hz") !=
            MB_OK ||
        mb_check_range("audio_rate_hz", s->audio_rate_hz, 8000.0, 192000.0, "Hz") != MB_OK ||
        mb_check_range("low_hz", s->low_hz, 50.0, 600.0, "Hz") != MB_OK ||
        mb_check_range("high_hz", s->high_hz, 1000.0, 6000.0, "Hz") != MB_OK ||
        mb_check_range("squelch_quality", s->squelch_quality, 0.0, 1.0, "") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    return MB_OK;
}

static double baseband_rate_hz(const mb_receive_settings *s)
{
    double needed = fmax(fmax(2.1 * (s->high_hz + s->span_hz), s->span_hz / 0.2), s->high_hz / 0.4);
    double rate = s->baseband_rate_hz * ceil(needed / s->baseband_rate_hz);
    double reach = fabs(s->offset_hz) + s->high_hz + s->span_hz;

    if (rate > BASEBAND_RATE_LIMIT_HZ) {
        rate = BASEBAND_RATE_LIMIT_HZ;
    }
    if (rate > s->rate_hz) {
        rate = s->rate_hz;
    }
    if (rate < needed || rate < 12000.0 || 2.0 * reach > s->rate_hz) {
        double least = fmax(fmax(needed, 12000.0), 2.0 * reach);
        (void)mb_fail(MB_ERROR_ARGUMENT, "rate_hz",
                      "an input rate of %g Hz is too low to look for a carrier within %g Hz of %g Hz with "
                      "audio up to %g "
                      "Hz; it takes at least %.0f Hz, or a narrower receive.span",
                      s->rate_hz, s->span_hz, s->offset_hz, s->high_hz, ceil(least));
        return 0.0;
    }
    return rate;
}

static mb_recovery_settings recovery_settings(const mb_receive_settings *s, double rate_hz)
{
    mb_recovery_settings recovery = mb_recovery_settings_default();

    recovery.rate_hz = rate_hz;
    recovery.span_hz = s->span_hz;
    recovery.low_cut_hz = fmin(1.2 * s->low_hz, s->low_hz + 50.0);
    recovery.high_cut_hz = fmax(s->high_hz - 50.0, 1000.0);
    recovery.look_ahead_s = s->look_ahead_s;
    recovery.tracker = s->tracker;
    recovery.loop_bandwidth_hz = s->loop_bandwidth_hz;
    recovery.damping = s->damping;
    return recovery;
}

static mb_status create_front(const mb_receive_settings *s, double rate_hz, mb_decimator **out)
{
    mb_decimator_settings down = mb_decimator_settings_default();

    down.rate_in_hz = s->rate_hz;
    down.rate_out_hz = rate_hz;
    down.offset_hz = s->offset_hz;
    down.passband_hz = fmin(s->high_hz + s->span_hz, 0.45 * rate_hz);
    return mb_decimator_create(&down, out);
}

static mb_status create_detector(const mb_receive_settings *s, double rate_hz, receive_back *back)
{
    mb_coherent_settings detector = mb_coherent_settings_default();

    detector.rate_hz = rate_hz;
    detector.low_hz = s->low_hz;
    detector.high_hz = s->high_hz;
    detector.sideband = s->sideband;
    return mb_coherent_create(&detector, &back->coherent);
}

static mb_status create_levels(const mb_receive_settings *s, double rate_hz, receive_back *back)
{
    mb_status status = MB_OK;

    if (s->gain_control) {
        mb_gain_control_settings control = mb_gain_control_settings_default();
        control.rate_hz = rate_hz;
        control.level_dbfs = s->level_dbfs;
        status = mb_gain_control_create(&control, &back->gain_control);
    }
    if (status == MB_OK && s->squelch) {
        mb_squelch_settings squelch = mb_squelch_settings_default();
        squelch.rate_hz = rate_hz;
        squelch.open_quality = s->squelch_quality;
        squelch.close_quality = 0.7 * s->squelch_quality;
        status = mb_squelch_create(&squelch, &back->squelch);
    }
    return status;
}

static void destroy_back(receive_back *back)
{
    mb_coherent_destroy(back->coherent);
    mb_gain_control_destroy(back->gain_control);
    mb_squelch_destroy(back->squelch);
    mb_resampler_destroy(back->resampler);
    mb_release(back->audio);
    *back = (receive_back){0};
}

static mb_status create_back(const mb_receive_settings *s, double rate_hz, size_t room, receive_back *out)
{
    *out = (receive_back){.room = room};
    mb_status status = create_detector(s, rate_hz, out);

    if (status == MB_OK) {
        status = create_levels(s, rate_hz, out);
    }
    if (status == MB_OK && differ(rate_hz, s->audio_rate_hz)) {
        mb_resampler_settings change = mb_resampler_settings_default();
        change.rate_in_hz = rate_hz;
        change.rate_out_hz = s->audio_rate_hz;
        change.passband_hz = fmin(0.45 * fmin(rate_hz, s->audio_rate_hz), s->high_hz + 300.0);
        status = mb_resampler_create(&change, &out->resampler);
    }
    if (status == MB_OK && (out->audio = mb_allocate(room, sizeof *out->audio)) == NULL) {
        status = mb_fail(MB_ERROR_MEMORY, "", "no memory for the receive chain");
    }
    if (status != MB_OK) {
        destroy_back(out);
        return status;
    }
    out->delay_s = (double)mb_coherent_delay_samples(out->coherent) / rate_hz +
                   (out->resampler != NULL ? mb_resampler_delay_s(out->resampler) : 0.0);
    return MB_OK;
}

void receive_back_reset(receive_back *back)
{
    mb_coherent_reset(back->coherent);
    if (back->gain_control != NULL) {
        mb_gain_control_reset(back->gain_control);
    }
    if (back->squelch != NULL) {
        mb_squelch_reset(back->squelch);
    }
    if (back->resampler != NULL) {
        mb_resampler_reset(back->resampler);
    }
}

void receive_back_report(receive_back *back, mb_carrier_mode mode, double lock_quality)
{
    if (back->gain_control != NULL) {
        mb_gain_control_hold(back->gain_control, mode != MB_CARRIER_LOCKED);
    }
    if (back->squelch != NULL) {
        mb_squelch_report(back->squelch, mode == MB_CARRIER_LOCKED, lock_quality);
    }
}

size_t receive_back_output_bound(const receive_back *back, size_t n)
{
    return back->resampler != NULL ? mb_resampler_output_bound(back->resampler, n) : n;
}

size_t receive_back_process(receive_back *back, const mb_cf32 *in, size_t n, float *audio)
{
    float *to = back->resampler != NULL ? back->audio : audio;

    mb_coherent_process(back->coherent, in, n, to);
    if (back->gain_control != NULL) {
        mb_gain_control_process(back->gain_control, to, n, to);
    }
    if (back->squelch != NULL) {
        mb_squelch_process(back->squelch, to, n, to);
    }
    return back->resampler != NULL ? mb_resampler_process_f32(back->resampler, to, n, audio) : n;
}

mb_status receive_path_create(const mb_receive_settings *settings, receive_path *out)
{
    *out = (receive_path){.settings = *settings};
    if (check_settings(settings) != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    double rate_hz = baseband_rate_hz(settings);
    if (rate_hz <= 0.0) {
        return MB_ERROR_ARGUMENT;
    }
    out->baseband_rate_hz = rate_hz;
    out->recovery = recovery_settings(settings, rate_hz);
    mb_status status = create_front(settings, rate_hz, &out->front);
    if (status == MB_OK) {
        size_t room = mb_decimator_output_bound(out->front, WIDEBAND_CHUNK);
        out->baseband = mb_allocate(room, sizeof *out->baseband);
        status = out->baseband != NULL ? create_back(settings, rate_hz, room, &out->back)
                                       : mb_fail(MB_ERROR_MEMORY, "", "no memory for the receive chain");
    }
    if (status != MB_OK) {
        receive_path_destroy(out);
    }
    return status;
}

void receive_path_destroy(receive_path *path)
{
    mb_decimator_destroy(path->front);
    destroy_back(&path->back);
    mb_release(path->baseband);
    path->front = NULL;
    path->baseband = NULL;
}
