/* Closed forms of carrier recovery: loop noise, slips, bounds. Sources stand at each in measure.h. */
#include "mirrorband/measure.h"

#include <math.h>

double mb_theory_loop_bandwidth_hz(double natural_rad_s, double damping)
{
    return natural_rad_s / 2.0 * (damping + 1.0 / (4.0 * damping));
}

double mb_theory_natural_rad_s(double loop_bandwidth_hz, double damping)
{
    return 2.0 * loop_bandwidth_hz / (damping + 1.0 / (4.0 * damping));
}

double mb_theory_squaring_loss(double carrier_to_density_hz, double prefilter_hz)
{
    return 1.0 / (1.0 + prefilter_hz / (2.0 * carrier_to_density_hz));
}

double mb_theory_costas_variance(double carrier_to_density_hz, double loop_bandwidth_hz, double prefilter_hz)
{
    double linear = loop_bandwidth_hz / carrier_to_density_hz;

    return linear / mb_theory_squaring_loss(carrier_to_density_hz, prefilter_hz);
}

/* A block of T seconds averages like a loop of BL = 1/(2T); the rest is the squaring loss with P/N0 = snr B.
 */
double mb_theory_block_variance(double snr, double prefilter_hz, double seconds)
{
    return mb_theory_costas_variance(snr * prefilter_hz, 1.0 / (2.0 * seconds), prefilter_hz);
}

double mb_theory_lock_quality(double phase_error_rad, double snr)
{
    return cos(2.0 * phase_error_rad) * snr / (1.0 + snr);
}

/* Power series below 20: terms (x/2)^2k / k!^2, all positive, so nothing cancels. */
static double bessel_i0_series(double x)
{
    double quarter = x * x / 4.0, term = 1.0, sum = 1.0;

    for (int k = 1; k < 200 && term > 1e-18 * sum; k++) {
        term *= quarter / ((double)k * k);
        sum += term;
    }
    return sum;
}

/* Asymptotic series from 20 on: its smallest term lies below 1e-17 there. */
static double bessel_i0_far_scaled(double x)
{
    double term = 1.0, sum = 1.0;

    for (int k = 1; k < 30 && term > 1e-18 * sum; k++) {
        double odd = 2.0 * k - 1.0;
        term *= odd * odd / (8.0 * k * x);
        sum += term;
    }
    return sum / sqrt(2.0 * MB_PI * x);
}

double mb_theory_bessel_i0_scaled(double x)
{
    double magnitude = fabs(x);

    return magnitude < 20.0 ? bessel_i0_series(magnitude) * exp(-magnitude) : bessel_i0_far_scaled(magnitude);
}

/* Variance of exp(rho cos p)/(2 pi I0(rho)) over one turn. The integrand is smooth and even; the trapezoid
 * rule over the half turn, with the end point's slope (p^2 is not periodic) taken out by Simpson's weights.
 */
double mb_theory_tikhonov_variance(double rho)
{
    enum { STEPS = 20000 };
    double step = MB_PI / STEPS, sum = 0.0;

    for (int i = 0; i <= STEPS; i++) {
        double phase = i * step;
        double weight = i == 0 || i == STEPS ? 1.0 : (i % 2 == 1 ? 4.0 : 2.0);
        sum += weight * phase * phase * exp(rho * (cos(phase) - 1.0));
    }
    return sum * step / 3.0 / (MB_PI * mb_theory_bessel_i0_scaled(rho));
}

double mb_theory_slip_time_s(double rho, double loop_bandwidth_hz)
{
    double scaled = mb_theory_bessel_i0_scaled(rho);

    return MB_PI * MB_PI * rho * scaled * scaled * exp(2.0 * rho) / (2.0 * loop_bandwidth_hz);
}

double mb_theory_frequency_bound(double snr, double count)
{
    return 6.0 / (snr * count * (count * count - 1.0));
}

double mb_theory_phase_bound(double snr, double count)
{
    return (2.0 * count - 1.0) / (snr * count * (count + 1.0));
}
