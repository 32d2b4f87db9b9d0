#include "mirrorband/chain.h"

#include <math.h>
#include <string.h>

#include "mirrorband/filter.h"

#define VOICE_RATE_HZ 48000.0

enum { CHUNK = 1024 };

struct mb_transmit {
    mb_transmit_settings settings;
    mb_resampler *resampler; /* audio rate to voice rate; NULL when they are equal */
    mb_voice *voice;
    mb_product *product;
    mb_equivalent_modulator *modulator; /* NULL: ideal */
    mb_interpolator *interpolator;
    float *audio; /* at the voice rate, one chunk */
    mb_cf32 *baseband;
    size_t voice_bound;
    double delay_s;
    uint64_t skip;  /* output samples still to be dropped: the delay of the chain */
    uint64_t taken; /* audio samples */
    uint64_t made;  /* output samples handed out */
};

mb_transmit_settings mb_transmit_settings_default(void)
{
    return (mb_transmit_settings){
        .audio_rate_hz = 48000.0,
        .rate_hz = 240000.0,
        .voice = mb_voice_settings_default(),
        .modulator = MB_MODULATOR_PRODUCT,
        .product = mb_product_settings_default(),
    };
}

static mb_status check_settings(const mb_transmit_settings *s)
{
    double least_hz = 2.2 * (s->voice.high_hz + fabs(s->offset_hz));

    if (mb_check_range("audio_rate_hz", s->audio_rate_hz, 8000.0, 192000.0, "Hz") != MB_OK ||
        mb_check_range("rate_hz", s->rate_hz, VOICE_RATE_HZ, 25e6, "Hz") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    if (s->rate_hz < least_hz) {
        return mb_fail(
            MB_ERROR_ARGUMENT, "rate_hz",
            "an output rate of %g Hz is too low for a message up to %g Hz about a carrier at %g Hz; it takes "
            "at least %.0f Hz",
            s->rate_hz, s->voice.high_hz, s->offset_hz, ceil(least_hz));
    }
    if (s->audio_rate_hz < 2.0 * s->voice.high_hz) {
        mb_log(MB_LOG_WARNING,
               "audio at %g Hz holds nothing above %g Hz, below the upper edge of the message",
               s->audio_rate_hz, 0.5 * s->audio_rate_hz);
    }
    return MB_OK;
}

static mb_status create_interpolator(const mb_transmit_settings *s, mb_interpolator **out)
{
    mb_interpolator_settings up = mb_interpolator_settings_default();

    up.rate_in_hz = VOICE_RATE_HZ;
    up.rate_out_hz = s->rate_hz;
    up.offset_hz = s->offset_hz;
    up.passband_hz = s->voice.high_hz + 300.0;
    return mb_interpolator_create(&up, out);
}

static mb_status create_modulator(const mb_transmit_settings *s, mb_transmit *t)
{
    mb_equivalent_modulator_settings settings = mb_equivalent_modulator_settings_default();

    if (s->modulator == MB_MODULATOR_PRODUCT) {
        return MB_OK;
    }
    settings.equivalent = s->equivalent;
    settings.gain = 1.0;
    return mb_equivalent_modulator_create(&settings, &t->modulator);
}

static mb_status create_parts(const mb_transmit_settings *s, mb_transmit *t)
{
    mb_voice_settings voice = s->voice;
    mb_status status = MB_OK;

    voice.rate_hz = VOICE_RATE_HZ;
    t->voice_bound = CHUNK;
    if (s->audio_rate_hz < VOICE_RATE_HZ || s->audio_rate_hz > VOICE_RATE_HZ) {
        mb_resampler_settings change = mb_resampler_settings_default();
        change.rate_in_hz = s->audio_rate_hz;
        change.rate_out_hz = VOICE_RATE_HZ;
        change.passband_hz = fmin(0.45 * s->audio_rate_hz, 8000.0);
        status = mb_resampler_create(&change, &t->resampler);
        t->voice_bound = status == MB_OK ? mb_resampler_output_bound(t->resampler, CHUNK) : 0;
    }
    if (status != MB_OK || (status = mb_voice_create(&voice, &t->voice)) != MB_OK ||
        (status = mb_product_create(&s->product, &t->product)) != MB_OK ||
        (status = create_modulator(s, t)) != MB_OK ||
        (status = create_interpolator(s, &t->interpolator)) != MB_OK) {
        return status;
    }
    t->audio = mb_allocate(t->voice_bound, sizeof *t->audio);
    t->baseband = mb_allocate(t->voice_bound, sizeof *t->baseband);
    if (t->audio == NULL || t->baseband == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the transmit chain");
    }
    double resampling_s = t->resampler != NULL ? mb_resampler_delay_s(t->resampler) : 0.0;
    t->delay_s = resampling_s + (double)mb_voice_delay_samples(t->voice) / VOICE_RATE_HZ +
                 mb_interpolator_delay_s(t->interpolator);
    return MB_OK;
}

static void start_counting(mb_transmit *t)
{
    t->skip = (uint64_t)llround(t->delay_s * t->settings.rate_hz);
    t->taken = t->made = 0;
}

mb_status mb_transmit_create(const mb_transmit_settings *settings, mb_transmit **out)
{
    *out = NULL;
    if (check_settings(settings) != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_transmit *transmit = mb_allocate(1, sizeof *transmit);
    if (transmit == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the transmit chain");
    }
    transmit->settings = *settings;
    mb_status status = create_parts(settings, transmit);
    if (status != MB_OK) {
        mb_transmit_destroy(transmit);
        return status;
    }
    start_counting(transmit);
    *out = transmit;
    return MB_OK;
}

void mb_transmit_destroy(mb_transmit *transmit)
{
    if (transmit != NULL) {
        mb_resampler_destroy(transmit->resampler);
        mb_voice_destroy(transmit->voice);
        mb_product_destroy(transmit->product);
        mb_equivalent_modulator_destroy(transmit->modulator);
        mb_interpolator_destroy(transmit->interpolator);
        mb_release(transmit->audio);
        mb_release(transmit->baseband);
        mb_release(transmit);
    }
}

void mb_transmit_reset(mb_transmit *transmit)
{
    if (transmit->resampler != NULL) {
        mb_resampler_reset(transmit->resampler);
    }
    mb_voice_reset(transmit->voice);
    mb_product_reset(transmit->product);
    if (transmit->modulator != NULL) {
        mb_equivalent_modulator_reset(transmit->modulator);
    }
    mb_interpolator_reset(transmit->interpolator);
    start_counting(transmit);
}

double mb_transmit_delay_s(const mb_transmit *transmit)
{
    return transmit->delay_s;
}

mb_voice_levels mb_transmit_state(const mb_transmit *transmit)
{
    return mb_voice_state(transmit->voice);
}

size_t mb_transmit_output_bound(const mb_transmit *transmit, size_t n)
{
    size_t chunks = n / CHUNK + 1;

    return chunks * mb_interpolator_output_bound(transmit->interpolator, transmit->voice_bound);
}

/* One chunk of audio through the chain; returns the samples kept in out. */
static size_t transmit_chunk(mb_transmit *t, const float *audio, size_t n, mb_cf32 *out)
{
    size_t count = n;

    if (t->resampler != NULL) {
        count = mb_resampler_process_f32(t->resampler, audio, n, t->audio);
    } else {
        memcpy(t->audio, audio, n * sizeof *audio);
    }
    mb_voice_process(t->voice, t->audio, count, t->audio);
    if (t->modulator != NULL) {
        mb_equivalent_modulator_process(t->modulator, t->audio, count, t->baseband);
        mb_product_process_cf32(t->product, t->baseband, count, t->baseband);
    } else {
        mb_product_process(t->product, t->audio, count, t->baseband);
    }
    size_t made = mb_interpolator_process(t->interpolator, t->baseband, count, out);
    size_t drop = t->skip < made ? (size_t)t->skip : made;
    t->skip -= drop;
    memmove(out, out + drop, (made - drop) * sizeof *out);
    return made - drop;
}

size_t mb_transmit_process(mb_transmit *transmit, const float *audio, size_t n, mb_cf32 *out)
{
    size_t made = 0;

    for (size_t done = 0; done < n;) {
        size_t run = n - done < CHUNK ? n - done : CHUNK;
        made += transmit_chunk(transmit, audio + done, run, out + made);
        done += run;
    }
    transmit->taken += n;
    transmit->made += made;
    return made;
}

size_t mb_transmit_drain(mb_transmit *transmit, mb_cf32 *out)
{
    static const float silence[CHUNK];
    const mb_transmit_settings *s = &transmit->settings;
    uint64_t wanted = (uint64_t)llround((double)transmit->taken * s->rate_hz / s->audio_rate_hz);
    size_t made = 0;

    while (made == 0 && transmit->made < wanted) {
        made = transmit_chunk(transmit, silence, CHUNK, out);
        if (made > wanted - transmit->made) {
            made = (size_t)(wanted - transmit->made);
        }
        transmit->made += made;
    }
    return made;
}
