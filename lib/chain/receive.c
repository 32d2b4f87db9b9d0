#include "mirrorband/chain.h"

#include <math.h>

#include "receive_path.h"

struct mb_receive {
    receive_path path;
    mb_recovery *recovery;
    size_t grid;    /* baseband samples between reports of the recovery to what follows */
    size_t on_grid; /* of them taken since the last */
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

mb_status mb_receive_create(const mb_receive_settings *settings, mb_receive **out)
{
    *out = NULL;
    mb_receive *receive = mb_allocate(1, sizeof *receive);
    if (receive == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the receive chain");
    }
    mb_status status = receive_path_create(settings, &receive->path);
    if (status == MB_OK) {
        status = mb_recovery_create(&receive->path.recovery, &receive->recovery);
    }
    if (status != MB_OK) {
        mb_receive_destroy(receive);
        return status;
    }
    receive->grid = (size_t)lround(receive->path.baseband_rate_hz / AUDIO_BLOCKS_PER_S);
    *out = receive;
    return MB_OK;
}

void mb_receive_destroy(mb_receive *receive)
{
    if (receive != NULL) {
        mb_recovery_destroy(receive->recovery);
        receive_path_destroy(&receive->path);
        mb_release(receive);
    }
}

void mb_receive_reset(mb_receive *receive)
{
    mb_decimator_reset(receive->path.front);
    mb_recovery_reset(receive->recovery);
    receive_back_reset(&receive->path.back);
    receive->on_grid = 0;
}

size_t mb_receive_output_bound(const mb_receive *receive, size_t n)
{
    size_t chunks = n / WIDEBAND_CHUNK + 1;
    size_t baseband = mb_decimator_output_bound(receive->path.front, WIDEBAND_CHUNK);

    /* a chunk is cut at the grid, and each piece may give one sample more */
    return chunks * (receive_back_output_bound(&receive->path.back, baseband) + baseband / receive->grid + 2);
}

double mb_receive_delay_s(const mb_receive *receive)
{
    return mb_decimator_delay_s(receive->path.front) +
           (double)mb_recovery_delay_samples(receive->recovery) / receive->path.baseband_rate_hz +
           receive->path.back.delay_s;
}

mb_receive_state mb_receive_state_now(const mb_receive *receive)
{
    mb_receive_state state = {.carrier = mb_recovery_state(receive->recovery), .squelch_open = true};

    if (state.carrier.locks > 0) {
        state.carrier.carrier_offset_hz += receive->path.settings.offset_hz;
    }
    if (receive->path.back.gain_control != NULL) {
        state.gain_db = mb_gain_control_gain_db(receive->path.back.gain_control);
    }
    if (receive->path.back.squelch != NULL) {
        state.squelch_open = mb_squelch_is_open(receive->path.back.squelch);
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
        mb_recovery_process(r->recovery, r->path.baseband + done, run, r->path.baseband + done);
        made += receive_back_process(&r->path.back, r->path.baseband + done, run, audio + made);
        r->on_grid += run;
        done += run;
        if (r->on_grid == r->grid) {
            mb_carrier_state state = mb_recovery_state(r->recovery);
            receive_back_report(&r->path.back, state.mode, state.lock_quality);
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
        size_t count = mb_decimator_process_cf32(receive->path.front, in + done, run, receive->path.baseband);
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
        size_t count = mb_decimator_process_ci16(receive->path.front, in + done, run, receive->path.baseband);
        made += receive_baseband(receive, count, audio + made);
        done += run;
    }
    return made;
}
