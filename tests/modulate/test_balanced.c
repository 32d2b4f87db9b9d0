/* Two square-law devices: the lines of FACTS.md group B, rows "Balanced square-law pair" to "DC offset d",
 * run at a carrier of 12 kHz, message 1 kHz, rate 96 kHz, bins of 100 Hz. Double samples: tolerances are
 * rounding. */
#include "around_carrier.h"
#include "modulate_reference.h"

enum { COUNT = 960, CARRIER = 120, MESSAGE = 10 };

static double message_v[COUNT], carrier_v[COUNT], out[COUNT];

static mb_balanced_settings pair(double b1, double b2, double c1, double c2)
{
    mb_balanced_settings settings = mb_balanced_settings_default();

    settings.device[0].b = b1;
    settings.device[1].b = b2;
    settings.device[0].c = c1;
    settings.device[1].c = c2;
    return settings;
}

static void run(const mb_balanced_settings *settings)
{
    mb_balanced *model = NULL;

    assert_ok(mb_balanced_create(settings, &model));
    mb_balanced_process(model, message_v, carrier_v, COUNT, out);
    mb_balanced_destroy(model);
}

static void run_tone(const mb_balanced_settings *settings, double message_peak, double carrier_peak)
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

/* Row "idem matched": 2 b vm + 4 c vc vm, nothing else. */
static void a_matched_pair_leaves_the_message_and_the_product_alone(void **state)
{
    const mb_balanced_settings settings = pair(0.9, 0.9, 0.3, 0.3);

    (void)state;
    run_tone(&settings, 0.2, 1.5);
    assert_near(at(MESSAGE), 2.0 * 0.9 * 0.2, 1e-13);
    assert_near(at(CARRIER + MESSAGE), 2.0 * 0.3 * 1.5 * 0.2, 1e-13);
    assert_near(at(CARRIER - MESSAGE), 2.0 * 0.3 * 1.5 * 0.2, 1e-13);
    for (long bin = 0; bin < COUNT / 2; bin += MESSAGE) {
        if (bin != MESSAGE && labs(bin - CARRIER) != MESSAGE) {
            assert_at_most(at(bin), 1e-13);
        }
    }
}

/* Row "Worked: Vc = 1, Vm = 0.2, c = 0.5": 20.000 and 46.021 dB re one sideband for b = 1/0.98 and 1/0.999.
 */
static void unequal_slopes_leave_a_carrier(void **state)
{
    const mb_balanced_settings loose = pair(1.0, 0.98, 0.5, 0.5), close = pair(1.0, 0.999, 0.5, 0.5);

    (void)state;
    run_tone(&loose, 0.2, 1.0);
    assert_near(decibel(at(CARRIER + MESSAGE) / at(CARRIER)), 20.000, 5e-4);
    run_tone(&close, 0.2, 1.0);
    assert_near(decibel(at(CARRIER + MESSAGE) / at(CARRIER)), 46.021, 5e-4);
}

/* The same row's last case, every line of it, and the row "Line amplitudes" with a1 - a2 as well. */
static void every_line_of_the_worked_case_is_there(void **state)
{
    mb_balanced_settings settings = pair(1.0, 0.98, 0.50, 0.48);

    (void)state;
    run_tone(&settings, 0.2, 1.0);
    assert_near(decibel(at(CARRIER - MESSAGE) / at(CARRIER)), 19.825, 5e-4);
    assert_near(at(MESSAGE), 0.396, 1e-12);
    assert_near(at(2L * MESSAGE), 0.0004, 1e-12);
    assert_near(at(2L * CARRIER), 0.0100, 1e-12);
    assert_near(at(0), 0.0104, 1e-12);
    assert_near(at(CARRIER + MESSAGE), 0.196, 1e-12);
    settings.device[0].a = 0.07;
    settings.device[1].a = 0.02;
    run_tone(&settings, 0.2, 1.0);
    assert_near(at(0), 0.05 + 0.0104, 1e-12);
}

/* Trap of FACTS.md group 0: a mismatch of c alone leaves no carrier. */
static void unequal_curvature_leaves_no_carrier(void **state)
{
    const mb_balanced_settings settings = pair(1.0, 1.0, 0.6, 0.4);

    (void)state;
    run_tone(&settings, 0.2, 1.0);
    assert_at_most(at(CARRIER), 1e-13);
    assert_near(at(CARRIER + MESSAGE), 0.2, 1e-12);
}

/* Row "DC offset d in message": Vm = 0.2, d = 0.001: 40.000 dB re one sideband, 46.021 dB re PEP amplitude.
 */
static void an_offset_of_the_message_is_a_carrier(void **state)
{
    mb_balanced_settings settings = mb_balanced_settings_default();

    (void)state;
    settings.message_offset_v = 0.001;
    run_tone(&settings, 0.2, 1.0);
    assert_near(decibel(at(CARRIER + MESSAGE) / at(CARRIER)), 40.000, 5e-4);
    assert_near(decibel(2.0 * at(CARRIER + MESSAGE) / at(CARRIER)), 46.021, 5e-4);
}

/* Lines of a thoroughly unequal pair against numpy.fft (tests/reference/modulate_reference.py). */
static void the_lines_agree_with_an_outside_transform(void **state)
{
    mb_balanced_settings settings = pair(1.03, 0.97, 0.52, 0.47);

    (void)state;
    settings.device[0].a = 0.011;
    settings.message_offset_v = 0.004;
    run_tone(&settings, 0.3, 1.2);
    for (size_t i = 0; i < sizeof reference_balanced / sizeof reference_balanced[0]; i++) {
        assert_near(at((long)reference_balanced[i][0]), reference_balanced[i][1], 1e-11);
    }
}

/* Row "Carrier suppression": re total sideband power it is 3.01 dB more than re one sideband. */
static void the_equivalent_tells_leak_gain_and_loss_of_the_pair(void **state)
{
    const mb_balanced_settings settings = pair(1.0, 0.98, 0.50, 0.48);
    mb_equivalent equivalent = mb_balanced_equivalent(&settings, 0.2, 1.0);

    (void)state;
    run_tone(&settings, 0.2, 1.0);
    assert_near(equivalent.sideband_gain, 2.0 * at(CARRIER + MESSAGE), 1e-12);
    assert_near(equivalent.leak_dbc, -(19.825 + 3.0103), 5e-4);
    assert_near(equivalent.feedthrough, at(MESSAGE) / at(CARRIER + MESSAGE), 1e-12);
    assert_near(equivalent.conversion_loss_db, -decibel(at(CARRIER + MESSAGE) / 0.2), 1e-9);
    assert_true(equivalent.second_order == 0.0 && equivalent.third_order == 0.0);
}

/* Two tones of half scale each, offset and mismatch: the pair brought down from its carrier is the baseband
 * equivalent, line by line; the bound is the rounding of float baseband samples. */
static void the_pair_around_its_carrier_is_its_baseband_equivalent(void **state)
{
    mb_balanced_settings settings = pair(1.03, 0.97, 0.52, 0.47);
    mb_equivalent equivalent;
    float u[COUNT];

    (void)state;
    settings.message_offset_v = 0.004;
    equivalent = mb_balanced_equivalent(&settings, 0.3, 1.2);
    memset(message_v, 0, sizeof message_v);
    memset(carrier_v, 0, sizeof carrier_v);
    line_add(message_v, COUNT, 7, 0.5);
    line_add(message_v, COUNT, 19, 0.5);
    line_add(carrier_v, COUNT, CARRIER, 1.2);
    for (size_t i = 0; i < COUNT; i++) {
        u[i] = (float)message_v[i];
        message_v[i] *= 0.3;
    }
    run(&settings);
    assert_at_most(around_carrier_difference(out, COUNT, CARRIER, 60, 0.0, &equivalent, u), 1e-7);
}

/* Row "Handbook range": about 20-30 dB untrimmed, 40-60 dB trimmed. Parts of 5 and 2 % stand for the first,
 * of 0.5 and 0.1 % for the second, at a message half as great as the carrier. */
static void parts_as_found_and_trimmed_suppress_as_handbooks_say(void **state)
{
    static const double rows[][3] = {
        {0.05, 20.0, 30.0}, {0.03, 20.0, 30.0}, {0.005, 40.0, 60.0}, {0.001, 40.0, 60.0}};

    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        const mb_balanced_settings settings = pair(1.0, 1.0 - rows[i][0], 0.5, 0.5);
        double suppression_db = -mb_balanced_equivalent(&settings, 0.5, 1.0).leak_dbc;
        assert_at_least(suppression_db, rows[i][1]);
        assert_at_most(suppression_db, rows[i][2]);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_matched_pair_leaves_the_message_and_the_product_alone),
        cmocka_unit_test(unequal_slopes_leave_a_carrier),
        cmocka_unit_test(every_line_of_the_worked_case_is_there),
        cmocka_unit_test(unequal_curvature_leaves_no_carrier),
        cmocka_unit_test(an_offset_of_the_message_is_a_carrier),
        cmocka_unit_test(the_lines_agree_with_an_outside_transform),
        cmocka_unit_test(the_equivalent_tells_leak_gain_and_loss_of_the_pair),
        cmocka_unit_test(the_pair_around_its_carrier_is_its_baseband_equivalent),
        cmocka_unit_test(parts_as_found_and_trimmed_suppress_as_handbooks_say),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
