/* The switching modulator: FACTS.md group B, rows "Switching (ring) modulator", "idem, each sideband re Vm"
 * and "Switch duty D". 400 samples a carrier period; the model averages over a sample, which lowers the n-th
 * harmonic by sinc(n/400): 1.0e-5 at n = 1, 5e-4 at n = 7. It is divided out; what is left is the straight
 * line between carrier samples (1e-5) and lines folded at the rate. */
#include "around_carrier.h"

enum { PERIODS = 40, PERIOD = 400, COUNT = PERIODS * PERIOD, CARRIER = PERIODS, MESSAGE = 3 };

static const double message_peak = 0.5, carrier_peak = 2.0;
static double message_v[COUNT], carrier_v[COUNT], out[COUNT];

/* The record is periodic: a first run over it leaves the state of its last sample. */
static void run(const mb_ring_modulator_settings *settings)
{
    mb_ring_modulator *model = NULL;

    assert_ok(mb_ring_modulator_create(settings, &model));
    mb_ring_modulator_process(model, message_v, carrier_v, COUNT, out);
    mb_ring_modulator_process(model, message_v, carrier_v, COUNT, out);
    mb_ring_modulator_destroy(model);
}

static void run_tone(const mb_ring_modulator_settings *settings)
{
    memset(message_v, 0, sizeof message_v);
    memset(carrier_v, 0, sizeof carrier_v);
    line_add(message_v, COUNT, MESSAGE, message_peak);
    line_add(carrier_v, COUNT, CARRIER, carrier_peak);
    run(settings);
}

/* Amplitude at harmonic n of the carrier + offset bins, the averaging over a sample divided out. */
static double at(long harmonic, long offset)
{
    double angle = MB_PI * (double)harmonic / PERIOD;
    double averaging = harmonic == 0 ? 1.0 : sin(angle) / angle;

    return line_magnitude(line_of_real(out, COUNT, harmonic * CARRIER + offset)) / averaging;
}

static void sidebands_stand_at_the_odd_harmonics_of_the_carrier(void **state)
{
    static const double re_message[][2] = {{1, 0.636620}, {3, 0.212207}, {5, 0.127324}, {7, 0.0909457}};
    const mb_ring_modulator_settings settings = mb_ring_modulator_settings_default();

    (void)state;
    run_tone(&settings);
    for (size_t i = 0; i < 4; i++) {
        long n = (long)re_message[i][0];
        assert_near(at(n, MESSAGE) / message_peak, re_message[i][1], 1e-4);
        assert_near(at(n, -MESSAGE) / message_peak, re_message[i][1], 1e-4);
        assert_near(at(n, MESSAGE) / message_peak, 2.0 / ((double)n * MB_PI), 1e-4);
    }
    for (long n = 0; n <= 8; n++) {
        assert_at_most(at(n, 0), 1e-9);
        if (n % 2 == 0) {
            assert_at_most(at(n, MESSAGE), 1e-5);
        }
    }
}

/* Row value: -3.9224 dB. */
static void the_conversion_loss_is_3_92_dB(void **state)
{
    const mb_ring_modulator_settings settings = mb_ring_modulator_settings_default();
    mb_equivalent equivalent = mb_ring_modulator_equivalent(&settings, message_peak, carrier_peak);

    (void)state;
    run_tone(&settings);
    assert_near(equivalent.conversion_loss_db, 3.9224, 5e-5);
    assert_near(-decibel(at(1, MESSAGE) / message_peak), 3.9224, 3e-4);
}

/* Rows of duty: message leak 2D - 1; n-th line (4/(n pi)) sin(n pi D); second harmonic re first -30.06,
 * -24.04, -16.11 dB. */
static void an_uneven_switch_lets_the_message_and_even_harmonics_through(void **state)
{
    static const double rows[][2] = {{0.51, -30.06}, {0.52, -24.04}, {0.55, -16.11}};

    (void)state;
    for (size_t i = 0; i < 3; i++) {
        mb_ring_modulator_settings settings = mb_ring_modulator_settings_default();
        double duty = rows[i][0];
        settings.bias_v = mb_ring_modulator_bias_v(duty, carrier_peak);
        run_tone(&settings);
        assert_near(at(0, MESSAGE) / message_peak, 2.0 * duty - 1.0, 2e-5);
        for (long n = 1; n <= 4; n++) {
            double expected = 2.0 / ((double)n * MB_PI) * fabs(sin((double)n * MB_PI * duty));
            assert_near(at(n, MESSAGE) / message_peak, expected, 1e-4);
        }
        assert_near(decibel(at(2, MESSAGE) / at(1, MESSAGE)), rows[i][1], 1e-2);
    }
}

/* Out of s(t) (o0 - o1)/2, the switch between +1 and -1, and of the unequal transformer. */
static void unequal_drops_and_windings_leave_a_carrier(void **state)
{
    mb_ring_modulator_settings settings = mb_ring_modulator_settings_default();

    (void)state;
    settings.path_offset_v[0] = 0.003;
    settings.path_offset_v[1] = -0.001;
    run_tone(&settings);
    assert_near(at(1, 0), 4.0 / MB_PI * 0.002, 1e-6);
    assert_near(at(0, 0), 0.001, 1e-6);
    settings.carrier_unbalance = 0.01;
    run_tone(&settings);
    assert_near(at(1, 0), 4.0 / MB_PI * 0.002 + 0.01 * carrier_peak, 1e-5);
}

/* With unequal paths the message is let through by half their difference. */
static void unequal_paths_let_the_message_through(void **state)
{
    mb_ring_modulator_settings settings = mb_ring_modulator_settings_default();

    (void)state;
    settings.path_gain[0] = 0.9;
    settings.path_gain[1] = 0.8;
    run_tone(&settings);
    assert_near(at(0, MESSAGE) / message_peak, 0.05, 1e-5);
    assert_near(at(1, MESSAGE) / message_peak, 2.0 / MB_PI * 0.85, 5e-5);
    mb_equivalent equivalent = mb_ring_modulator_equivalent(&settings, message_peak, carrier_peak);
    assert_near(equivalent.feedthrough, at(0, MESSAGE) / at(1, MESSAGE), 1e-4);
    assert_near(equivalent.sideband_gain, 2.0 * at(1, MESSAGE), 1e-4);
}

/* Everything unequal at once, two tones: the ring brought down from its carrier is its baseband equivalent.
 * What lies between is the averaging over a sample (1e-5) and sidebands of the folded harmonics. */
static void the_ring_around_its_carrier_is_its_baseband_equivalent(void **state)
{
    mb_ring_modulator_settings settings = {.path_gain = {0.95, 0.9},
                                           .path_offset_v = {0.004, -0.002},
                                           .bias_v = mb_ring_modulator_bias_v(0.53, 2.0),
                                           .carrier_unbalance = -0.005};
    mb_equivalent equivalent = mb_ring_modulator_equivalent(&settings, message_peak, carrier_peak);
    static float u[COUNT];

    (void)state;
    memset(message_v, 0, sizeof message_v);
    memset(carrier_v, 0, sizeof carrier_v);
    line_add(message_v, COUNT, 2, 0.5);
    line_add(message_v, COUNT, 5, 0.5);
    line_add(carrier_v, COUNT, CARRIER, carrier_peak);
    for (size_t i = 0; i < COUNT; i++) {
        u[i] = (float)message_v[i];
        message_v[i] *= message_peak;
    }
    run(&settings);
    assert_at_most(around_carrier_difference(out, COUNT, CARRIER, 15, 0.5, &equivalent, u), 1e-4);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(sidebands_stand_at_the_odd_harmonics_of_the_carrier),
        cmocka_unit_test(the_conversion_loss_is_3_92_dB),
        cmocka_unit_test(an_uneven_switch_lets_the_message_and_even_harmonics_through),
        cmocka_unit_test(unequal_drops_and_windings_leave_a_carrier),
        cmocka_unit_test(unequal_paths_let_the_message_through),
        cmocka_unit_test(the_ring_around_its_carrier_is_its_baseband_equivalent),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
