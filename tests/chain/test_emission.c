/* The emission as it leaves the chain, after quantisation to 16 bits: limits of carrier, band and products.
 */
#include "passages.h"

#include "mirrorband/measure.h"

/* To 16 bits and back, rounding, as a file or a radio takes it. */
static void quantise(passage *p)
{
    for (size_t i = 0; i < p->count; i++) {
        assert_at_most(fabs((double)p->samples[i].re), 32767.0 / 32768.0); /* peaks never clip */
        assert_at_most(fabs((double)p->samples[i].im), 32767.0 / 32768.0);
        p->samples[i].re = (float)(nearbyint(32768.0 * (double)p->samples[i].re) / 32768.0);
        p->samples[i].im = (float)(nearbyint(32768.0 * (double)p->samples[i].im) / 32768.0);
    }
}

static mb_emission_result measure(const passage *p, double rate_hz)
{
    mb_emission_settings settings = mb_emission_settings_default();
    mb_emission *emission = NULL;
    mb_emission_result result;

    settings.rate_hz = rate_hz;
    assert_ok(mb_emission_create(&settings, &emission));
    mb_emission_process(emission, p->samples, p->count);
    assert_ok(mb_emission_finish(emission, &result));
    mb_emission_destroy(emission);
    return result;
}

/* A conditioned voice at 48 kHz, as transmitted. */
static mb_emission_result voice_at_rate(double rate_hz, double seconds)
{
    mb_transmit_settings settings = mb_transmit_settings_default();
    size_t count = (size_t)(seconds * 48000.0);
    float *audio = calloc(count, sizeof *audio);

    settings.rate_hz = rate_hz;
    signal_voice_at(audio, count, 48000.0, 118.0, 901);
    passage p = transmit_all(&settings, audio, count);
    quantise(&p);
    mb_emission_result result = measure(&p, rate_hz);
    free(p.samples);
    free(audio);
    return result;
}

/* The limits of the project: carrier -80 dBc, 99 % within 5.4 kHz (2 x 2700 Hz, ITU-R SM.1138), -70 dBc
 * beyond 4 kHz with the images of interpolation, at every rate. */
static void a_voice_keeps_to_its_limits_at_every_rate(void **state)
{
    static const double rates[][2] = {{48e3, 4.0}, {240e3, 4.0}, {1.024e6, 1.5}, {2.4e6, 1.0}, {20e6, 0.26}};

    (void)state;
    print_message("seed 901\n");
    for (size_t i = 0; i < sizeof rates / sizeof rates[0]; i++) {
        mb_emission_result r = voice_at_rate(rates[i][0], rates[i][1]);
        print_message("%g Hz: carrier %.1f dBc, 99 %% %.0f Hz, beyond 4 kHz %.1f dBc\n", rates[i][0],
                      -r.carrier_suppression_db, r.occupied_99_hz, r.out_of_band_dbc);
        assert_at_least(r.carrier_suppression_db, 80.0);
        assert_at_most(r.occupied_99_hz, 5400.0);
        assert_at_most(r.out_of_band_dbc, -70.0);
        assert_near(r.balance_db, 0.0, 0.01); /* a real message: both sidebands alike */
        assert_at_most(r.pep_dbfs, -0.99);    /* peak 0.891 of full scale */
    }
}

/* 700 and 1900 Hz (common practice), peaks at the limit: no product above -70 dB of one tone. */
static void two_tones_make_no_products(void **state)
{
    (void)state;
    for (int conditioning = 0; conditioning < 2; conditioning++) {
        mb_transmit_settings settings = mb_transmit_settings_default();
        mb_spectrum_settings fine = mb_spectrum_settings_default();
        enum { COUNT = 48000 * 5, SETTLED = 48000 * 3 };
        static float audio[COUNT];
        mb_spectrum *spectrum = NULL;
        mb_two_tone_result result;

        settings.rate_hz = 48e3;
        settings.voice.conditioning = conditioning == 1;
        for (size_t i = 0; i < COUNT; i++) {
            double t = (double)i / 48000.0;
            audio[i] = (float)(0.44 * (cos(2.0 * MB_PI * 700.0 * t) + cos(2.0 * MB_PI * 1900.0 * t)));
        }
        passage p = transmit_all(&settings, audio, COUNT);
        quantise(&p);
        fine.rate_hz = 48e3;
        fine.length = 16384;
        assert_ok(mb_spectrum_create(&fine, &spectrum));
        mb_spectrum_process_cf32(spectrum, p.samples + SETTLED, p.count - SETTLED - 4800);
        assert_ok(mb_two_tone(spectrum, 700.0, 1900.0, &result));
        print_message("conditioning %d: highest product %.1f dB\n", conditioning, result.highest_db);
        assert_at_most(result.highest_db, -70.0);
        assert_near(result.tone_dbfs[0], result.tone_dbfs[1], 0.1);
        mb_spectrum_destroy(spectrum);
        free(p.samples);
    }
}

static mb_transmit_settings configured(const char *const *assignments)
{
    mb_transmit_settings settings;
    mb_config *config = NULL;

    assert_ok(mb_config_create(&config));
    assert_ok(mb_config_set(config, "transmit.conditioning=off"));
    assert_ok(mb_config_set(config, "transmit.peak=0 dBFS"));
    for (; *assignments != NULL; assignments++) {
        assert_ok(mb_config_set(config, *assignments));
    }
    assert_ok(mb_config_check(config));
    assert_ok(mb_transmit_settings_from_config(config, 48000.0, 48000.0, &settings));
    mb_config_destroy(config);
    return settings;
}

/* Figures of a 1 kHz tone of 0.999 of full scale, 1.2 s. */
static mb_emission_result tone_through(const char *const *assignments)
{
    enum { COUNT = 57600 };
    static float audio[COUNT];
    mb_transmit_settings settings = configured(assignments);

    for (size_t i = 0; i < COUNT; i++) {
        audio[i] = (float)(0.9 * cos(2.0 * MB_PI * 1000.0 * (double)i / 48000.0));
    }
    passage p = transmit_all(&settings, audio, COUNT);
    mb_emission_result result = measure(&p, 48000.0);
    free(p.samples);
    return result;
}

/* The tone is 20 log 0.9 = -0.92 dB under the full scale that the leak refers to; the edges of the band limit
 * and the start of the tone leave 0.2 dB. */
#define TONE_DB (-0.915)

/* Square-law pair, b apart by 2 %: FACTS.md B, 20 log((c1 + c2) Vm/|b1 - b2|) re one sideband, Vm = 0.2, and
 * 3.01 dB re both. */
static void a_balanced_modulator_leaks_by_its_mismatch(void **state)
{
    static const char *const assignments[] = {"transmit.modulator=balanced", "transmit.linear_mismatch=2 %",
                                              NULL};
    mb_balanced_settings pair = mb_balanced_settings_default();
    double b = 0.5 * (pair.device[0].b + pair.device[1].b), c = pair.device[0].c + pair.device[1].c;

    (void)state;
    mb_emission_result r = tone_through(assignments);
    assert_near(r.carrier_suppression_db, 20.0 * log10(c * 0.2 / (0.02 * b)) + 3.0103 + TONE_DB, 0.2);
}

static void diode_pair_and_ring_leak_as_their_models_say(void **state)
{
    static const char *const diode[] = {"transmit.modulator=diode", "transmit.linear_mismatch=1 %", NULL};
    static const char *const ring[] = {"transmit.modulator=ring", "transmit.transformer_imbalance=1 %", NULL};
    const char *const *const both[] = {diode, ring};

    (void)state;
    for (size_t i = 0; i < 2; i++) {
        mb_transmit_settings settings = configured(both[i]);
        assert_int_equal(settings.modulator, MB_MODULATOR_EQUIVALENT);
        if (settings.equivalent.leak_dbc > -100.0) {
            mb_emission_result r = tone_through(both[i]);
            assert_near(r.carrier_suppression_db, -settings.equivalent.leak_dbc + TONE_DB, 0.2);
        }
    }
    assert_true(configured(diode).equivalent.leak_dbc > -100.0);
}

static void a_leak_that_is_set_is_the_leak_that_is_sent(void **state)
{
    static const char *const assignments[] = {"transmit.leak=-40 dBc", NULL};

    (void)state;
    mb_emission_result r = tone_through(assignments);
    assert_true(r.carrier_found);
    assert_near(r.carrier_suppression_db, 40.0 + TONE_DB, 0.2);
    assert_near(r.carrier_offset_hz, 0.0, 0.05);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_voice_keeps_to_its_limits_at_every_rate),
        cmocka_unit_test(two_tones_make_no_products),
        cmocka_unit_test(a_balanced_modulator_leaks_by_its_mismatch),
        cmocka_unit_test(diode_pair_and_ring_leak_as_their_models_say),
        cmocka_unit_test(a_leak_that_is_set_is_the_leak_that_is_sent),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
