#include "mirrorband/carrier.h"

#include <math.h>

#define QUIET_RISE 0.02 /* per averaging time of the energy: doubles in 35 of them */
#define WARM       0.99 /* of the averages; before, the floor is the energy */

struct mb_costas {
    mb_costas_settings settings;
    double gain_phase;     /* rad per unit of error and sample */
    double gain_frequency; /* rad/sample per unit of error and sample */
    double keep;           /* of the energy average, per sample */
    double phase_rad;
    double step_rad; /* per sample */
    double energy;   /* averaged |z|^2 */
    double quiet;    /* its floor: falls at once, rises slowly */
    double quality;  /* averaged I^2 - Q^2 */
    double warmth;   /* average of ones: how far the averages have settled, 0 to 1 */
    bool holding;
};

mb_costas_settings mb_costas_settings_default(void)
{
    return (mb_costas_settings){
        .rate_hz = 16000.0,
        .loop_bandwidth_hz = 5.0,
        .damping = 0.7071,
        .energy_time_s = 0.02,
        .gate = 3.0,
    };
}

mb_status mb_costas_create(const mb_costas_settings *settings, mb_costas **out)
{
    const mb_costas_settings *s = settings;

    *out = NULL;
    if (mb_check_range("rate_hz", s->rate_hz, 1000.0, 1e9, "Hz") != MB_OK ||
        mb_check_range("loop_bandwidth_hz", s->loop_bandwidth_hz, 0.1, s->rate_hz / 50.0, "Hz") != MB_OK ||
        mb_check_range("damping", s->damping, 0.3, 3.0, "") != MB_OK ||
        mb_check_range("offset_hz", s->offset_hz, -0.5 * s->rate_hz, 0.5 * s->rate_hz, "Hz") != MB_OK ||
        mb_check_range("offset_limit_hz", s->offset_limit_hz, 0.0, 0.5 * s->rate_hz, "Hz") != MB_OK ||
        mb_check_range("energy_time_s", s->energy_time_s, 1e-3, 1.0, "s") != MB_OK ||
        mb_check_range("gate", s->gate, 0.0, 1000.0, "") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_costas *costas = mb_allocate(1, sizeof *costas);
    if (costas == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for a Costas loop");
    }
    costas->settings = *s;
    /* B_L = (w_n / 2)(z + 1/(4z)) for a second-order type-2 loop */
    double natural = 2.0 * s->loop_bandwidth_hz / (s->damping + 0.25 / s->damping) / s->rate_hz;
    costas->gain_phase = 2.0 * s->damping * natural;
    costas->gain_frequency = natural * natural;
    costas->keep = exp(-1.0 / (s->energy_time_s * s->rate_hz));
    mb_costas_reset(costas);
    *out = costas;
    return MB_OK;
}

void mb_costas_reset(mb_costas *costas)
{
    costas->phase_rad = costas->energy = costas->quiet = costas->quality = costas->warmth = 0.0;
    costas->step_rad = 2.0 * MB_PI * costas->settings.offset_hz / costas->settings.rate_hz;
    costas->holding = false;
}

void mb_costas_destroy(mb_costas *costas)
{
    mb_release(costas);
}

void mb_costas_steer(mb_costas *costas, double phase_rad, double offset_hz)
{
    const double turn = 2.0 * MB_PI;

    costas->phase_rad = phase_rad - turn * floor(phase_rad / turn);
    costas->step_rad = turn * offset_hz / costas->settings.rate_hz;
}

static void follow_energy(mb_costas *costas, double i, double q)
{
    double fresh = 1.0 - costas->keep;

    costas->energy += fresh * (i * i + q * q - costas->energy);
    costas->quality += fresh * (i * i - q * q - costas->quality);
    costas->warmth += fresh * (1.0 - costas->warmth);
    if (costas->energy < costas->quiet || costas->warmth < WARM) {
        costas->quiet = costas->energy;
    } else {
        costas->quiet *= 1.0 + QUIET_RISE * fresh;
    }
    /* what mirrors about the loop's phase is no pause, however long it has been steady */
    bool mirrors = costas->quality > 0.5 * costas->energy;
    costas->holding = !mirrors && costas->energy <= costas->settings.gate * costas->quiet;
}

static void advance(mb_costas *costas, double error)
{
    const double turn = 2.0 * MB_PI;
    double limit = turn * costas->settings.offset_limit_hz / costas->settings.rate_hz;

    costas->step_rad += costas->gain_frequency * error;
    if (limit > 0.0) {
        costas->step_rad = fmax(-limit, fmin(limit, costas->step_rad));
    }
    costas->phase_rad += costas->step_rad + costas->gain_phase * error;
    costas->phase_rad -= turn * floor(costas->phase_rad / turn);
}

void mb_costas_process(mb_costas *costas, const mb_cf32 *in, size_t n, mb_cf32 *out)
{
    bool gated = costas->settings.gate > 0.0;

    for (size_t k = 0; k < n; k++) {
        bool finite = isfinite(in[k].re) && isfinite(in[k].im);
        double re = finite ? (double)in[k].re : 0.0, im = finite ? (double)in[k].im : 0.0;
        double cs = cos(costas->phase_rad), sn = sin(costas->phase_rad);
        double i = re * cs + im * sn, q = im * cs - re * sn;
        out[k] = (mb_cf32){(float)i, (float)q};
        follow_energy(costas, i, q);
        bool still = costas->energy <= 1e-30 || (gated && costas->holding);
        /* a loud sample must not throw the loop: its error counts no more than a quarter turn */
        double error = still ? 0.0 : fmax(-1.5, fmin(1.5, i * q / costas->energy));
        advance(costas, error);
    }
}

mb_costas_state mb_costas_state_get(const mb_costas *costas)
{
    return (mb_costas_state){
        .carrier_offset_hz = costas->step_rad * costas->settings.rate_hz / (2.0 * MB_PI),
        .phase_rad = costas->phase_rad,
        .lock_quality = costas->energy > 0.0 ? fmax(costas->quality / costas->energy, 0.0) : 0.0,
        .holding = costas->holding,
    };
}
