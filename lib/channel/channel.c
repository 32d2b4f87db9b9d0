#include "parts.h"

#include <math.h>

/* Streams of the seed: one an impairment, so that none changes by switching another on. The base keeps them
 * apart from those of other rooms. */
enum {
    STREAM_PHASE = 0x43480000,
    STREAM_PHASE_NOISE,
    STREAM_PATH_1,
    STREAM_PATH_2,
    STREAM_INTERFERER,
    STREAM_NOISE,
    STREAM_IMPULSES
};

mb_channel_settings mb_channel_settings_default(void)
{
    return (mb_channel_settings){
        .rate_hz = 48e3,
        .signal_power = 1.0,
        .audio_bandwidth_hz = 2700.0,
        .message_low_hz = 300.0,
        .leak_dbc = -INFINITY,
        .events_keep_noise = true,
        .noise_snr_db = INFINITY,
        .dc_dbfs = -INFINITY,
        .clip_level = INFINITY,
    };
}

static mb_random stream(const mb_channel *channel, uint64_t number)
{
    mb_random random;

    mb_random_seed(&random, channel->settings.seed, number);
    return random;
}

static double random_turn(const mb_channel *channel, uint64_t number)
{
    mb_random random = stream(channel, number);

    return 2.0 * MB_PI * mb_random_uniform(&random);
}

/* What signal_power has become behind the gain: noise, interferer and impulses refer to it. */
static double reference_power(const mb_channel_settings *settings)
{
    return settings->signal_power * mb_db_power(settings->gain_db);
}

static void prepare_levels(mb_channel *channel)
{
    const mb_channel_settings *settings = &channel->settings;
    channel_level still = {.gain = 1.0, .step_gain = 1.0, .step_at = UINT64_MAX};
    uint64_t gap_from = (uint64_t)rint(settings->gap_at_s * settings->rate_hz);
    channel_level events = {
        .gain = 1.0,
        .step_gain = sqrt(mb_db_power(settings->level_step_db)),
        .step_at = (uint64_t)rint(settings->level_step_at_s * settings->rate_hz),
        .gap_from = gap_from,
        .gap_to = gap_from + (uint64_t)rint(settings->gap_length_s * settings->rate_hz),
    };

    channel->level = settings->events_keep_noise ? events : still;
    channel->events = settings->events_keep_noise ? still : events;
    channel->level.gain = sqrt(mb_db_power(settings->gain_db));
}

static void prepare_disturbances(mb_channel *channel)
{
    const mb_channel_settings *settings = &channel->settings;
    double power = reference_power(settings), band_hz = 2.0 * settings->audio_bandwidth_hz;

    if (settings->interferer == MB_INTERFERER_TONE) {
        channel->tone = sqrt(power * mb_db_power(settings->interferer_db));
    }
    if (isfinite(settings->noise_snr_db)) {
        double density = power / mb_db_power(settings->noise_snr_db) / band_hz;
        channel->noise.sigma = sqrt(density * settings->rate_hz / 2.0);
    }
    channel->noise.gauss = &channel->gauss;
    if (settings->impulse_rate_hz > 0.0) {
        /* one sample of amplitude a peaks at a band/rate behind an ideal filter of that band */
        channel->impulses.amplitude =
            sqrt(power * mb_db_power(settings->impulse_db)) * settings->rate_hz / band_hz;
        channel->impulses.mean_interval = settings->rate_hz / settings->impulse_rate_hz;
    }
}

static void prepare(mb_channel *channel)
{
    const mb_channel_settings *settings = &channel->settings;

    channel_gauss_prepare(&channel->gauss);
    if (isfinite(settings->leak_dbc)) {
        channel->leak = sqrt(settings->signal_power * mb_db_power(settings->leak_dbc));
    }
    channel->turns = settings->offset_hz != 0.0 || settings->drift_hz_per_s != 0.0 ||
                     settings->phase_rad != 0.0 || settings->random_phase ||
                     settings->phase_noise_linewidth_hz > 0.0;
    prepare_levels(channel);
    prepare_disturbances(channel);
    channel_front_set_rails(&channel->front, settings->iq_gain_db, settings->iq_phase_deg);
    channel_front_set_dc(&channel->front, settings->dc_dbfs, settings->dc_phase_rad);
    channel_front_set_limits(&channel->front, settings->clip_level, settings->quantise_bits);
}

static double first_phase(const mb_channel *channel)
{
    const mb_channel_settings *settings = &channel->settings;

    return settings->phase_rad + (settings->random_phase ? random_turn(channel, STREAM_PHASE) : 0.0);
}

static void start_carrier(mb_channel *channel, channel_oscillator *carrier, double frequency_hz, double phase)
{
    oscillator_plan plan = {
        .rate_hz = channel->settings.rate_hz, .frequency_hz = frequency_hz, .phase_rad = phase};
    mb_random unused = {.has_spare = false};

    channel_oscillator_start(carrier, &plan, &channel->gauss, &unused);
}

static void start_oscillators(mb_channel *channel)
{
    const mb_channel_settings *settings = &channel->settings;
    oscillator_plan plan = {
        .rate_hz = settings->rate_hz,
        .frequency_hz = settings->offset_hz,
        .drift_hz_per_s = settings->drift_hz_per_s,
        .phase_rad = first_phase(channel),
        .linewidth_hz = settings->phase_noise_linewidth_hz,
    };
    mb_random random = stream(channel, STREAM_PHASE_NOISE);

    channel_oscillator_start(&channel->oscillator, &plan, &channel->gauss, &random);
    start_carrier(channel, &channel->leak_carrier, settings->carrier_hz, settings->leak_phase_rad);
    start_carrier(channel, &channel->tone_carrier, settings->interferer_offset_hz,
                  random_turn(channel, STREAM_INTERFERER));
}

void mb_channel_reset(mb_channel *channel)
{
    mb_random paths[2] = {stream(channel, STREAM_PATH_1), stream(channel, STREAM_PATH_2)};
    mb_random impulses = stream(channel, STREAM_IMPULSES);

    channel->sample = 0;
    channel->non_finite = 0;
    channel->front.clipped = 0;
    channel_fading_start(&channel->fading, paths);
    start_oscillators(channel);
    channel->noise.random = stream(channel, STREAM_NOISE);
    channel_impulses_start(&channel->impulses, &impulses);
    channel_truth_start(channel);
}

mb_status mb_channel_create(const mb_channel_settings *settings, mb_channel **out)
{
    *out = NULL;
    mb_status status = channel_check(settings);
    if (status != MB_OK) {
        return status;
    }
    fading_plan plan = {
        .paths = settings->paths,
        .first_steady = settings->first_path_steady,
        .rate_hz = settings->rate_hz,
        .spread_hz = settings->doppler_spread_hz,
        .delay_s = settings->delay_s,
        .second_db = settings->second_path_db,
    };
    mb_channel *channel = mb_allocate(1, sizeof *channel);
    if (channel == NULL || !channel_fading_allocate(&channel->fading, &plan, &channel->gauss)) {
        mb_channel_destroy(channel);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a channel with a path delay of %g s",
                       settings->delay_s);
    }
    channel->settings = *settings;
    prepare(channel);
    channel_truth_prepare(channel);
    mb_channel_reset(channel);
    *out = channel;
    return MB_OK;
}

void mb_channel_destroy(mb_channel *channel)
{
    if (channel != NULL) {
        channel_fading_free(&channel->fading);
        mb_release(channel);
    }
}

size_t mb_channel_delay_samples(const mb_channel *channel)
{
    (void)channel;
    return 0;
}

mb_channel_counts mb_channel_state(const mb_channel *channel)
{
    return (mb_channel_counts){
        .samples = channel->sample,
        .non_finite = channel->non_finite,
        .clipped = channel->front.clipped,
        .impulses = channel->impulses.hits,
        .delay_s = (double)channel->fading.delay_samples / channel->settings.rate_hz,
        .phase_rad = first_phase(channel),
    };
}
