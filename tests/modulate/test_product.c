/* The product modulator at baseband: lines, powers, leak, IQ errors and their correction. Figures: FACTS.md
 * group B, derived closed forms; records of whole periods, so tolerances are those of float samples. */
#include "line.h"
#include "mirrorband/modulate.h"

enum { COUNT = 4800 }; /* bins of 10 Hz at 48 kHz */

static float message[COUNT];
static mb_cf32 air[COUNT];

static void send_tones(const mb_product_settings *settings, const long *bins, size_t tones, double amplitude)
{
    double sum[COUNT] = {0.0};
    mb_product *product = NULL;

    for (size_t i = 0; i < tones; i++) {
        line_add(sum, COUNT, bins[i], amplitude);
    }
    for (size_t i = 0; i < COUNT; i++) {
        message[i] = (float)sum[i];
    }
    assert_ok(mb_product_create(settings, &product));
    mb_product_process(product, message, COUNT, air);
    assert_int_equal(mb_product_delay_samples(product), 0);
    mb_product_destroy(product);
}

static double mean_power(void)
{
    double sum = 0.0;

    for (size_t i = 0; i < COUNT; i++) {
        sum += (double)(air[i].re * air[i].re + air[i].im * air[i].im);
    }
    return sum / COUNT;
}

static double peak_power(void)
{
    double most = 0.0;

    for (size_t i = 0; i < COUNT; i++) {
        most = fmax(most, (double)(air[i].re * air[i].re + air[i].im * air[i].im));
    }
    return most;
}

/* Row "DSB-SC spectrum": a tone of amplitude A gives lines A/2 on both sides and nothing at the carrier. */
static void a_tone_gives_two_equal_lines_and_no_carrier(void **state)
{
    const mb_product_settings settings = mb_product_settings_default();
    const long bins[] = {100};

    (void)state;
    send_tones(&settings, bins, 1, 0.8);
    assert_near(line_magnitude(line_of_complex(air, COUNT, 100)), 0.4, 1e-8);
    assert_near(line_magnitude(line_of_complex(air, COUNT, -100)), 0.4, 1e-8);
    assert_at_most(line_magnitude(line_of_complex(air, COUNT, 0)), 1e-9);
}

/* Rows "Two equal tones" and trap 4: PEP over mean 3.0103, 6.0206, 7.7815, 9.0309 dB for 1 to 4 equal tones
 * (tones whose crests coincide at sample 0). */
static void peak_over_mean_is_3_dB_for_one_tone_and_6_dB_for_two(void **state)
{
    const mb_product_settings settings = mb_product_settings_default();
    const long bins[] = {70, 190, 110, 250};
    const double expected_db[] = {3.0103, 6.0206, 7.7815, 9.0309};

    (void)state;
    for (size_t tones = 1; tones <= 4; tones++) {
        send_tones(&settings, bins, tones, 1.0 / (double)tones);
        assert_near(mb_power_db(peak_power() / mean_power()), expected_db[tones - 1], 1e-4);
    }
    send_tones(&settings, bins, 2, 0.5);
    for (size_t i = 0; i < 2; i++) {
        assert_near(line_magnitude(line_of_complex(air, COUNT, bins[i])), 0.25, 1e-8);
        assert_near(line_magnitude(line_of_complex(air, COUNT, -bins[i])), 0.25, 1e-8);
    }
}

/* Row "Squared signal", two tones 0.5 + 0.5. At baseband s^2 of the row is (m^2)/2 moved to 2 fc, so the
 * lines of m^2 are twice those of the row: E[m^2] = 0.25 at 0, 0.125 at f2 -+ f1 and 0.0625 at 2 f1 (of m^2/2
 * to each). */
static void the_squared_message_has_its_highest_line_at_twice_the_carrier(void **state)
{
    const mb_product_settings settings = mb_product_settings_default();
    const long bins[] = {70, 190};
    mb_cf32 squared[COUNT];

    (void)state;
    send_tones(&settings, bins, 2, 0.5);
    for (size_t i = 0; i < COUNT; i++) {
        squared[i] = (mb_cf32){air[i].re * air[i].re - air[i].im * air[i].im, 2.0f * air[i].re * air[i].im};
    }
    assert_near(line_magnitude(line_of_complex(squared, COUNT, 0)), 2.0 * 0.125, 1e-8);
    assert_near(line_magnitude(line_of_complex(squared, COUNT, 120)), 2.0 * 0.0625, 1e-8);
    assert_near(line_magnitude(line_of_complex(squared, COUNT, -260)), 2.0 * 0.0625, 1e-8);
    assert_near(line_magnitude(line_of_complex(squared, COUNT, 140)), 2.0 * 0.03125, 1e-8);
    assert_near(line_magnitude(line_of_complex(squared, COUNT, -380)), 2.0 * 0.03125, 1e-8);
}

/* The leak is the stated power over that of both sidebands of the reference message, at the stated phase. */
static void a_leak_has_the_stated_power_and_phase(void **state)
{
    mb_product_settings settings = mb_product_settings_default();
    const long bins[] = {100};

    (void)state;
    settings.leak_dbc = -40.0;
    settings.leak_phase_rad = 0.7;
    send_tones(&settings, bins, 1, 1.0);
    line carrier = line_of_complex(air, COUNT, 0);
    double sidebands =
        line_power(line_of_complex(air, COUNT, 100)) + line_power(line_of_complex(air, COUNT, -100));
    assert_near(mb_power_db(line_power(carrier) / sidebands), -40.0, 1e-4);
    assert_near(atan2(carrier.im, carrier.re), 0.7, 1e-5);
    settings.message_power = 0.05; /* the same leak against a message 10 dB weaker is a weaker carrier */
    send_tones(&settings, bins, 1, 1.0);
    assert_near(mb_power_db(line_power(line_of_complex(air, COUNT, 0)) / sidebands), -50.0, 1e-4);
}

/* Rows "AM sideband share" and "AM PEP / mean": with a leak of 1/m the emission is AM of index m. */
static void a_great_leak_makes_amplitude_modulation(void **state)
{
    static const double index[] = {1.0, 0.8, 0.5, 0.3};
    static const double share[] = {1.0 / 3.0, 0.242424, 1.0 / 9.0, 0.0430622};
    static const double crest_db[] = {4.2597, 3.8997, 3.0103, 2.0877};
    mb_product_settings settings = mb_product_settings_default();
    const long bins[] = {100};

    (void)state;
    for (size_t i = 0; i < 4; i++) {
        settings.leak_dbc = mb_power_db(2.0 / (index[i] * index[i])); /* carrier 1, sidebands m^2/2 */
        send_tones(&settings, bins, 1, 1.0);
        double sidebands =
            line_power(line_of_complex(air, COUNT, 100)) + line_power(line_of_complex(air, COUNT, -100));
        assert_near(sidebands / mean_power(), share[i], 1e-6);
        assert_near(mb_power_db(peak_power() / mean_power()), crest_db[i], 1e-4);
    }
}

/* Row "IQ image rejection": one complex tone through the error, all 14 pairs of the row. */
static void the_image_of_a_complex_tone_follows_the_rejection_table(void **state)
{
    static const double rows[][3] = {
        {0.0, 0.1, 61.183}, {0.0, 1.0, 41.183}, {0.0, 2.0, 35.162},  {0.0, 5.0, 27.198}, {0.01, 0.0, 64.797},
        {0.1, 0.0, 44.797}, {0.1, 1.0, 39.614}, {0.25, 1.0, 35.479}, {0.5, 0.0, 30.820}, {0.5, 3.0, 28.200},
        {0.5, 5.0, 25.632}, {1.0, 0.0, 24.806}, {1.0, 5.0, 22.829},  {1.0, 10.0, 19.602}};

    (void)state;
    for (size_t row = 0; row < sizeof rows / sizeof rows[0]; row++) {
        mb_product_settings settings = mb_product_settings_default();
        mb_product *product = NULL;
        settings.iq_gain_db = rows[row][0];
        settings.iq_phase_deg = rows[row][1];
        assert_ok(mb_product_create(&settings, &product));
        for (size_t i = 0; i < COUNT; i++) {
            line turn = line_turn(-100, i, COUNT);
            air[i] = (mb_cf32){(float)turn.re, (float)turn.im};
        }
        mb_product_process_cf32(product, air, COUNT, air);
        mb_product_destroy(product);
        double rejection =
            line_power(line_of_complex(air, COUNT, 100)) / line_power(line_of_complex(air, COUNT, -100));
        assert_near(mb_power_db(rejection), rows[row][2], 2e-3);
    }
}

/* Row "Note": a real message at a fixed phase (0.7 rad) keeps equal sidebands through 0.5 dB, 3 degrees:
 * 0.526534 both for a tone of amplitude 1 (half of that would be 0.5). */
static void a_real_message_keeps_equal_sidebands_through_an_iq_error(void **state)
{
    mb_product_settings settings = mb_product_settings_default();
    mb_product *product = NULL;

    (void)state;
    settings.iq_gain_db = 0.5;
    settings.iq_phase_deg = 3.0;
    assert_ok(mb_product_create(&settings, &product));
    for (size_t i = 0; i < COUNT; i++) {
        double tone = line_turn(100, i, COUNT).re;
        air[i] = (mb_cf32){(float)(tone * cos(0.7)), (float)(tone * sin(0.7))};
    }
    mb_product_process_cf32(product, air, COUNT, air);
    mb_product_destroy(product);
    assert_near(line_magnitude(line_of_complex(air, COUNT, 100)), 0.526534, 1e-6);
    assert_near(line_magnitude(line_of_complex(air, COUNT, -100)), 0.526534, 1e-6);
}

/* Row "DC offset d": sideband Vm/2 against carrier d; Vm = 0.2, d = 0.001 gives 40 dB re one sideband. */
static void dc_is_a_carrier(void **state)
{
    mb_product_settings settings = mb_product_settings_default();
    const long bins[] = {100};

    (void)state;
    settings.dc_re = 0.001;
    send_tones(&settings, bins, 1, 0.2);
    double ratio =
        line_magnitude(line_of_complex(air, COUNT, 100)) / line_magnitude(line_of_complex(air, COUNT, 0));
    assert_near(decibel(ratio), 40.000, 1e-3);
}

/* An error and its correction together are the identity, to the rounding of two float stages. */
static void a_correction_undoes_its_error(void **state)
{
    mb_product_settings error = mb_product_settings_default(), correction = error;
    mb_product *first = NULL, *second = NULL;
    mb_random random;

    (void)state;
    print_message("seed 5\n");
    mb_random_seed(&random, 5, 0);
    error.iq_gain_db = 0.7;
    error.iq_phase_deg = -4.0;
    mb_iq_correction(error.iq_gain_db, error.iq_phase_deg, &correction.iq_gain_db, &correction.iq_phase_deg);
    assert_ok(mb_product_create(&error, &first));
    assert_ok(mb_product_create(&correction, &second));
    for (int i = 0; i < 100; i++) {
        mb_cf32 sample = {(float)mb_random_normal(&random), (float)mb_random_normal(&random)}, passed;
        mb_product_process_cf32(first, &sample, 1, &passed);
        mb_product_process_cf32(second, &passed, 1, &passed);
        assert_near(passed.re, sample.re, 1e-6);
        assert_near(passed.im, sample.im, 1e-6);
    }
    mb_product_destroy(first);
    mb_product_destroy(second);
}

/* Rows "Cubic PA" and "Two-tone audio": x + k x^3 on a tone, k = -0.02: lines at fm 0.5 (1 + 3k/4) at
 * baseband and at 3 fm 0.5 k/4. (The row's 9k/16 and 3k/32 are of a passband cubic: 3/4 of the baseband k.)
 */
static void a_cubic_message_has_lines_at_three_times_the_tone(void **state)
{
    mb_equivalent_modulator_settings settings = mb_equivalent_modulator_settings_default();
    mb_equivalent_modulator *modulator = NULL;
    const double passband = -0.02, baseband = 0.75 * passband;
    double linear = 1.0 + 0.75 * baseband;

    (void)state;
    settings.gain = linear; /* u + k u^3 = (1 + 3k/4) [u + third (u^3 - 3u/4)] */
    settings.equivalent.third_order = baseband / linear;
    assert_ok(mb_equivalent_modulator_create(&settings, &modulator));
    for (size_t i = 0; i < COUNT; i++) {
        message[i] = (float)line_turn(100, i, COUNT).re;
    }
    mb_equivalent_modulator_process(modulator, message, COUNT, air);
    double tone = line_magnitude(line_of_complex(air, COUNT, 100));
    double third = line_magnitude(line_of_complex(air, COUNT, -300));
    assert_near(tone, 0.494375, 1e-7);
    assert_near(third, 0.001875, 1e-7);
    assert_near(decibel(third / tone), -48.4211, 1e-3);
    for (size_t i = 0; i < COUNT; i++) {
        message[i] = (float)(0.5 * line_turn(70, i, COUNT).re + 0.5 * line_turn(190, i, COUNT).re);
    }
    mb_equivalent_modulator_process(modulator, message, COUNT, air);
    for (long side = -1; side <= 1; side += 2) { /* 2 f1 - f2 = -500 folds to 500 Hz, 2 f2 - f1 = 3100 Hz */
        double expected = 0.5 * fabs(baseband) * 0.75 * 0.125;
        assert_near(line_magnitude(line_of_complex(air, COUNT, side * 50)), expected, 1e-8);
        assert_near(line_magnitude(line_of_complex(air, COUNT, side * 310)), expected, 1e-8);
    }
    mb_equivalent_modulator_destroy(modulator);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_tone_gives_two_equal_lines_and_no_carrier),
        cmocka_unit_test(peak_over_mean_is_3_dB_for_one_tone_and_6_dB_for_two),
        cmocka_unit_test(the_squared_message_has_its_highest_line_at_twice_the_carrier),
        cmocka_unit_test(a_leak_has_the_stated_power_and_phase),
        cmocka_unit_test(a_great_leak_makes_amplitude_modulation),
        cmocka_unit_test(the_image_of_a_complex_tone_follows_the_rejection_table),
        cmocka_unit_test(a_real_message_keeps_equal_sidebands_through_an_iq_error),
        cmocka_unit_test(dc_is_a_carrier),
        cmocka_unit_test(a_correction_undoes_its_error),
        cmocka_unit_test(a_cubic_message_has_lines_at_three_times_the_tone),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
