/* The closed forms give the values of the fact sheet. Each check names the row it comes from (FACTS.md,
 * letter of the group) and the reference program tests/reference/measure_reference.py where a value was
 * computed for it. */
#include "check.h"
#include "measure_reference.h"

#include "mirrorband/measure.h"

#define DEGREE (MB_PI / 180.0)

/* FACTS C "Type-2 loop noise bandwidth", all digits given. */
static void loop_bandwidth_is_smallest_at_half_damping(void **state)
{
    (void)state;
    assert_near(mb_theory_loop_bandwidth_hz(1.0, 0.5), 0.5, 1e-12);
    assert_near(mb_theory_loop_bandwidth_hz(1.0, sqrt(0.5)), 0.530330, 5e-7);
    assert_near(mb_theory_loop_bandwidth_hz(1.0, 1.0), 0.625, 1e-12);
    assert_near(mb_theory_loop_bandwidth_hz(1.0, 2.0), 1.0625, 1e-12);
    assert_near(mb_theory_loop_bandwidth_hz(mb_theory_natural_rad_s(20.0, 0.7), 0.7), 20.0, 1e-12);
}

/* FACTS C "Worked, Bbp = 6 kHz": rms degrees and squaring loss in dB, to the last digit given. */
static void a_costas_loop_pays_the_squaring_loss(void **state)
{
    static const struct {
        double density_dbhz, loop_hz, rms_deg;
    } rows[] = {{40, 20, 2.9215}, {45, 20, 1.5077}, {50, 20, 0.82235}, {45, 50, 2.3839}};
    static const double loss_db[] = {-1.139, -0.394, -0.128};

    (void)state;
    for (size_t i = 0; i < 4; i++) {
        double density = mb_db_power(rows[i].density_dbhz);
        double rms = sqrt(mb_theory_costas_variance(density, rows[i].loop_hz, 6000.0)) / DEGREE;
        assert_near(rms, rows[i].rms_deg, 6e-5);
    }
    for (size_t i = 0; i < 3; i++) {
        double density = mb_db_power(40.0 + 5.0 * (double)i);
        assert_near(mb_power_db(mb_theory_squaring_loss(density, 6000.0)), loss_db[i], 6e-4);
    }
}

/* (1 + 1/(2 snr))/(4 W T snr) for a band of 2W: W = 2700 Hz, T = 0.01 s, snr = 10 gives 1.05/1080. */
static void a_block_of_squares_follows_its_closed_form(void **state)
{
    (void)state;
    assert_near(mb_theory_block_variance(10.0, 5400.0, 0.01), 1.05 / 1080.0, 1e-12);
}

/* FACTS C "Lock metric". */
static void lock_quality_tells_the_snr(void **state)
{
    (void)state;
    assert_near(mb_theory_lock_quality(0.0, 1.0), 0.5, 1e-12);
    assert_near(mb_theory_lock_quality(0.0, mb_db_power(3.0)), 0.66614, 5e-6);
    assert_near(mb_theory_lock_quality(0.0, 10.0), 0.90909, 5e-6);
    assert_near(mb_theory_lock_quality(0.0, 100.0), 0.99010, 5e-6);
    assert_near(mb_theory_lock_quality(MB_PI / 4.0, 100.0), 0.0, 1e-12);
}

/* scipy.special.ive(0, x); both series and their border at 20. Tolerance: a few roundings. */
static void the_bessel_function_agrees_with_scipy(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof bessel_rows / sizeof bessel_rows[0]; i++) {
        assert_near(mb_theory_bessel_i0_scaled(bessel_rows[i].x), bessel_rows[i].value,
                    4e-15 * bessel_rows[i].value + 1e-16);
    }
}

/* FACTS C "Phase-error density": quad of scipy. */
static void phase_variance_falls_with_loop_snr(void **state)
{
    static const double rows[][2] = {{1, 1.604254}, {2, 0.764462},  {4, 0.298228},
                                     {6, 0.184238}, {10, 0.105655}, {20, 0.051324}};

    (void)state;
    for (size_t i = 0; i < 6; i++) {
        assert_near(mb_theory_tikhonov_variance(rows[i][0]), rows[i][1], 6e-7);
    }
}

/* FACTS C "Mean time to first slip": T BL, to the digits given. */
static void slips_become_rare_exponentially(void **state)
{
    static const double rows[][2] = {{1, 7.9101}, {2, 51.287},   {3, 352.67}, {4, 2521.4},
                                     {5, 18308},  {6, 1.3385e5}, {8, 7.217e6}};

    (void)state;
    for (size_t i = 0; i < 7; i++) {
        assert_near(mb_theory_slip_time_s(rows[i][0], 1.0), rows[i][1], 1e-4 * rows[i][1]);
    }
    double asymptote = MB_PI / 4.0 * exp(2.0 * 40.0);
    assert_near(mb_theory_slip_time_s(40.0, 1.0) / asymptote, 1.0, 0.01);
}

/* FACTS C "CRB, one complex tone": frequency as rms f/fs or variance, phase in degrees. */
static void no_estimate_beats_the_cramer_rao_bound(void **state)
{
    static const struct {
        double count, snr_db, relative_rms;
    } rows[] = {{64, 10, 2.40812e-4},
                {256, 10, 3.00981e-5},
                {1024, 10, 3.76224e-6},
                {1024, 20, 1.18972e-6},
                {4096, 0, 1.48715e-6}};

    (void)state;
    assert_near(mb_theory_frequency_bound(10.0, 64.0), 2.28938e-6, 5e-12);
    for (size_t i = 0; i < 5; i++) {
        double variance = mb_theory_frequency_bound(mb_db_power(rows[i].snr_db), rows[i].count);
        assert_near(sqrt(variance) / (2.0 * MB_PI), rows[i].relative_rms, 6e-6 * rows[i].relative_rms);
    }
    assert_near(sqrt(mb_theory_phase_bound(10.0, 64.0)) / DEGREE, 3.1658, 6e-5);
    assert_near(sqrt(mb_theory_phase_bound(10.0, 1024.0)) / DEGREE, 0.80015, 6e-6);
}

/* FACTS B "Phase error th", "Quadrature/in-phase ratio", "Random phase". */
static void a_phase_error_costs_cosine_squared(void **state)
{
    static const double loss[][2] = {{1, -0.0013},  {5, -0.0331},   {10, -0.1330},
                                     {20, -0.5403}, {30, -1.2494},  {45, -3.0103},
                                     {60, -6.0206}, {80, -15.2066}, {89, -35.1629}};
    static const double ratio[][2] = {{1, -35.162}, {2, -29.138}, {5, -21.161}, {10, -15.074}};
    static const double jitter[][2] = {{1, -73.34}, {2, -61.29}, {5, -45.38}, {10, -33.33}, {20, -21.29}};

    (void)state;
    for (size_t i = 0; i < 9; i++) {
        assert_near(mb_theory_phase_error_db(loss[i][0] * DEGREE), loss[i][1], 6e-5);
    }
    for (size_t i = 0; i < 4; i++) {
        assert_near(mb_theory_quadrature_db(ratio[i][0] * DEGREE), ratio[i][1], 6e-4);
    }
    for (size_t i = 0; i < 5; i++) {
        assert_near(mb_theory_phase_jitter_db(jitter[i][0] * DEGREE), jitter[i][1], 6e-3);
    }
}

/* FACTS B "idem dB, (gain dB, phase deg)". */
static void image_rejection_follows_gain_and_phase_error(void **state)
{
    static const double rows[][3] = {{0, 0.1, 61.183},  {0, 1, 41.183},   {0, 2, 35.162},   {0, 5, 27.198},
                                     {0.01, 0, 64.797}, {0.1, 0, 44.797}, {0.1, 1, 39.614}, {0.25, 1, 35.479},
                                     {0.5, 0, 30.820},  {0.5, 3, 28.200}, {0.5, 5, 25.632}, {1, 0, 24.806},
                                     {1, 5, 22.829},    {1, 10, 19.602}};

    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        assert_near(mb_theory_image_rejection_db(rows[i][0], rows[i][1]), rows[i][2], 6e-4);
    }
    assert_true(isinf(mb_theory_image_rejection_db(0.0, 0.0)));
}

/* FACTS B "Ideal quantiser SNR, full-scale sine". */
static void each_bit_is_worth_six_decibels(void **state)
{
    static const double rows[][2] = {{8, 49.926}, {10, 61.967}, {12, 74.008}, {14, 86.049}, {16, 98.091}};

    (void)state;
    for (size_t i = 0; i < 5; i++) {
        assert_near(mb_theory_quantiser_db((int)rows[i][0]), rows[i][1], 6e-4);
    }
}

/* FACTS B "AM PEP / mean", 0 "PEP of DSB-SC", A.2 "Average power from 100 W PEP". */
static void peak_over_mean_power_depends_on_the_tones(void **state)
{
    (void)state;
    assert_near(mb_theory_am_pep_db(1.0), 4.2597, 6e-5);
    assert_near(mb_theory_am_pep_db(0.8), 3.8997, 6e-5);
    assert_near(mb_theory_am_pep_db(0.5), 3.0103, 6e-5);
    assert_near(mb_theory_am_pep_db(0.3), 2.0877, 6e-5);
    assert_near(mb_theory_dsb_pep_db(1), 3.0103, 6e-5);
    assert_near(mb_theory_dsb_pep_db(2), 6.0206, 6e-5);
    assert_near(mb_theory_dsb_pep_db(3), 7.7815, 6e-5);
    assert_near(mb_theory_dsb_pep_db(4), 9.0309, 6e-5);
}

/* FACTS A.1 "Designator bandwidth field" and "More designators for tests". */
static void bandwidth_and_designator_read_as_the_rule_says(void **state)
{
    static const struct {
        double hz;
        const char *text;
    } widths[] = {{400, "400H"},    {2400, "2K40"},   {6000, "6K00"},   {12500, "12K5"}, {180400, "180K"},
                  {180500, "181K"}, {180700, "181K"}, {1.25e6, "1M25"}, {0.002, "H002"}, {25.3, "25H3"},
                  {999.6, "1K00"},  {9996, "10K0"},   {0.9996, "1H00"}, {5400, "5K40"}};
    static const struct {
        double highest_hz;
        const char *text;
    } voices[] = {{2700, "5K40A3E"}, {3000, "6K00A3E"}, {4000, "8K00A3E"}, {2500, "5K00A3E"}};
    char text[8];

    (void)state;
    for (size_t i = 0; i < sizeof widths / sizeof widths[0]; i++) {
        assert_ok(mb_theory_bandwidth_text(widths[i].hz, text));
        assert_string_equal(text, widths[i].text);
    }
    for (size_t i = 0; i < 4; i++) {
        assert_ok(mb_theory_designator(voices[i].highest_hz, text));
        assert_string_equal(text, voices[i].text);
    }
    assert_near(mb_theory_necessary_hz(3000.0), 6000.0, 0.0);
    assert_fault(mb_theory_bandwidth_text(0.0, text), MB_ERROR_ARGUMENT, "bandwidth_hz");
    assert_fault(mb_theory_designator(NAN, text), MB_ERROR_ARGUMENT, "highest_hz");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(loop_bandwidth_is_smallest_at_half_damping),
        cmocka_unit_test(a_costas_loop_pays_the_squaring_loss),
        cmocka_unit_test(a_block_of_squares_follows_its_closed_form),
        cmocka_unit_test(lock_quality_tells_the_snr),
        cmocka_unit_test(the_bessel_function_agrees_with_scipy),
        cmocka_unit_test(phase_variance_falls_with_loop_snr),
        cmocka_unit_test(slips_become_rare_exponentially),
        cmocka_unit_test(no_estimate_beats_the_cramer_rao_bound),
        cmocka_unit_test(a_phase_error_costs_cosine_squared),
        cmocka_unit_test(image_rejection_follows_gain_and_phase_error),
        cmocka_unit_test(each_bit_is_worth_six_decibels),
        cmocka_unit_test(peak_over_mean_power_depends_on_the_tones),
        cmocka_unit_test(bandwidth_and_designator_read_as_the_rule_says),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
