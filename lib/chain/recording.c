#include "mirrorband/chain.h"

#include <math.h>
#include <string.h>

#include "receive_path.h"

struct mb_recording {
    receive_path path;
    mb_smoother *smoother;
    uint64_t taken;    /* wideband samples of the second pass */
    uint64_t position; /* baseband samples of the second pass */
    uint64_t skip;     /* audio samples still to be dropped: the delay of the chain */
    uint64_t made;     /* audio samples handed out */
    float peak;        /* highest |sample|^2 of the baseband in the first pass */
    bool sixteen_bit;  /* kind of sample of the second pass */
};

mb_status mb_recording_create(const mb_receive_settings *settings, mb_recording **out)
{
    *out = NULL;
    mb_recording *recording = mb_allocate(1, sizeof *recording);
    if (recording == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the receive chain");
    }
    mb_status status = receive_path_create(settings, &recording->path);
    if (status == MB_OK) {
        status = mb_smoother_create(&recording->path.recovery, &recording->smoother);
    }
    if (status != MB_OK) {
        mb_recording_destroy(recording);
        return status;
    }
    *out = recording;
    return MB_OK;
}

void mb_recording_destroy(mb_recording *recording)
{
    if (recording != NULL) {
        mb_smoother_destroy(recording->smoother);
        receive_path_destroy(&recording->path);
        mb_release(recording);
    }
}

static mb_status listen_baseband(mb_recording *r, size_t n)
{
    for (size_t i = 0; i < n; i++) {
        float re = r->path.baseband[i].re, im = r->path.baseband[i].im;
        r->peak = fmaxf(r->peak, re * re + im * im);
    }
    return mb_smoother_listen(r->smoother, r->path.baseband, n);
}

double mb_recording_peak(const mb_recording *r)
{
    return sqrt((double)r->peak);
}

mb_status mb_recording_listen_cf32(mb_recording *r, const mb_cf32 *in, size_t n)
{
    mb_status status = MB_OK;

    for (size_t done = 0; done < n && status == MB_OK;) {
        size_t run = n - done < WIDEBAND_CHUNK ? n - done : WIDEBAND_CHUNK;
        size_t count = mb_decimator_process_cf32(r->path.front, in + done, run, r->path.baseband);
        status = listen_baseband(r, count);
        done += run;
    }
    return status;
}

mb_status mb_recording_listen_ci16(mb_recording *r, const mb_ci16 *in, size_t n)
{
    mb_status status = MB_OK;

    for (size_t done = 0; done < n && status == MB_OK;) {
        size_t run = n - done < WIDEBAND_CHUNK ? n - done : WIDEBAND_CHUNK;
        size_t count = mb_decimator_process_ci16(r->path.front, in + done, run, r->path.baseband);
        status = listen_baseband(r, count);
        done += run;
    }
    return status;
}

mb_status mb_recording_resolve(mb_recording *r)
{
    mb_status status = mb_smoother_resolve(r->smoother);

    if (status != MB_OK) {
        return status;
    }
    double delay_s = mb_decimator_delay_s(r->path.front) + r->path.back.delay_s;
    mb_decimator_reset(r->path.front);
    receive_back_reset(&r->path.back);
    r->taken = r->position = r->made = 0;
    r->skip = (uint64_t)llround(delay_s * r->path.settings.audio_rate_hz);
    return MB_OK;
}

size_t mb_recording_output_bound(const mb_recording *r, size_t n)
{
    size_t chunks = n / WIDEBAND_CHUNK + 1;
    size_t baseband = mb_decimator_output_bound(r->path.front, WIDEBAND_CHUNK);
    size_t grid = (size_t)lround(r->path.baseband_rate_hz / AUDIO_BLOCKS_PER_S);
    size_t audio = receive_back_output_bound(&r->path.back, baseband);

    return chunks * ((audio > baseband ? audio : baseband) + baseband / grid + 2);
}

static void report_at(mb_recording *r)
{
    size_t step = (size_t)lround(mb_smoother_step_s(r->smoother) * r->path.baseband_rate_hz);
    size_t index = (size_t)(r->position / step), last = mb_smoother_point_count(r->smoother) - 1;
    mb_track_point point = mb_smoother_point(r->smoother, index < last ? index : last);

    receive_back_report(&r->path.back, point.mode, point.lock_quality);
}

/* Derotated baseband to audio, cut where the track has its points. */
static size_t detect(mb_recording *r, size_t n, float *audio)
{
    size_t step = (size_t)lround(mb_smoother_step_s(r->smoother) * r->path.baseband_rate_hz), made = 0;

    for (size_t done = 0; done < n;) {
        size_t left = step - (size_t)(r->position % step);
        size_t run = left < n - done ? left : n - done;
        if (left == step) {
            report_at(r);
        }
        made += receive_back_process(&r->path.back, r->path.baseband + done, run, audio + made);
        r->position += run;
        done += run;
    }
    size_t drop = r->skip < made ? (size_t)r->skip : made;
    r->skip -= drop;
    memmove(audio, audio + drop, (made - drop) * sizeof *audio);
    return made - drop;
}

/* One chunk of wideband in the kind of sample of the recording. */
static size_t process_chunk(mb_recording *r, const void *in, size_t n, float *audio)
{
    size_t count = r->sixteen_bit ? mb_decimator_process_ci16(r->path.front, in, n, r->path.baseband)
                                  : mb_decimator_process_cf32(r->path.front, in, n, r->path.baseband);

    mb_smoother_rotate(r->smoother, r->path.baseband, count, r->path.baseband);
    return detect(r, count, audio);
}

size_t mb_recording_process_cf32(mb_recording *r, const mb_cf32 *in, size_t n, float *audio)
{
    size_t made = 0;

    r->sixteen_bit = false;
    for (size_t done = 0; done < n;) {
        size_t run = n - done < WIDEBAND_CHUNK ? n - done : WIDEBAND_CHUNK;
        made += process_chunk(r, in + done, run, audio + made);
        done += run;
    }
    r->taken += n;
    r->made += made;
    return made;
}

size_t mb_recording_process_ci16(mb_recording *r, const mb_ci16 *in, size_t n, float *audio)
{
    size_t made = 0;

    r->sixteen_bit = true;
    for (size_t done = 0; done < n;) {
        size_t run = n - done < WIDEBAND_CHUNK ? n - done : WIDEBAND_CHUNK;
        made += process_chunk(r, in + done, run, audio + made);
        done += run;
    }
    r->taken += n;
    r->made += made;
    return made;
}

size_t mb_recording_drain(mb_recording *r, float *audio)
{
    static const mb_cf32 silence[WIDEBAND_CHUNK]; /* zeros are zeros in either kind of sample */
    uint64_t wanted =
        (uint64_t)llround((double)r->taken * r->path.settings.audio_rate_hz / r->path.settings.rate_hz);
    size_t made = 0;

    while (made == 0 && r->made < wanted) {
        made = process_chunk(r, silence, WIDEBAND_CHUNK, audio);
        if (made > wanted - r->made) {
            made = (size_t)(wanted - r->made);
        }
        r->made += made;
    }
    return made;
}

size_t mb_recording_derotate_cf32(mb_recording *r, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < WIDEBAND_CHUNK ? n - done : WIDEBAND_CHUNK;
        size_t count = mb_decimator_process_cf32(r->path.front, in + done, run, out + made);
        mb_smoother_rotate(r->smoother, out + made, count, out + made);
        made += count;
        done += run;
    }
    r->taken += n;
    return made;
}

double mb_recording_baseband_rate_hz(const mb_recording *r)
{
    return r->path.baseband_rate_hz;
}

double mb_recording_baseband_delay_s(const mb_recording *r)
{
    return mb_decimator_delay_s(r->path.front);
}

size_t mb_recording_point_count(const mb_recording *r)
{
    return mb_smoother_point_count(r->smoother);
}

mb_track_point mb_recording_point(const mb_recording *r, size_t index)
{
    mb_track_point point = mb_smoother_point(r->smoother, index);

    point.time_s -= mb_decimator_delay_s(r->path.front);
    point.carrier_offset_hz += r->path.settings.offset_hz;
    return point;
}

mb_receive_state mb_recording_state(const mb_recording *r)
{
    mb_receive_state state = {.carrier = mb_smoother_state(r->smoother), .squelch_open = true};

    state.carrier.carrier_offset_hz += r->path.settings.offset_hz;
    return state;
}
