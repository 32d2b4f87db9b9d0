#include "parts.h"

#include <math.h>

/* Mean of cos(2 pi f delay) over low..high. */
static double mean_cosine(double delay_s, double low_hz, double high_hz)
{
    double low = 2.0 * MB_PI * low_hz * delay_s, high = 2.0 * MB_PI * high_hz * delay_s;

    return high - low > 1e-9 ? (sin(high) - sin(low)) / (high - low) : cos(high);
}

/* See mb_fading_phase. */
static double best_phase(double complex a, double complex b, double mean)
{
    double re = creal(a) * creal(a) - cimag(a) * cimag(a) + creal(b) * creal(b) - cimag(b) * cimag(b) +
                2.0 * mean * (creal(a) * creal(b) - cimag(a) * cimag(b));
    double im = 2.0 * (creal(a) * cimag(a) + creal(b) * cimag(b) +
                       mean * (creal(a) * cimag(b) + cimag(a) * creal(b)));
    double phase = 0.5 * atan2(im, re);

    if ((creal(a) + creal(b)) * cos(phase) + (cimag(a) + cimag(b)) * sin(phase) < 0.0) {
        phase += phase > 0.0 ? -MB_PI : MB_PI;
    }
    return phase;
}

double mb_fading_phase(const double path_re[2], const double path_im[2], double delay_s, double low_hz,
                       double high_hz)
{
    return best_phase(complex_of(path_re[0], path_im[0]), complex_of(path_re[1], path_im[1]),
                      mean_cosine(delay_s, low_hz, high_hz));
}

/* Gains of the paths at the sample processed last, as seen at the suppressed carrier. */
static void gains_at_carrier(const mb_channel *channel, double complex gain[2])
{
    channel_fading_gains(&channel->fading, gain);
    gain[1] = complex_times(gain[1], channel->delay_turn);
}

static double unwrapped(double phase, double near)
{
    return phase + 2.0 * MB_PI * rint((near - phase) / (2.0 * MB_PI));
}

static uint64_t last_sample(const mb_channel *channel)
{
    return channel->sample > 0 ? channel->sample - 1 : 0;
}

void channel_truth_prepare(mb_channel *channel)
{
    const mb_channel_settings *settings = &channel->settings;
    double delay_s = (double)channel->fading.delay_samples / settings->rate_hz;
    double angle = -2.0 * MB_PI * settings->carrier_hz * delay_s;

    channel->delay_turn = complex_of(cos(angle), sin(angle));
    channel->spectrum_mean = mean_cosine(delay_s, settings->message_low_hz, settings->audio_bandwidth_hz);
}

void channel_truth_start(mb_channel *channel)
{
    double complex gain[2];

    gains_at_carrier(channel, gain);
    channel->fading_rad = best_phase(gain[0], gain[1], channel->spectrum_mean);
}

size_t channel_truth_room(const mb_channel *channel, size_t count)
{
    size_t room = CHANNEL_PART - (size_t)(channel->sample % CHANNEL_PART);

    if (channel->truth_callback != NULL) {
        uint64_t over = channel->sample % channel->truth_every;
        uint64_t ahead = over == 0 ? 1 : channel->truth_every - over + 1;
        room = ahead < room ? (size_t)ahead : room;
    }
    return room < count ? room : count;
}

void channel_truth_follow(mb_channel *channel)
{
    if (channel->sample % CHANNEL_PART == 0 && channel->fading.interval > 0) {
        double complex gain[2];
        gains_at_carrier(channel, gain);
        channel->fading_rad =
            unwrapped(best_phase(gain[0], gain[1], channel->spectrum_mean), channel->fading_rad);
    }
    if (channel->truth_callback != NULL && last_sample(channel) % channel->truth_every == 0) {
        mb_truth truth = mb_channel_truth(channel);
        channel->truth_callback(channel->truth_user, &truth);
    }
}

static double gain_db(const mb_channel *channel, uint64_t sample)
{
    const mb_channel_settings *settings = &channel->settings;
    uint64_t run;

    if (channel_level_at(&channel->level, sample, &run) * channel_level_at(&channel->events, sample, &run) ==
        0.0) {
        return -400.0;
    }
    bool stepped = sample >= channel->level.step_at || sample >= channel->events.step_at;
    return settings->gain_db + (stepped ? settings->level_step_db : 0.0);
}

static double carrier_phase(const mb_channel *channel, uint64_t sample, double fading_rad)
{
    const mb_channel_settings *settings = &channel->settings;
    double incoming = 2.0 * MB_PI * ((double)sample * (settings->carrier_hz / settings->rate_hz));

    return incoming + channel_oscillator_phase(&channel->oscillator, sample) + channel->oscillator.noise_rad +
           unwrapped(fading_rad, channel->fading_rad);
}

mb_truth mb_channel_truth(const mb_channel *channel)
{
    const mb_channel_settings *settings = &channel->settings;
    uint64_t sample = last_sample(channel);
    double complex gain[2];

    gains_at_carrier(channel, gain);
    double cross = creal(gain[0]) * creal(gain[1]) + cimag(gain[0]) * cimag(gain[1]);
    double power = complex_square(gain[0]) + complex_square(gain[1]) + 2.0 * channel->spectrum_mean * cross;
    double time_s = (double)sample / settings->rate_hz;
    return (mb_truth){
        .sample = sample,
        .time_s = time_s,
        .carrier_phase_rad =
            carrier_phase(channel, sample, best_phase(gain[0], gain[1], channel->spectrum_mean)),
        .carrier_offset_hz = settings->carrier_hz + settings->offset_hz + settings->drift_hz_per_s * time_s,
        .gain_db = gain_db(channel, sample),
        .fading_db = mb_power_db(power),
        .path_re = {creal(gain[0]), creal(gain[1])},
        .path_im = {cimag(gain[0]), cimag(gain[1])},
    };
}

void mb_channel_set_truth_callback(mb_channel *channel, uint64_t every_samples, mb_truth_callback callback,
                                   void *user)
{
    channel->truth_every = every_samples;
    channel->truth_callback = every_samples > 0 ? callback : NULL;
    channel->truth_user = user;
}
