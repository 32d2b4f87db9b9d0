#include "mirrorband/chain.h"

#include <math.h>

#include "receive_path.h"

struct mb_receive {
    mb_receive_settings settings;
    double baseband_rate_hz;
    mb_decimator *front;
    mb_recovery *recovery;
    receive_back back;
    mb_cf32 *baseband; /* what a chunk of wideband gives */
    size_t grid;       /* baseband samples between reports of the recovery to what follows */
    size_t on_grid;    /* of them taken since the last */
};

mb_receive_settings mb_receive_settings_default(void)
{
    return (mb_receive_settings){
        .rate_hz = 48000.0,
        .span_hz = 1000.0,
        .baseband_rate_hz = 16000.0,
        .audio_rate_hz = 16000.0,
        .low_hz = 250.0,
        .high_hz = 2750.0,
        .sideband = MB_SIDEBAND_BOTH,
        .look_ahead_s = 0.06,
        .tracker = MB_TRACKER_KALMAN,
        .loop_bandwidth_hz = 5.0,
        .damping = 0.7071,
        .level_dbfs = -20.0,
        .squelch_quality = 0.3,
    };
}

static mb_status create_parts(mb_receive *r)
{
    mb_recovery_settings recovery = receive_recovery_settings(&r->settings, r->baseband_rate_hz);
    mb_status status = receive_front_create(&r->settings, r->baseband_rate_hz, &r->front);

    if (status == MB_OK) {
        status = mb_recovery_create(&recovery, &r->recovery);
    }
    if (status == MB_OK) {
        size_t room = mb_decimator_output_bound(r->front, WIDEBAND_CHUNK);
        r->baseband = mb_allocate(room, sizeof *r->baseband);
        status = receive_back_create(&r->settings, r->baseband_rate_hz, room, &r->back);
        if (status == MB_OK && r->baseband == NULL) {
            status = mb_fail(MB_ERROR_MEMORY, "", "no memory for the receive chain");
        }
    }
    return status;
}

mb_status mb_receive_create(const mb_receive_settings *settings, mb_receive **out)
{
    *out = NULL;
    if (receive_settings_check(settings) != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    double rate_hz = receive_baseband_rate_hz(settings);
    if (rate_hz <= 0.0) {
        return MB_ERROR_ARGUMENT;
    }
    mb_receive *receive = mb_allocate(1, sizeof *receive);
    if (receive == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the receive chain");
    }
    receive->settings = *settings;
    receive->baseband_rate_hz = rate_hz;
    receive->grid = (size_t)lround(rate_hz / AUDIO_BLOCKS_PER_S);
    mb_status status = create_parts(receive);
    if (status != MB_OK) {
        mb_receive_destroy(receive);
        return status;
    }
    *out = receive;
    return MB_OK;
}

void mb_receive_destroy(mb_receive *receive)
{
    if (receive != NULL) {
        mb_decimator_destroy(receive->front);
        mb_recovery_destroy(receive->recovery);
        receive_back_destroy(&receive->back);
        mb_release(receive->baseband);
        mb_release(receive);
    }
}

void mb_receive_reset(mb_receive *receive)
{
    mb_decimator_reset(receive->front);
    mb_recovery_reset(receive->recovery);
    receive_back_reset(&receive->back);
    receive->on_grid = 0;
}

size_t mb_receive_output_bound(const mb_receive *receive, size_t n)
{
    size_t chunks = n / WIDEBAND_CHUNK + 1;
    size_t baseband = mb_decimator_output_bound(receive->front, WIDEBAND_CHUNK);

    /* a chunk is cut at the grid, and each piece may give one sample more */
    return chunks * (receive_back_output_bound(&receive->back, baseband) + baseband / receive->grid + 2);
}

double mb_receive_delay_s(const mb_receive *receive)
{
    return mb_decimator_delay_s(receive->front) +
           (double)mb_recovery_delay_samples(receive->recovery) / receive->baseband_rate_hz +
           receive->back.delay_s;
}

mb_receive_state mb_receive_state_now(const mb_receive *receive)
{
    mb_receive_state state = {.carrier = mb_recovery_state(receive->recovery), .squelch_open = true};

    if (state.carrier.locks > 0) {
        state.carrier.carrier_offset_hz += receive->settings.offset_hz;
    }
    if (receive->back.gain_control != NULL) {
        state.gain_db = mb_gain_control_gain_db(receive->back.gain_control);
    }
    if (receive->back.squelch != NULL) {
        state.squelch_open = mb_squelch_is_open(receive->back.squelch);
    }
    return state;
}

/* Baseband to audio, cut at the grid so that reports always fall on the same samples. */
static size_t receive_baseband(mb_receive *r, size_t n, float *audio)
{
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t left = r->grid - r->on_grid;
        size_t run = left < n - done ? left : n - done;
        mb_recovery_process(r->recovery, r->baseband + done, run, r->baseband + done);
        made += receive_back_process(&r->back, r->baseband + done, run, audio + made);
        r->on_grid += run;
        done += run;
        if (r->on_grid == r->grid) {
            mb_carrier_state state = mb_recovery_state(r->recovery);
            receive_back_report(&r->back, state.mode, state.lock_quality);
            r->on_grid = 0;
        }
    }
    return made;
}

size_t mb_receive_process_cf32(mb_receive *receive, const mb_cf32 *in, size_t n, float *audio)
{
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < WIDEBAND_CHUNK ? n - done : WIDEBAND_CHUNK;
        size_t count = mb_decimator_process_cf32(receive->front, in + done, run, receive->baseband);
        made += receive_baseband(receive, count, audio + made);
        done += run;
    }
    return made;
}

size_t mb_receive_process_ci16(mb_receive *receive, const mb_ci16 *in, size_t n, float *audio)
{
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < WIDEBAND_CHUNK ? n - done : WIDEBAND_CHUNK;
        size_t count = mb_decimator_process_ci16(receive->front, in + done, run, receive->baseband);
        made += receive_baseband(receive, count, audio + made);
        done += run;
    }
    return made;
}
