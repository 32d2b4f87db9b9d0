/* Intermodulation and distortion of known polynomials are read as their closed forms say. */
#include "check.h"
#include "failing_memory.h"
#include "signals.h"

enum { RATE = 48000, COUNT = 96000 };

static mb_spectrum *spectrum_of(const mb_cf32 *samples)
{
    mb_spectrum_settings settings = mb_spectrum_settings_default();
    mb_spectrum *spectrum = NULL;

    settings.length = 16384;
    assert_ok(mb_spectrum_create(&settings, &spectrum));
    mb_spectrum_process_cf32(spectrum, samples, COUNT);
    return spectrum;
}

/* x + k2 x^2 + k3 x^3 of a real signal. */
static void bend(mb_cf32 *samples, double k2, double k3)
{
    for (size_t i = 0; i < COUNT; i++) {
        double x = samples[i].re;
        samples[i] = (mb_cf32){(float)(x + k2 * x * x + k3 * x * x * x), 0.0f};
    }
}

/* Two equal tones of amplitude a through x + k x^3: each becomes a (1 + 9 k a^2/4), 2 f1 - f2 and its like
 * 3 k a^3/4 (trigonometry; FACTS B "Two-tone audio 700+1900, cubic" for where they fall). */
static void cubic_intermodulation_is_three_quarters_k_a_squared(void **state)
{
    const double a = 0.4, k = -0.01;
    mb_cf32 *samples = samples_of(COUNT);
    mb_two_tone_result result;

    (void)state;
    add_tone(samples, COUNT, RATE, 0.0, 700.0, a);
    add_tone(samples, COUNT, RATE, 0.0, 1900.0, a);
    for (size_t i = 0; i < COUNT; i++) {
        samples[i].im = 0.0f;
    }
    /* the real part alone of exp(j(+-w t + 0.4)) is cos(0.4) cos(w t): the message amplitude */
    const double message = a * cos(0.4);
    bend(samples, 0.0, k);
    mb_spectrum *spectrum = spectrum_of(samples);
    assert_ok(mb_two_tone(spectrum, 700.0, 1900.0, &result));
    double tone = message * (1.0 + 2.25 * k * message * message);
    double product = 0.75 * fabs(k) * message * message * message;
    assert_near(result.tone_dbfs[0], mb_power_db(tone * tone / 2.0), 0.001);
    assert_near(result.third_order_db, 20.0 * log10(product / tone), 0.01);
    assert_near(result.highest_db, result.third_order_db, 0.01);
    assert_at_most(result.fifth_order_db, -110.0);
    assert_at_most(result.second_order_db, -110.0);
    mb_spectrum_destroy(spectrum);
    mb_release(samples);
}

/* k2 x^2: 2 f lines of k2 a^2/2, sum and difference of k2 a^2. */
static void square_law_intermodulation_is_k_a(void **state)
{
    const double k = 0.003;
    mb_cf32 *samples = samples_of(COUNT);
    mb_two_tone_result result;

    (void)state;
    for (size_t i = 0; i < COUNT; i++) {
        double t = (double)i / RATE;
        samples[i].re = (float)(0.5 * sin(2.0 * MB_PI * 700.0 * t) + 0.5 * sin(2.0 * MB_PI * 1900.0 * t));
    }
    bend(samples, k, 0.0);
    mb_spectrum *spectrum = spectrum_of(samples);
    assert_ok(mb_two_tone(spectrum, 700.0, 1900.0, &result));
    assert_near(result.second_order_db, 20.0 * log10(0.5 * k), 0.01);
    assert_at_most(result.third_order_db, -110.0);
    mb_spectrum_destroy(spectrum);
    mb_release(samples);
}

/* FACTS B "Cubic PA": k = -0.02, amplitude 1: lines 0.494375 and 0.001875, -48.4211 dB. The suppressed
 * carrier lies at 0 Hz; the message is a tone at 1 kHz, so its third harmonic is the product. */
static void harmonics_of_a_cubic_follow_the_table(void **state)
{
    mb_cf32 *samples = samples_of(COUNT);
    mb_sinad_result result;

    (void)state;
    for (size_t i = 0; i < COUNT; i++) {
        samples[i].re = (float)cos(2.0 * MB_PI * 1000.0 * (double)i / RATE);
    }
    /* an envelope x + (3/4) k x^3 is what the band around the carrier keeps of the cubic */
    bend(samples, 0.0, 0.75 * -0.02);
    mb_spectrum *spectrum = spectrum_of(samples);
    assert_ok(mb_sinad(spectrum, 100.0, 20000.0, &result));
    assert_near(result.frequency_hz, 1000.0, 0.01);
    assert_near(result.thd_db, -48.4211, 0.001);
    assert_near(result.sinad_db, 48.4211, 0.01);
    assert_near(result.tone_dbfs, mb_power_db(2.0 * 0.494375 * 0.494375), 0.001);
    mb_spectrum_destroy(spectrum);
    mb_release(samples);
}

/* FACTS B "Hard clip of a sine at drive d" = 1.5: THD 15.36 %, harmonics to 29 of which those up to 10 count
 * here: 3rd -16.47 dB, so the sum lies between that and 15.36 %. */
static void a_clipped_sine_has_the_distortion_of_the_table(void **state)
{
    mb_cf32 *samples = samples_of(COUNT);
    mb_sinad_result result;

    (void)state;
    for (size_t i = 0; i < COUNT; i++) {
        double x = 1.5 * sin(2.0 * MB_PI * 375.0 * (double)i / RATE);
        samples[i].re = (float)fmax(-1.0, fmin(1.0, x));
    }
    mb_spectrum *spectrum = spectrum_of(samples);
    assert_ok(mb_sinad(spectrum, 100.0, 11000.0, &result));
    assert_near(result.tone_dbfs, mb_power_db(1.17142 * 1.17142 / 2.0), 0.001);
    assert_at_most(result.thd_db, 20.0 * log10(0.1536) + 0.001);
    assert_at_least(result.thd_db, -16.47);
    /* harmonics 11 to 29 count as noise: all together make the table's figure */
    assert_near(result.sinad_db, -10.0 * log10(0.1536 * 0.1536 / (1.0 + 0.1536 * 0.1536)), 0.02);
    mb_spectrum_destroy(spectrum);
    mb_release(samples);
}

/* Noise of known density in a known band beside a tone; 0.2 dB: spread of the noise of one record. */
static void noise_beside_a_tone_gives_its_snr(void **state)
{
    mb_cf32 *samples = samples_of(COUNT);
    mb_sinad_result result;

    (void)state;
    add_noise(samples, COUNT, 0.002, 9); /* 0.001 in the real part */
    for (size_t i = 0; i < COUNT; i++) {
        samples[i].re += (float)(0.5 * sin(2.0 * MB_PI * 1000.0 * (double)i / RATE));
        samples[i].im = 0.0f;
    }
    mb_spectrum *spectrum = spectrum_of(samples);
    assert_ok(mb_sinad(spectrum, 300.0, 2700.0, &result));
    double snr_db = 10.0 * log10(0.125 / (0.001 * 2400.0 / 24000.0));
    assert_near(result.snr_db, snr_db, 0.2);
    assert_near(result.sinad_db, 10.0 * log10(1.0 + mb_db_power(snr_db)), 0.25);
    assert_at_most(result.thd_db, -40.0);
    mb_spectrum_destroy(spectrum);
    mb_release(samples);
}

static void silence_and_wrong_tones_are_told(void **state)
{
    mb_cf32 *samples = samples_of(COUNT);
    mb_two_tone_result two;
    mb_sinad_result one;

    (void)state;
    mb_spectrum *spectrum = spectrum_of(samples);
    assert_int_equal(mb_two_tone(spectrum, 700.0, 1900.0, &two), MB_ERROR_NO_SIGNAL);
    assert_int_equal(mb_sinad(spectrum, 300.0, 3000.0, &one), MB_ERROR_NO_SIGNAL);
    assert_fault(mb_two_tone(spectrum, 700.0, 710.0, &two), MB_ERROR_ARGUMENT, "high_hz");
    assert_fault(mb_two_tone(spectrum, -1.0, 710.0, &two), MB_ERROR_ARGUMENT, "low_hz");
    assert_fault(mb_sinad(spectrum, 300.0, 30000.0, &one), MB_ERROR_ARGUMENT, "high_hz");
    samples[5].re = 1.0f;
    mb_spectrum_process_cf32(spectrum, samples, COUNT);
    assert_survives_lack_of_memory(mb_two_tone(spectrum, 700.0, 1900.0, &two));
    assert_survives_lack_of_memory(mb_sinad(spectrum, 300.0, 3000.0, &one));
    mb_spectrum_destroy(spectrum);
    mb_release(samples);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(cubic_intermodulation_is_three_quarters_k_a_squared),
        cmocka_unit_test(square_law_intermodulation_is_k_a),
        cmocka_unit_test(harmonics_of_a_cubic_follow_the_table),
        cmocka_unit_test(a_clipped_sine_has_the_distortion_of_the_table),
        cmocka_unit_test(noise_beside_a_tone_gives_its_snr),
        cmocka_unit_test(silence_and_wrong_tones_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
