/* Ideal detection of wideband samples: turned to the mean offset, decimated, detected with the true phase,
 * and taken through the audio filter of a receiver, so that the two differ in their phase alone. */
#include "mirrorband/assess.h"

#include <math.h>
#include <string.h>

#include "mirrorband/filter.h"

static const double audio_rate_hz = 16000.0, signal_half_hz = 3000.0;

enum { IDEAL_CHUNK = 8192, BAND_PART = 256 };

struct mb_assess_ideal {
    mb_assess_ideal_settings settings;
    double rate_hz; /* of baseband and audio */
    mb_oscillator to_middle;
    mb_decimator *front;
    mb_ideal *detector;
    mb_coherent *band; /* its audio filter */
    mb_cf32 *moved;    /* a chunk turned to the mean offset */
    mb_cf32 *waiting;  /* baseband not yet detected */
    size_t fill, room, chunk_bound;
    double delay_s; /* of the baseband */
    size_t drop_at_start, drop;
    uint64_t taken, made;
};

mb_assess_ideal_settings mb_assess_ideal_settings_default(void)
{
    mb_coherent_settings receiver = mb_coherent_settings_default();

    return (mb_assess_ideal_settings){
        .rate_hz = 48000.0, .offset_hz = 0.0, .low_hz = receiver.low_hz, .high_hz = receiver.high_hz};
}

static mb_status create_band(mb_assess_ideal *ideal)
{
    mb_coherent_settings band = mb_coherent_settings_default();

    band.rate_hz = ideal->rate_hz;
    band.low_hz = ideal->settings.low_hz;
    band.high_hz = ideal->settings.high_hz;
    return mb_coherent_create(&band, &ideal->band);
}

static mb_status create_parts(mb_assess_ideal *ideal)
{
    mb_decimator_settings down = mb_decimator_settings_default();
    mb_ideal_settings detector = mb_ideal_settings_default();

    down.rate_in_hz = ideal->settings.rate_hz;
    down.rate_out_hz = ideal->rate_hz;
    down.offset_hz = 0.0; /* turned before, so that the phase of the turning is known */
    down.passband_hz = 0.4 * ideal->rate_hz;
    mb_status status = mb_decimator_create(&down, &ideal->front);
    if (status != MB_OK) {
        return status;
    }
    detector.rate_hz = ideal->rate_hz;
    if ((status = mb_ideal_create(&detector, &ideal->detector)) != MB_OK ||
        (status = create_band(ideal)) != MB_OK) {
        return status;
    }
    ideal->chunk_bound = mb_decimator_output_bound(ideal->front, IDEAL_CHUNK);
    ideal->room = ideal->chunk_bound + (size_t)ideal->rate_hz;
    ideal->moved = mb_allocate(IDEAL_CHUNK, sizeof *ideal->moved);
    ideal->waiting = mb_allocate(ideal->room, sizeof *ideal->waiting);
    if (ideal->moved == NULL || ideal->waiting == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for ideal detection");
    }
    ideal->delay_s = mb_decimator_delay_s(ideal->front);
    ideal->drop_at_start =
        (size_t)lround(ideal->delay_s * ideal->rate_hz) + mb_coherent_delay_samples(ideal->band);
    return MB_OK;
}

mb_status mb_assess_ideal_create(const mb_assess_ideal_settings *settings, mb_assess_ideal **out)
{
    *out = NULL;
    if (mb_check_range("rate_hz", settings->rate_hz, 12000.0, 25e6, "Hz") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    double reach_hz = 0.5 * settings->rate_hz - signal_half_hz;
    if (mb_check_range("offset_hz", settings->offset_hz, -reach_hz, reach_hz, "Hz") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_assess_ideal *ideal = mb_allocate(1, sizeof *ideal);
    if (ideal == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for ideal detection");
    }
    ideal->settings = *settings;
    ideal->rate_hz = fmin(audio_rate_hz, settings->rate_hz);
    mb_status status = create_parts(ideal);
    if (status != MB_OK) {
        mb_assess_ideal_destroy(ideal);
        return status;
    }
    mb_assess_ideal_reset(ideal);
    *out = ideal;
    return MB_OK;
}

void mb_assess_ideal_destroy(mb_assess_ideal *ideal)
{
    if (ideal != NULL) {
        mb_decimator_destroy(ideal->front);
        mb_ideal_destroy(ideal->detector);
        mb_coherent_destroy(ideal->band);
        mb_release(ideal->moved);
        mb_release(ideal->waiting);
        mb_release(ideal);
    }
}

void mb_assess_ideal_reset(mb_assess_ideal *ideal)
{
    ideal->to_middle = (mb_oscillator){0};
    mb_oscillator_set(&ideal->to_middle, -ideal->settings.offset_hz, ideal->settings.rate_hz);
    mb_decimator_reset(ideal->front);
    mb_ideal_reset(ideal->detector);
    mb_coherent_reset(ideal->band);
    ideal->fill = 0;
    ideal->drop = ideal->drop_at_start;
    ideal->taken = ideal->made = 0;
}

double mb_assess_ideal_audio_rate_hz(const mb_assess_ideal *ideal)
{
    return ideal->rate_hz;
}

size_t mb_assess_ideal_bound(const mb_assess_ideal *ideal, size_t n)
{
    return ideal->room + (n / IDEAL_CHUNK + 1) * ideal->chunk_bound;
}

size_t mb_assess_ideal_truth(mb_assess_ideal *ideal, const mb_phase_point *points, size_t count)
{
    size_t taken = 0, last = 1;

    while (taken < count && last == 1) {
        /* as the baseband has it: later by the decimator, and turned to the mean offset */
        mb_phase_point point = {.time_s = points[taken].time_s + ideal->delay_s,
                                .phase_rad = points[taken].phase_rad -
                                             2.0 * MB_PI * ideal->settings.offset_hz * points[taken].time_s};
        last = mb_ideal_track(ideal->detector, &point, 1);
        taken += last;
    }
    return taken;
}

void mb_assess_ideal_truth_end(mb_assess_ideal *ideal)
{
    mb_ideal_track_end(ideal->detector);
}

/* The audio filter; in place. */
static void limit_band(mb_assess_ideal *ideal, float *audio, size_t count)
{
    mb_cf32 part[BAND_PART];

    for (size_t done = 0; done < count;) {
        size_t run = count - done < BAND_PART ? count - done : BAND_PART;
        for (size_t i = 0; i < run; i++) {
            part[i] = (mb_cf32){audio[done + i], 0.0f};
        }
        mb_coherent_process(ideal->band, part, run, audio + done);
        done += run;
    }
}

/* Detects what waits, as far as the truth reaches. */
static size_t detect(mb_assess_ideal *ideal, float *out)
{
    size_t made = mb_ideal_process(ideal->detector, ideal->waiting, ideal->fill, out);

    limit_band(ideal, out, made);
    ideal->fill -= made;
    memmove(ideal->waiting, ideal->waiting + made, ideal->fill * sizeof *ideal->waiting);
    size_t drop = ideal->drop < made ? ideal->drop : made;
    ideal->drop -= drop;
    memmove(out, out + drop, (made - drop) * sizeof *out);
    return made - drop;
}

static mb_status process_chunk(mb_assess_ideal *ideal, const mb_cf32 *in, size_t n, float *out, size_t *made)
{
    *made = 0;
    if (ideal->fill + ideal->chunk_bound > ideal->room) {
        return mb_fail(MB_ERROR_ARGUMENT, "truth",
                       "the truth is more than a second behind the samples; hand over its rows first");
    }
    mb_oscillator_rotate(&ideal->to_middle, in, n, ideal->moved);
    ideal->fill += mb_decimator_process_cf32(ideal->front, ideal->moved, n, ideal->waiting + ideal->fill);
    *made = detect(ideal, out);
    return MB_OK;
}

mb_status mb_assess_ideal_process(mb_assess_ideal *ideal, const mb_cf32 *in, size_t n, float *out,
                                  size_t *made)
{
    mb_status status = MB_OK;

    *made = 0;
    for (size_t done = 0; done < n && status == MB_OK;) {
        size_t run = n - done < IDEAL_CHUNK ? n - done : IDEAL_CHUNK, count = 0;
        status = process_chunk(ideal, in + done, run, out + *made, &count);
        *made += count;
        done += run;
    }
    ideal->taken += n;
    ideal->made += *made;
    return status;
}

mb_status mb_assess_ideal_drain(mb_assess_ideal *ideal, float *out, size_t *made)
{
    static const mb_cf32 silence[IDEAL_CHUNK];
    uint64_t wanted = (uint64_t)llround((double)ideal->taken * ideal->rate_hz / ideal->settings.rate_hz);
    mb_status status = MB_OK;

    *made = 0;
    while (*made == 0 && ideal->made < wanted && status == MB_OK) {
        status = process_chunk(ideal, silence, IDEAL_CHUNK, out, made);
        if (*made > wanted - ideal->made) {
            *made = (size_t)(wanted - ideal->made);
        }
        ideal->made += *made;
    }
    return status;
}
