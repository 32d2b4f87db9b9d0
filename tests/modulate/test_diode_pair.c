/* Two exponential diodes against modified Bessel functions (scipy.special.iv) and against an outside
 * transform of the same currents (numpy.fft); both from tests/reference/modulate_reference.py. */
#include "around_carrier.h"
#include "modulate_reference.h"

enum { COUNT = 4800, CARRIER = 200, MESSAGE = 10 }; /* harmonics beyond the 23rd fold: below 1e-15 */

static double message_v[COUNT], carrier_v[COUNT], out[COUNT];

/* thermal voltage 25 mV, so that the drives of the reference are round figures */
static mb_diode_pair_settings matched(void)
{
    mb_diode_pair_settings settings = mb_diode_pair_settings_default();

    settings.thermal_voltage_v = 0.025;
    settings.diode[0].saturation_current_a = settings.diode[1].saturation_current_a = 1e-6;
    return settings;
}

static mb_diode_pair_settings mismatched(void)
{
    mb_diode_pair_settings settings = matched();

    settings.diode[1].saturation_current_a = 1.05e-6;
    settings.diode[1].ideality = 1.01;
    settings.carrier_unbalance = 0.01;
    settings.message_unbalance = -0.02;
    return settings;
}

static void run(const mb_diode_pair_settings *settings)
{
    mb_diode_pair *model = NULL;

    assert_ok(mb_diode_pair_create(settings, &model));
    mb_diode_pair_process(model, message_v, carrier_v, COUNT, out);
    mb_diode_pair_destroy(model);
}

static void run_tone(const mb_diode_pair_settings *settings, double message_peak, double carrier_peak)
{
    memset(message_v, 0, sizeof message_v);
    memset(carrier_v, 0, sizeof carrier_v);
    line_add(message_v, COUNT, MESSAGE, message_peak);
    line_add(carrier_v, COUNT, CARRIER, carrier_peak);
    run(settings);
}

static double at(long bin)
{
    return line_magnitude(line_of_real(out, COUNT, bin));
}

static void the_bessel_function_agrees_with_scipy(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof reference_bessel / sizeof reference_bessel[0]; i++) {
        double expected = reference_bessel[i][2];
        double value = mb_bessel_i((unsigned)reference_bessel[i][0], reference_bessel[i][1]);
        assert_near(value, expected, 1e-13 * fabs(expected));
    }
    assert_true(mb_bessel_i(0, 0.0) == 1.0 && mb_bessel_i(3, 0.0) == 0.0);
    assert_true(mb_bessel_i(1, -2.0) == -mb_bessel_i(1, 2.0)); /* odd orders are odd */
    assert_true(isnan(mb_bessel_i(1, NAN)));
}

/* Matched: 4 Is I1(zc) I_k(zm) at fc +- k fm for odd k, nothing at the carrier (2 sinh in a Bessel series).
 */
static void a_matched_pair_gives_odd_products_by_the_bessel_series(void **state)
{
    const mb_diode_pair_settings settings = matched();
    const double zc = 4.0, zm = 2.0;

    (void)state;
    run_tone(&settings, zm * 0.025, zc * 0.025);
    double unit = 4.0 * 1e-6 * mb_bessel_i(1, zc);
    for (long k = 0; k <= 5; k++) {
        double expected = k % 2 == 1 ? unit * mb_bessel_i((unsigned)k, zm) : 0.0;
        assert_near(at(CARRIER + k * MESSAGE), expected, 1e-12 * unit);
        assert_near(at(CARRIER - k * MESSAGE), expected, 1e-12 * unit);
    }
    double unit_2 = 4.0 * 1e-6 * mb_bessel_i(2, zc); /* the same around twice the carrier */
    assert_near(at(2L * CARRIER + MESSAGE), unit_2 * mb_bessel_i(1, zm), 1e-12 * unit);
    assert_near(at(MESSAGE), 4.0 * 1e-6 * mb_bessel_i(0, zc) * mb_bessel_i(1, zm), 1e-12 * unit);
}

static void a_mismatched_pair_agrees_with_an_outside_transform(void **state)
{
    const mb_diode_pair_settings settings = mismatched();

    (void)state;
    run_tone(&settings, 0.025, 0.1);
    double unit = at(CARRIER + MESSAGE);
    for (size_t i = 0; i < sizeof reference_diodes / sizeof reference_diodes[0]; i++) {
        assert_near(at((long)reference_diodes[i][0]), reference_diodes[i][1], 1e-11 * unit);
    }
}

/* For a full-scale tone every figure of the equivalent is a line of the model, exactly. */
static void the_equivalent_tells_the_lines_of_a_full_scale_tone(void **state)
{
    const mb_diode_pair_settings settings = mismatched();
    mb_equivalent equivalent = mb_diode_pair_equivalent(&settings, 0.025, 0.1);

    (void)state;
    run_tone(&settings, 0.025, 0.1);
    double one_sideband = at(CARRIER + MESSAGE);
    assert_near(equivalent.sideband_gain, 2.0 * one_sideband, 1e-11 * one_sideband);
    assert_near(fabs(equivalent.leak_re), at(CARRIER) / equivalent.sideband_gain, 1e-11);
    double sidebands = 2.0 * one_sideband * one_sideband;
    assert_near(equivalent.leak_dbc, mb_power_db(at(CARRIER) * at(CARRIER) / sidebands), 1e-8);
    assert_near(fabs(equivalent.second_order) / 2.0, at(CARRIER + 2 * MESSAGE) / one_sideband, 1e-10);
    assert_near(fabs(equivalent.third_order) / 4.0, at(CARRIER + 3 * MESSAGE) / one_sideband, 1e-10);
    assert_near(equivalent.feedthrough, at(MESSAGE) / one_sideband, 1e-10);
}

/* Unlike diodes: 2 Is1 I1 - 2 Is2 I1 is the carrier for a small message, so 5 % of Is alone is 20
 * log(0.05/2.05) of leak re the mean slope: with zm small, leak = (Is1 - Is2)/((Is1 + Is2) zm). */
static void unlike_saturation_currents_leave_the_carrier_of_the_closed_form(void **state)
{
    mb_diode_pair_settings settings = matched();
    const double zm = 1e-3;

    (void)state;
    settings.diode[1].saturation_current_a = 0.95e-6;
    mb_equivalent equivalent = mb_diode_pair_equivalent(&settings, zm * 0.025, 0.1);
    assert_near(equivalent.leak_re * zm, 0.05 / 1.95, 1e-7);
}

/* Two tones. What the equivalent leaves out is the fifth order, I5(zm)/I1(zm) = 4.8e-4 at zm = 1 for a sine,
 * and the fourth of unequal diodes; where the sine's fit is off for two tones it is of the same kind. It
 * falls with zm^4. */
static void the_pair_around_its_carrier_is_its_baseband_equivalent(void **state)
{
    static const double rows[][2] = {{1.0, 2e-3}, {0.3, 2e-5}};
    const mb_diode_pair_settings settings = mismatched();
    float u[COUNT];

    (void)state;
    for (size_t row = 0; row < 2; row++) {
        double peak_v = rows[row][0] * 0.025;
        mb_equivalent equivalent = mb_diode_pair_equivalent(&settings, peak_v, 0.1);
        memset(message_v, 0, sizeof message_v);
        memset(carrier_v, 0, sizeof carrier_v);
        line_add(message_v, COUNT, 7, 0.5);
        line_add(message_v, COUNT, 19, 0.5);
        line_add(carrier_v, COUNT, CARRIER, 0.1);
        for (size_t i = 0; i < COUNT; i++) {
            u[i] = (float)message_v[i];
            message_v[i] *= peak_v;
        }
        run(&settings);
        assert_at_most(around_carrier_difference(out, COUNT, CARRIER, 95, 0.0, &equivalent, u), rows[row][1]);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_bessel_function_agrees_with_scipy),
        cmocka_unit_test(a_matched_pair_gives_odd_products_by_the_bessel_series),
        cmocka_unit_test(a_mismatched_pair_agrees_with_an_outside_transform),
        cmocka_unit_test(the_equivalent_tells_the_lines_of_a_full_scale_tone),
        cmocka_unit_test(unlike_saturation_currents_leave_the_carrier_of_the_closed_form),
        cmocka_unit_test(the_pair_around_its_carrier_is_its_baseband_equivalent),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
