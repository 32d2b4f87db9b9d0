#include "window.h"

#include <math.h>

/* Beta of a Kaiser window whose spectrum has sidelobes this far below its peak (J. F. Kaiser and R. W.
 * Schafer, 1980: fitted for 13.26 to 120 dB; the upper line holds on to 140 dB). */
static double kaiser_beta(double sidelobe_db)
{
    if (sidelobe_db > 60.0) {
        return 0.12438 * (sidelobe_db + 6.3);
    }
    double above = fmax(sidelobe_db - 13.26, 0.0);
    return 0.76609 * pow(above, 0.4) + 0.09834 * above;
}

/* I0(beta sqrt(1 - x^2))/I0(beta), x from -1 to 1. */
static double kaiser(double beta, double x)
{
    double argument = beta * sqrt(fmax(0.0, 1.0 - x * x));
    double ratio = mb_theory_bessel_i0_scaled(argument) / mb_theory_bessel_i0_scaled(beta);

    return ratio * exp(argument - beta);
}

/* Sum of cosines with coefficients a0 - a1 cos + a2 cos 2 - a3 cos 3, turn from 0 to 1. */
static double cosine_sum(const double a[4], double turn)
{
    double phase = 2.0 * MB_PI * turn;

    return a[0] - a[1] * cos(phase) + a[2] * cos(2.0 * phase) - a[3] * cos(3.0 * phase);
}

static double value_at(mb_window_kind kind, double beta, double turn)
{
    static const double hann[4] = {0.5, 0.5, 0.0, 0.0};
    static const double harris[4] = {0.35875, 0.48829, 0.14128, 0.01168}; /* F. J. Harris, 1978, -92 dB */

    switch (kind) {
    case MB_WINDOW_BLACKMAN_HARRIS:
        return cosine_sum(harris, turn);
    case MB_WINDOW_HANN:
        return cosine_sum(hann, turn);
    case MB_WINDOW_RECTANGULAR:
        return 1.0;
    case MB_WINDOW_KAISER:
        break;
    }
    return kaiser(beta, 2.0 * turn - 1.0);
}

static double lobe_of(mb_window_kind kind, double beta)
{
    switch (kind) {
    case MB_WINDOW_BLACKMAN_HARRIS:
        return 4.0;
    case MB_WINDOW_HANN:
        return 2.0;
    case MB_WINDOW_RECTANGULAR:
        return 1.0;
    case MB_WINDOW_KAISER:
        break;
    }
    return sqrt(1.0 + beta * beta / (MB_PI * MB_PI));
}

mb_window_shape mb_window_fill(mb_window_kind kind, double sidelobe_db, size_t count, float *window)
{
    double beta = kaiser_beta(sidelobe_db), sum = 0.0, square_sum = 0.0;

    for (size_t i = 0; i < count; i++) {
        window[i] = (float)value_at(kind, beta, (double)i / (double)count);
        sum += (double)window[i];
        square_sum += (double)window[i] * (double)window[i];
    }
    return (mb_window_shape){.square_sum = square_sum,
                             .noise_bins = (double)count * square_sum / (sum * sum),
                             .lobe_bins = lobe_of(kind, beta)};
}
