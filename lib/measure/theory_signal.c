/* Closed forms of the signal itself: detection losses, image rejection, quantisation, power ratios,
 * bandwidth. */
#include "mirrorband/measure.h"

#include <math.h>
#include <stdio.h>

double mb_theory_phase_error_db(double phase_error_rad)
{
    double arm = cos(phase_error_rad);

    return mb_power_db(arm * arm);
}

double mb_theory_quadrature_db(double phase_error_rad)
{
    double ratio = tan(phase_error_rad);

    return mb_power_db(ratio * ratio);
}

double mb_theory_phase_jitter_db(double rms_rad)
{
    double square = rms_rad * rms_rad;

    return mb_power_db(square * square / 2.0);
}

double mb_theory_image_rejection_db(double gain_db, double phase_deg)
{
    double gain = pow(10.0, gain_db / 20.0), phase = phase_deg * MB_PI / 180.0;
    double half_sine = sin(phase / 2.0), off = gain - 1.0;
    /* 1 - 2 g cos p + g^2 written so that small errors do not cancel */
    double image = off * off + 4.0 * gain * half_sine * half_sine;
    double wanted = 1.0 + 2.0 * gain * cos(phase) + gain * gain;

    return image > 0.0 ? 10.0 * log10(wanted / image) : INFINITY;
}

double mb_theory_quantiser_db(int bits)
{
    return 20.0 * bits * log10(2.0) + 10.0 * log10(1.5);
}

double mb_theory_am_pep_db(double index)
{
    return mb_power_db((1.0 + index) * (1.0 + index) / (1.0 + index * index / 2.0));
}

double mb_theory_dsb_pep_db(int tones)
{
    return mb_power_db(2.0 * tones);
}

double mb_theory_necessary_hz(double highest_hz)
{
    return 2.0 * highest_hz;
}

/* Three significant digits, halves rounded up; 1e-9 takes up the error of the division. */
static double three_digits(double scaled, int *decimals)
{
    *decimals = scaled < 10.0 ? 2 : (scaled < 100.0 ? 1 : 0);
    double grid = pow(10.0, *decimals);
    return floor(scaled * grid * (1.0 + 1e-12) + 0.5) / grid;
}

static void below_one_hz(double bandwidth_hz, char out[5])
{
    unsigned thousandths = (unsigned)floor(bandwidth_hz * 1000.0 + 0.5);

    (void)snprintf(out, 5, "H%03u", thousandths > 999 ? 999 : thousandths);
}

mb_status mb_theory_bandwidth_text(double bandwidth_hz, char out[5])
{
    static const char letters[] = "HKMG";
    mb_status status = mb_check_range("bandwidth_hz", bandwidth_hz, 0.001, 999e9, "Hz");
    double scaled = bandwidth_hz;
    char digits[16];
    int decimals = 0, unit = 0;

    if (status != MB_OK) {
        return status;
    }
    if (bandwidth_hz < 0.9995) {
        below_one_hz(bandwidth_hz, out);
        return MB_OK;
    }
    while (scaled >= 999.5 && letters[unit + 1] != '\0') {
        scaled /= 1000.0;
        unit++;
    }
    scaled = three_digits(scaled, &decimals);
    (void)three_digits(scaled, &decimals); /* 9.996 became 10.0: one decimal less */
    (void)snprintf(digits, sizeof digits, "%.*f", decimals, scaled);
    for (int i = 0; i < 4; i++) {
        out[i] = digits[i] == '.' || digits[i] == '\0' ? letters[unit] : digits[i];
    }
    out[4] = '\0';
    return MB_OK;
}

mb_status mb_theory_designator(double highest_hz, char out[8])
{
    char width[5];
    mb_status status = mb_check_range("highest_hz", highest_hz, 1.0, 1e9, "Hz");

    if (status == MB_OK) {
        status = mb_theory_bandwidth_text(mb_theory_necessary_hz(highest_hz), width);
    }
    if (status == MB_OK) {
        (void)snprintf(out, 8, "%sA3E", width);
    }
    return status;
}
