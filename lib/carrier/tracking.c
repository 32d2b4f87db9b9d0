#include "tracking.h"

#include <math.h>

#define FALSE_UPDATE    1e-7 /* share of blocks of noise alone that pass for voice */
#define NOISE_BLOCKS    50.0 /* averaging of the noise level */
#define QUALITY_BLOCKS  30.0 /* averaging of quality and SNR, active blocks */
#define SURPRISE_BLOCKS 8.0
#define SURPRISE_LIMIT  5.0 /* mean normalised squared innovation that says the model is broken */
#define VARIANCE_FLOOR  1e-4
#define UNSURE_VARIANCE 0.25 /* of the phase when the voice returns: the polarity may be wrong, 1 in 600 */

enum { IDLE_TO_HOLD = 10 };

mb_phase_state tracking_first_state(const mb_recovery_settings *settings, const mb_sighting *seen,
                                    double length_s)
{
    const double turn = 2.0 * MB_PI;
    double frequency_sigma = turn * 0.15 / length_s;
    double drift_sigma = turn * settings->drift_sigma_hz_s;

    return (mb_phase_state){
        .phase_rad = seen->phase_rad,
        .frequency_rad_s = turn * seen->offset_hz,
        .covariance = {0.04, 0.0, 0.0, frequency_sigma * frequency_sigma, 0.0, drift_sigma * drift_sigma},
    };
}

void tracking_begin(follower *f, const mb_sighting *seen, const mb_cf32 *samples, size_t length)
{
    double energy = 0.0;

    for (size_t i = 0; i < length; i++) {
        energy += (double)(samples[i].re * samples[i].re + samples[i].im * samples[i].im);
    }
    double power = energy / (double)length;
    double share = 0.5 * (1.0 - fmin(seen->coherence, 0.9999));
    f->noise_power = share * power;
    f->active_i = f->active_q = f->active_energy = f->active_noise = 0.0;
    f->surprise = 1.0;
    f->idle_blocks = 0;
    f->heard = false;
}

double tracking_quality(const follower *f)
{
    double both = f->active_i + f->active_q;

    return both > 0.0 ? fmax((f->active_i - f->active_q) / both, 0.0) : 0.0;
}

/* Energy that a block must mirror to be used, in units of the noise energy of one arm. The sum of squares of
 * noise has the mean square 8 s^2 per independent sample (s: power of an arm), so its magnitude exceeds g
 * with probability exp(-g^2 N / 8), N independent samples in the block. */
static double gate(const follower *f)
{
    double samples = (double)f->block * f->meter.noise_bandwidth_hz / f->settings.rate_hz;

    return sqrt(8.0 / samples * log(1.0 / FALSE_UPDATE));
}

/* Variance of half the angle of a sum of squares: signal times noise and noise times noise, over the
 * independent samples of the band; exact for white noise and any message. */
static double block_variance(const follower *f, double mirrored, double noise)
{
    double samples = (double)f->block;
    double spread = f->settings.rate_hz / f->meter.noise_bandwidth_hz;
    double both = noise * mirrored + samples * noise * noise;

    return both / (mirrored * mirrored) * spread + VARIANCE_FLOOR;
}

static void follow_noise(follower *f, double quadrature_energy)
{
    double power = quadrature_energy / (double)f->block;

    if (power > 1e-3 * f->noise_power) { /* a gap in the samples says nothing about the noise */
        f->noise_power += (power - f->noise_power) / NOISE_BLOCKS;
    }
}

static void update_phase(follower *f, double innovation, double variance, knot *out)
{
    double expected = f->state.covariance[0] + variance;

    f->surprise += (innovation * innovation / expected - f->surprise) / SURPRISE_BLOCKS;
    if (f->surprise > SURPRISE_LIMIT) {
        /* the phase or the frequency jumped: believe the measurement more than the past */
        f->state.covariance[0] += 0.25;
        f->state.covariance[3] += 2.0;
        f->surprise = 1.0;
        expected = f->state.covariance[0] + variance;
    }
    out->measured_rad = f->state.phase_rad + innovation;
    out->variance_rad2 = (float)variance;
    double limit = 3.0 * sqrt(expected);
    mb_phase_update(&f->state, fmax(-limit, fmin(limit, innovation)), variance);
}

static void note_active(follower *f, const block_reading *reading, double real_part)
{
    const double keep = 1.0 - 1.0 / QUALITY_BLOCKS;

    f->active_i = keep * f->active_i + 0.5 * (reading->energy + real_part);
    f->active_q = keep * f->active_q + 0.5 * (reading->energy - real_part);
    f->active_energy = keep * f->active_energy + fmax(real_part, 0.0);
    f->active_noise = keep * f->active_noise + 2.0 * f->noise_power * (double)f->block;
    f->active_blocks++;
}

/* Sum of squares seen from an axis at `phase` instead of the oscillator's. */
static double turned_real(const block_reading *reading, double phase)
{
    double angle = 2.0 * (phase - reading->reference_rad);

    return reading->square_re * cos(angle) + reading->square_im * sin(angle);
}

void tracking_block(follower *f, const mb_cf32 *samples, knot *out)
{
    block_reading reading = block_meter_read(&f->meter, samples, f->state.frequency_rad_s);
    double mirrored = hypot(reading.square_re, reading.square_im);
    double least_noise = 0.35 * (reading.energy - mirrored) / (double)f->block;
    double noise = fmax(f->noise_power, least_noise);
    bool active = mirrored > gate(f) * noise * (double)f->block && mirrored > 1e-25;

    *out = (knot){.known = true};
    if (active) {
        double angle = 0.5 * atan2(reading.square_im, reading.square_re);
        double innovation = reading.reference_rad + angle - f->state.phase_rad;
        innovation = nearest_branch(innovation, 0.0);
        if (f->idle_blocks >= IDLE_TO_HOLD && f->heard) {
            f->holds++;
            f->polarity_uncertain = f->polarity_uncertain || f->state.covariance[0] > UNSURE_VARIANCE;
        }
        update_phase(f, innovation, block_variance(f, mirrored, noise), out);
        f->idle_blocks = 0;
        f->heard = true;
    } else {
        f->idle_blocks++;
    }
    double real_part = turned_real(&reading, f->state.phase_rad);
    follow_noise(f, 0.5 * (reading.energy - real_part));
    if (active) {
        note_active(f, &reading, real_part);
    }
    out->filtered = f->state;
    out->quality = (float)tracking_quality(f);
    out->snr_db = (float)mb_power_db(f->active_energy / fmax(f->active_noise, 1e-30) *
                                     f->meter.noise_bandwidth_hz / (2.0 * f->settings.high_cut_hz));
    out->in_phase_power = (float)(0.5 * (reading.energy + real_part) / (double)f->block);
    out->quadrature_power = (float)(0.5 * (reading.energy - real_part) / (double)f->block);
    out->mode = f->idle_blocks >= IDLE_TO_HOLD ? MB_CARRIER_HOLD : MB_CARRIER_LOCKED;
    mb_phase_predict(&f->state, &f->settings.noise, f->block_s);
}
