/* Points in the plane of the in-phase and quadrature arm, for the picture. */
#include "assess_iq.h"

#include <math.h>

static const double transition_hz = 300.0, attenuation_db = 60.0;

mb_status scatter_create(const mb_recording *recording, double high_hz, scatter *out)
{
    size_t taps = 0, room = mb_recording_output_bound(recording, ASSESS_CHUNK);
    double rate_hz = mb_recording_baseband_rate_hz(recording);
    mb_status status = mb_design_lowpass(high_hz + 0.5 * transition_hz, transition_hz, attenuation_db,
                                         rate_hz, &out->taps, &taps);

    if (status == MB_OK) {
        status = mb_fir_create(&(mb_fir_settings){.taps = out->taps, .tap_count = taps}, &out->low_pass);
    }
    if (status != MB_OK) {
        return status;
    }
    out->rate_hz = rate_hz;
    out->stride = 1;
    out->lead_s =
        -mb_recording_baseband_delay_s(recording) - (double)mb_fir_delay_samples(out->low_pass) / rate_hz;
    out->baseband = mb_allocate(room, sizeof *out->baseband);
    return out->baseband != NULL ? MB_OK : mb_fail(MB_ERROR_MEMORY, "", "no memory for the picture");
}

void scatter_destroy(scatter *s)
{
    mb_fir_destroy(s->low_pass);
    mb_release(s->taps);
    mb_release(s->baseband);
}

static void thin(scatter *s)
{
    s->count /= 2;
    for (size_t i = 0; i < s->count; i++) {
        s->in_phase[i] = s->in_phase[2 * i];
        s->quadrature[i] = s->quadrature[2 * i];
    }
    s->stride *= 2;
}

static void keep(scatter *s, mb_cf32 sample)
{
    if (s->seen++ % s->stride != 0) {
        return;
    }
    if (s->count == ASSESS_SCATTER) {
        thin(s);
        if ((s->seen - 1) % s->stride != 0) {
            return;
        }
    }
    s->in_phase[s->count] = (double)sample.re;
    s->quadrature[s->count++] = (double)sample.im;
}

/* Whether the track has voice at a sample of the filtered baseband. */
static bool voice_at(const scatter *s, const mb_recording *recording, uint64_t position)
{
    size_t points = mb_recording_point_count(recording);

    if (points < 2) {
        return false;
    }
    double first_s = mb_recording_point(recording, 0).time_s;
    double step_s = mb_recording_point(recording, 1).time_s - first_s;
    double index = rint(((double)position / s->rate_hz + s->lead_s - first_s) / step_s);
    return index >= 0.0 && index < (double)points &&
           mb_recording_point(recording, (size_t)index).mode == MB_CARRIER_LOCKED;
}

void scatter_take(scatter *s, mb_recording *recording, const mb_cf32 *in, size_t n)
{
    size_t count = mb_recording_derotate_cf32(recording, in, n, s->baseband);

    mb_fir_process_cf32(s->low_pass, s->baseband, count, s->baseband);
    for (size_t i = 0; i < count; i++) {
        if (voice_at(s, recording, s->position + i)) {
            keep(s, s->baseband[i]);
        }
    }
    s->position += count;
}
