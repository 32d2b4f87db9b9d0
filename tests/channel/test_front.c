/* Unequal rails, DC, clipping and quantisation do what their closed forms say. */
#include "samples.h"

#include "channel_reference.h"

enum { COUNT = 8000 };

/* Image rejection of a complex tone, FACTS B and scipy.fft. The samples are float: 0.001 dB. */
static void unequal_rails_make_the_image_of_the_table(void **state)
{
    mb_cf32 *samples = samples_of(COUNT);

    (void)state;
    for (size_t k = 0; k < sizeof image_rejections / sizeof image_rejections[0]; k++) {
        mb_channel_settings settings = mb_channel_settings_default();
        settings.iq_gain_db = image_rejections[k].gain_db;
        settings.iq_phase_deg = image_rejections[k].phase_deg;
        mb_channel *channel = channel_of(&settings);
        fill_tone(samples, COUNT, 0.07, 0.5);
        mb_channel_process(channel, samples, COUNT, samples);
        double wanted = line_power(samples, COUNT, 0.07), image = line_power(samples, COUNT, -0.07);
        assert_near(mb_power_db(wanted / image), image_rejections[k].rejection_db, 0.001);
        mb_channel_destroy(channel);
    }
    free(samples);
}

/* FACTS B, note: of a real message at a fixed phase the sidebands stay equal. */
static void a_real_message_keeps_equal_sidebands(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 *samples = samples_of(COUNT);

    (void)state;
    settings.iq_gain_db = 0.5;
    settings.iq_phase_deg = 3.0;
    settings.phase_rad = 0.7;
    mb_channel *channel = channel_of(&settings);
    for (size_t n = 0; n < COUNT; n++) {
        samples[n].re = (float)cos(2.0 * MB_PI * 0.05 * (double)n);
    }
    mb_channel_process(channel, samples, COUNT, samples);
    assert_near(sqrt(line_power(samples, COUNT, 0.05)), 0.526534, 1e-5);
    assert_near(sqrt(line_power(samples, COUNT, -0.05)), 0.526534, 1e-5);
    mb_channel_destroy(channel);
    free(samples);
}

static void dc_has_its_level_and_direction(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 samples[10] = {{0.0f, 0.0f}};

    (void)state;
    settings.dc_dbfs = -40.0;
    settings.dc_phase_rad = MB_PI / 6.0;
    mb_channel *channel = channel_of(&settings);
    mb_channel_process(channel, samples, 10, samples);
    for (int n = 0; n < 10; n++) {
        assert_near(samples[n].re, 0.01 * cos(MB_PI / 6.0), 1e-9);
        assert_near(samples[n].im, 0.005, 1e-9);
    }
    mb_channel_destroy(channel);
}

/* Power of the error that a quantiser of so many bits makes on a sine of this amplitude. */
static double quantisation_power(unsigned bits, double amplitude)
{
    enum { LONG = 10000 };
    mb_cf32 *in = samples_of(LONG), *out = samples_of(LONG);
    mb_channel_settings settings = mb_channel_settings_default();

    settings.quantise_bits = bits;
    mb_channel *channel = channel_of(&settings);
    fill_tone(in, LONG, 0.01 * sqrt(3.0), amplitude); /* irrational: no phase comes twice */
    mb_channel_process(channel, in, LONG, out);
    for (size_t n = 0; n < LONG; n++) {
        out[n] = (mb_cf32){out[n].re - in[n].re, out[n].im - in[n].im};
    }
    double power = power_of(out, LONG);
    assert_int_equal(mb_channel_state(channel).clipped, 0);
    mb_channel_destroy(channel);
    free(in);
    free(out);
    return power;
}

/* FACTS B: 6.0206 N + 1.7609 dB for a full-scale sine (Bennett 1948), whose complex power is 1. The error of
 * a sine depends a little on where its peak lies between two steps (0.2 dB at 8 bits, by the Bessel series of
 * the error): mean over eight such amplitudes, the highest a step below full scale. Statistics of 160000
 * rails: 0.05 dB. */
static void quantisation_noise_is_that_of_the_number_of_bits(void **state)
{
    (void)state;
    for (unsigned bits = 8; bits <= 16; bits += 2) {
        double noise = 0.0;
        for (int part = 0; part < 8; part++) {
            noise += quantisation_power(bits, 1.0 - ldexp(1.0 + part / 8.0, 1 - (int)bits)) / 8.0;
        }
        assert_near(-mb_power_db(noise), 6.0206 * bits + 1.7609, 0.05);
    }
}

static void the_quantiser_ends_as_a_converter_does(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 samples[3] = {{1.0f, -1.0f}, {0.4f, 2.0f}, {0.0f, -0.26f}};

    (void)state;
    settings.quantise_bits = 2; /* -1, -0.5, 0, 0.5 */
    mb_channel *channel = channel_of(&settings);
    mb_channel_process(channel, samples, 3, samples);
    assert_true(samples[0].re == 0.5f && samples[0].im == -1.0f);
    assert_true(samples[1].re == 0.5f && samples[1].im == 0.5f);
    assert_true(samples[2].re == 0.0f && samples[2].im == -0.5f);
    assert_int_equal(mb_channel_state(channel).clipped, 2);
    mb_channel_destroy(channel);
}

static void clipping_limits_each_rail_and_is_counted(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 samples[3] = {{0.7f, -0.1f}, {0.2f, -3.0f}, {0.5f, -0.5f}};

    (void)state;
    settings.clip_level = 0.5;
    mb_channel *channel = channel_of(&settings);
    mb_channel_process(channel, samples, 3, samples);
    assert_true(samples[0].re == 0.5f && samples[0].im == -0.1f);
    assert_true(samples[1].re == 0.2f && samples[1].im == -0.5f);
    assert_true(samples[2].re == 0.5f && samples[2].im == -0.5f);
    assert_int_equal(mb_channel_state(channel).clipped, 2);
    mb_channel_destroy(channel);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(unequal_rails_make_the_image_of_the_table),
        cmocka_unit_test(a_real_message_keeps_equal_sidebands),
        cmocka_unit_test(dc_has_its_level_and_direction),
        cmocka_unit_test(quantisation_noise_is_that_of_the_number_of_bits),
        cmocka_unit_test(the_quantiser_ends_as_a_converter_does),
        cmocka_unit_test(clipping_limits_each_rail_and_is_counted),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
