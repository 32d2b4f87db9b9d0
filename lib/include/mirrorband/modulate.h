/**
 * modulate.h - the modulator: an ideal product with leak and IQ errors at baseband, and models of real
 * modulators run at a real carrier frequency, with what each amounts to at baseband.
 *
 * At baseband the emission is m(t) + leak: the message m is real and both sidebands together have the power
 * mean(m^2), the carrier has |leak|^2. Derivations and sources: docs/method-modulation.md.
 */
#ifndef MIRRORBAND_MODULATE_H
#define MIRRORBAND_MODULATE_H

#include "mirrorband/core.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- product modulator at baseband --------------------------------------------------------------------- */

/** Product modulator: (message + leak), through the IQ error, plus DC. */
typedef struct mb_product mb_product;

/** Settings of mb_product; errors and corrections of errors alike. Ranges in brackets. */
typedef struct mb_product_settings {
    double leak_dbc;       /* carrier power over the power of both sidebands [-200, 40], or -INFINITY: none */
    double message_power;  /* mean square of the message that leak_dbc refers to [1e-12, 1]; default 0.5, that
                              of a full-scale sine. The leak is a fixed amplitude, whatever is then sent:
                              |leak|^2 = message_power * 10^(leak_dbc/10) */
    double leak_phase_rad; /* phase of the leak against the suppressed carrier [-2 pi, 2 pi] */
    double iq_gain_db;     /* gain of the quadrature rail over the in-phase rail [-20, 20] */
    double iq_phase_deg;   /* how far the rails are from 90 degrees apart [-80, 80] */
    double dc_re, dc_im;   /* added last, of full scale [-1, 1] */
} mb_product_settings;

/** Counters of mb_product. */
typedef struct mb_product_counts {
    uint64_t non_finite; /* message samples that were NaN or infinite, taken as zero */
} mb_product_counts;

/** The ideal product: no leak, no error. Thread: any. */
MB_API mb_product_settings mb_product_settings_default(void);

/** Makes the stage; the caller destroys it. Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_product_create(const mb_product_settings *settings, mb_product **out);

/**
 * count real message samples (full scale 1) to count baseband samples, no delay:
 * x = message + leak; re = Re x, im = g (Im x cos p + Re x sin p), with g, p from iq_gain_db, iq_phase_deg;
 * plus dc. Thread: stream.
 */
MB_API void mb_product_process(mb_product *product, const float *message, size_t count, mb_cf32 *out);

/** The same errors for samples that are complex already (in-place allowed). Thread: stream. */
MB_API void mb_product_process_cf32(mb_product *product, const mb_cf32 *in, size_t count, mb_cf32 *out);

/** Delay of the output: 0. Thread: any. */
MB_API size_t mb_product_delay_samples(const mb_product *product);

/** Counters since the start or the last reset. Thread: stream. */
MB_API mb_product_counts mb_product_state(const mb_product *product);

/** Counters to zero. Thread: stream. */
MB_API void mb_product_reset(mb_product *product);

/** Accepts NULL. Thread: control. */
MB_API void mb_product_destroy(mb_product *product);

/**
 * The IQ settings that undo given ones: a stage with *correction_gain_db, *correction_phase_deg before or
 * after one with gain_db, phase_deg passes samples unchanged (the error is a 2 x 2 matrix; this is its
 * inverse, which has the same form). Thread: any.
 */
MB_API void mb_iq_correction(double gain_db, double phase_deg, double *correction_gain_db,
                             double *correction_phase_deg);

/* ---- what a modulator amounts to at baseband ----------------------------------------------------------- */

/**
 * A modulator seen around its carrier, for a full-scale sine u (|u| <= 1) as message. The output near the
 * carrier is sideband_gain * [u + second_order (u^2 - 1/2) + third_order (u^3 - 3u/4) + leak] cos(carrier):
 * the polynomials are those for which a sine's fundamental has gain 1 and its mean is all in the leak.
 * Hence a full-scale tone at fm gives lines of second_order/2 at 2 fm and third_order/4 at 3 fm, relative to
 * its own. All figures are of memoryless models, whose leak is in phase with the carrier.
 */
typedef struct mb_equivalent {
    double sideband_gain;      /* carrier-frequency amplitude for u = 1, in units of the model's output */
    double leak_re, leak_im;   /* residual carrier, relative to full-scale message amplitude */
    double leak_dbc;           /* residual carrier over the power of both sidebands of a full-scale sine */
    double feedthrough;        /* amplitude of the full-scale sine itself, at audio frequency in the output,
                                  relative to one sideband */
    double second_order;       /* coefficient of u^2 - 1/2 */
    double third_order;        /* coefficient of u^3 - 3u/4 */
    double conversion_loss_db; /* message amplitude in over amplitude of one sideband out */
} mb_equivalent;

/** Baseband stage that applies an mb_equivalent to a message. */
typedef struct mb_equivalent_modulator mb_equivalent_modulator;

typedef struct mb_equivalent_modulator_settings {
    mb_equivalent equivalent; /* from one of the models below; leak and orders at most 10 in magnitude */
    double gain;              /* sideband amplitude at baseband for a full-scale message [1e-6, 10] */
} mb_equivalent_modulator_settings;

/** No leak, no distortion, gain 1. Thread: any. */
MB_API mb_equivalent_modulator_settings mb_equivalent_modulator_settings_default(void);

/** Makes the stage; the caller destroys it. Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_equivalent_modulator_create(const mb_equivalent_modulator_settings *settings,
                                                mb_equivalent_modulator **out);

/**
 * count message samples u (full scale 1) to count baseband samples
 * gain [u + second_order (u^2 - 1/2) + third_order (u^3 - 3u/4) + leak], no delay. Thread: stream.
 */
MB_API void mb_equivalent_modulator_process(mb_equivalent_modulator *modulator, const float *message,
                                            size_t count, mb_cf32 *out);

/** Delay of the output: 0. Thread: any. */
MB_API size_t mb_equivalent_modulator_delay_samples(const mb_equivalent_modulator *modulator);

/** Counters since the start or the last reset. Thread: stream. */
MB_API mb_product_counts mb_equivalent_modulator_state(const mb_equivalent_modulator *modulator);

/** Counters to zero. Thread: stream. */
MB_API void mb_equivalent_modulator_reset(mb_equivalent_modulator *modulator);

/** Accepts NULL. Thread: control. */
MB_API void mb_equivalent_modulator_destroy(mb_equivalent_modulator *modulator);

/* ---- balanced modulator of two square-law devices ------------------------------------------------------ */

/** One device: current i = a + b v + c v^2. */
typedef struct mb_square_law {
    double a; /* A [-1e3, 1e3] */
    double b; /* A/V [-1e3, 1e3] */
    double c; /* A/V^2 [-1e3, 1e3]; the two together must be positive */
} mb_square_law;

/** Balanced modulator: v1 = carrier + message, v2 = carrier - message, out = i1 - i2. */
typedef struct mb_balanced mb_balanced;

typedef struct mb_balanced_settings {
    mb_square_law device[2];
    double message_offset_v; /* DC at the message port, V [-10, 10] */
} mb_balanced_settings;

/** Two equal devices, a = 0, b = 1 A/V, c = 0.5 A/V^2. Thread: any. */
MB_API mb_balanced_settings mb_balanced_settings_default(void);

/** Makes the model; the caller destroys it. Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_balanced_create(const mb_balanced_settings *settings, mb_balanced **out);

/** count samples of message and carrier in volts to count samples of current difference in amperes, no delay.
 * Non-finite inputs count as 0 V. Thread: stream. */
MB_API void mb_balanced_process(mb_balanced *model, const double *message_v, const double *carrier_v,
                                size_t count, double *out);

/** Accepts NULL. Thread: control. */
MB_API void mb_balanced_destroy(mb_balanced *model);

/**
 * With carrier_peak_v cos(wc t) and |message| <= message_peak_v, exact: sideband_gain 2 (c1 + c2) Vc Vm,
 * carrier (b1 - b2) Vc + 2 (c1 + c2) Vc * offset, message feed-through (b1 + b2) Vm + 2 (c1 - c2) Vm *
 * offset. Peaks are positive. Thread: any.
 */
MB_API mb_equivalent mb_balanced_equivalent(const mb_balanced_settings *settings, double message_peak_v,
                                            double carrier_peak_v);

/* ---- balanced modulator of two exponential diodes ------------------------------------------------------ */

/** One diode: current i = Is (exp(v / (n Vt)) - 1). */
typedef struct mb_diode {
    double saturation_current_a; /* Is [1e-18, 1e-3] */
    double ideality;             /* n [0.5, 3] */
} mb_diode;

/**
 * Two diodes driven through transformers with voltages known at their terminals (no series resistance, load
 * small): v1 = (1 + carrier_unbalance) carrier + (1 + message_unbalance) message,
 * v2 = (1 - carrier_unbalance) carrier - (1 - message_unbalance) message, out = i1 - i2.
 */
typedef struct mb_diode_pair mb_diode_pair;

typedef struct mb_diode_pair_settings {
    mb_diode diode[2];
    double thermal_voltage_v; /* Vt = kT/q [0.01, 0.1]; default 0.02585 (300 K) */
    double carrier_unbalance; /* relative, of the two halves of the carrier winding [-0.5, 0.5] */
    double message_unbalance; /* idem, message winding [-0.5, 0.5] */
} mb_diode_pair_settings;

/** Two equal diodes, Is = 1e-9 A, n = 1, balanced. Thread: any. */
MB_API mb_diode_pair_settings mb_diode_pair_settings_default(void);

/** Makes the model; the caller destroys it. Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_diode_pair_create(const mb_diode_pair_settings *settings, mb_diode_pair **out);

/** count samples of message and carrier in volts to count samples of current difference in amperes, no delay.
 * Non-finite inputs count as 0 V; the exponent v/(n Vt) is held below 80. Thread: stream. */
MB_API void mb_diode_pair_process(mb_diode_pair *model, const double *message_v, const double *carrier_v,
                                  size_t count, double *out);

/** Accepts NULL. Thread: control. */
MB_API void mb_diode_pair_destroy(mb_diode_pair *model);

/**
 * From modified Bessel functions: device k gives Is_k exp(zc cos wc t) exp(+-zm u), and
 * exp(z cos x) = I0(z) + 2 sum In(z) cos(n x). Orders above the third are left out: of a
 * full-scale sine the fifth harmonic I5(zm)/I1(zm), -66 dBc at zm = message_peak_v/(n Vt) = 1, and of unequal
 * diodes the fourth. Peaks are positive; zc and zm up to 40. Thread: any.
 */
MB_API mb_equivalent mb_diode_pair_equivalent(const mb_diode_pair_settings *settings, double message_peak_v,
                                              double carrier_peak_v);

/** Modified Bessel function of the first kind I_order(x), order >= 0, |x| <= 100, by its power series;
 * relative error below 1e-13. Thread: any. */
MB_API double mb_bessel_i(unsigned order, double x);

/* ---- ring modulator ------------------------------------------------------------------------------------ */

/**
 * Switching modulator: the carrier opens path 0 (message as it is) while it is above -bias_v and path 1
 * (message reversed) while below.
 */
typedef struct mb_ring_modulator mb_ring_modulator;

typedef struct mb_ring_modulator_settings {
    double path_gain[2];      /* what each path lets through, 1 = lossless [0, 1]; not both 0 */
    double path_offset_v[2];  /* what unequal diode drops leave at the output while a path conducts [-1, 1] */
    double bias_v;            /* bias on the carrier port, which sets the duty [-100, 100] */
    double carrier_unbalance; /* share of the carrier voltage that an unequal transformer lets through
                                 [-0.5, 0.5] */
} mb_ring_modulator_settings;

/** Lossless, balanced, duty 1/2. Thread: any. */
MB_API mb_ring_modulator_settings mb_ring_modulator_settings_default(void);

/** Bias that makes path 0 conduct for the share `duty` (0..1) of a carrier of the given peak: the carrier is
 * above -bias for acos(-bias/peak)/pi of its period, hence bias = -peak cos(pi duty). Thread: any. */
MB_API double mb_ring_modulator_bias_v(double duty, double carrier_peak_v);

/** Makes the model; the caller destroys it. Errors: ARGUMENT with the field, MEMORY. Thread: control. */
MB_API mb_status mb_ring_modulator_create(const mb_ring_modulator_settings *settings,
                                          mb_ring_modulator **out);

/**
 * count samples of message and carrier in volts to count samples in volts, delayed by half a sample: each
 * output is what the switch passes on average between this sample and the one before, with the instant of
 * switching taken from the straight line between the two. So the duty is not bound to whole samples; the n-th
 * carrier harmonic is low by the factor sinc(n fc/rate). Non-finite inputs count as 0 V. Thread: stream.
 */
MB_API void mb_ring_modulator_process(mb_ring_modulator *model, const double *message_v,
                                      const double *carrier_v, size_t count, double *out);

/** Forgets the sample before. Thread: stream. */
MB_API void mb_ring_modulator_reset(mb_ring_modulator *model);

/** Accepts NULL. Thread: control. */
MB_API void mb_ring_modulator_destroy(mb_ring_modulator *model);

/**
 * Duty D from bias_v and carrier_peak_v; with mean path gain g: sideband_gain (4/pi) g sin(pi D) Vm, carrier
 * (4/pi) sin(pi D) (offset0 - offset1)/2 + carrier_unbalance Vc, feed-through the mean of the switch. No
 * distortion in the message. Peaks are positive, carrier_peak_v above |bias_v|. Thread: any.
 */
MB_API mb_equivalent mb_ring_modulator_equivalent(const mb_ring_modulator_settings *settings,
                                                  double message_peak_v, double carrier_peak_v);

#ifdef __cplusplus
}
#endif

#endif
