/* Windows and windowed designs are those of scipy. */
#include "check.h"
#include "filter_reference.h"
#include "mirrorband/filter.h"

static void shape_parameters_are_those_of_kaiser(void **state)
{
    /* FACTS.md G: [scipy.signal.kaiser_beta(A) for A in ...], six decimals given */
    static const double rows[][2] = {{30.0, 2.116625}, {40.0, 3.395321}, {50.0, 4.533514},  {60.0, 5.653260},
                                     {70.0, 6.755260}, {80.0, 7.857260}, {100.0, 10.061260}};

    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        assert_near(mb_kaiser_beta(rows[i][0]), rows[i][1], 6e-7);
    }
    assert_true(mb_kaiser_beta(20.0) == 0.0);
}

static void lengths_are_those_of_kaiserord_made_odd(void **state)
{
    (void)state;
    /* FACTS.md G: scipy.signal.kaiserord(60, 0.1)[0] is 74, (60, 0.05) 147, (80, 0.1) 102, (80, 0.05) 202;
     * the width there is in halves of the rate */
    assert_int_equal(mb_kaiser_length(60.0, 0.1, 2.0), 74 | 1);
    assert_int_equal(mb_kaiser_length(60.0, 0.05, 2.0), 147);
    assert_int_equal(mb_kaiser_length(80.0, 0.1, 2.0), 102 | 1);
    assert_int_equal(mb_kaiser_length(80.0, 0.05, 2.0), 202 | 1);
}

static void the_window_is_that_of_scipy(void **state)
{
    double window[21];

    (void)state;
    mb_kaiser_window(21, mb_kaiser_beta(80.0), window);
    for (size_t i = 0; i < 21; i++) {
        assert_near(window[i], reference_kaiser_21[i], 1e-13); /* both in double precision */
    }
}

/* Transition that makes a design of `count` taps. */
static double transition_of(size_t count, double attenuation_db, double rate_hz)
{
    return (attenuation_db - 7.95) / (2.285 * 2.0 * MB_PI * ((double)count - 1.5)) * rate_hz;
}

static void a_low_pass_is_that_of_firwin(void **state)
{
    float *taps = NULL;
    size_t count = 0;

    (void)state;
    assert_ok(mb_design_lowpass(3000.0, transition_of(41, 60.0, 48000.0), 60.0, 48000.0, &taps, &count));
    assert_int_equal(count, 41);
    for (size_t i = 0; i < count; i++) {
        assert_near(taps[i], reference_firwin_41[i], 1e-8); /* rounding to float of values up to 0.13 */
    }
    mb_release(taps);
    /* FACTS.md G: firwin(101, 3000, fs=48000, kaiser_beta(60)), centre taps */
    assert_ok(mb_design_lowpass(3000.0, transition_of(101, 60.0, 48000.0), 60.0, 48000.0, &taps, &count));
    assert_int_equal(count, 101);
    assert_near(taps[50], 0.12507046255948626, 1e-8);
    assert_near(taps[49], 0.12175570305671234, 1e-8);
    mb_release(taps);
}

/* Gain in dB of taps at a frequency in turns per sample. */
static double gain_db(const float *taps, size_t count, double turns)
{
    double re = 0.0, im = 0.0;

    for (size_t i = 0; i < count; i++) {
        re += (double)taps[i] * cos(2.0 * MB_PI * turns * (double)i);
        im += (double)taps[i] * sin(2.0 * MB_PI * turns * (double)i);
    }
    return mb_power_db(re * re + im * im);
}

static void a_band_pass_is_that_of_firwin_and_holds_its_attenuation(void **state)
{
    float *taps = NULL;
    size_t count = 0;

    (void)state;
    assert_ok(
        mb_design_bandpass(300.0, 2700.0, transition_of(61, 50.0, 16000.0), 50.0, 16000.0, &taps, &count));
    assert_int_equal(count, 61);
    for (size_t i = 0; i < count; i++) {
        assert_near(taps[i], reference_bandpass_61[i], 2e-8); /* rounding to float of values up to 0.3 */
    }
    mb_release(taps);
    assert_ok(mb_design_bandpass(300.0, 2700.0, 200.0, 70.0, 16000.0, &taps, &count));
    assert_near(gain_db(taps, count, 300.0 / 16000.0), -6.02, 0.02); /* the edges are at half the amplitude */
    assert_near(gain_db(taps, count, 1500.0 / 16000.0), 0.0, 0.01);
    assert_at_most(gain_db(taps, count, 199.0 / 16000.0), -68.0); /* Kaiser's rule holds to about 1 dB */
    assert_at_most(gain_db(taps, count, 2801.0 / 16000.0), -68.0);
    mb_release(taps);
}

static void wrong_designs_are_told(void **state)
{
    float *taps = NULL;
    size_t count = 0;

    (void)state;
    assert_fault(mb_design_lowpass(9000.0, 100.0, 60.0, 16000.0, &taps, &count), MB_ERROR_ARGUMENT,
                 "cutoff_hz");
    assert_fault(mb_design_lowpass(900.0, 0.0, 60.0, 16000.0, &taps, &count), MB_ERROR_ARGUMENT,
                 "transition_hz");
    assert_fault(mb_design_lowpass(900.0, 100.0, 6.0, 16000.0, &taps, &count), MB_ERROR_ARGUMENT,
                 "attenuation_db");
    assert_fault(mb_design_lowpass(900.0, 100.0, 60.0, -1.0, &taps, &count), MB_ERROR_ARGUMENT, "rate_hz");
    assert_fault(mb_design_bandpass(0.0, 900.0, 100.0, 60.0, 16000.0, &taps, &count), MB_ERROR_ARGUMENT,
                 "low_hz");
    assert_fault(mb_design_bandpass(900.0, 800.0, 100.0, 60.0, 16000.0, &taps, &count), MB_ERROR_ARGUMENT,
                 "high_hz");
    assert_null(taps);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(shape_parameters_are_those_of_kaiser),
        cmocka_unit_test(lengths_are_those_of_kaiserord_made_odd),
        cmocka_unit_test(the_window_is_that_of_scipy),
        cmocka_unit_test(a_low_pass_is_that_of_firwin),
        cmocka_unit_test(a_band_pass_is_that_of_firwin_and_holds_its_attenuation),
        cmocka_unit_test(wrong_designs_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
