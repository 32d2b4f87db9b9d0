/* The transmit chain: alignment, lengths, and the contract of a stage. */
#include "passages.h"

#include "failing_memory.h"
#include "stage_cuts.h"

enum { TONES = 4 };

static const double tones_hz[TONES] = {500.0, 900.0, 1500.0, 2300.0};

/* Four tones of 0.2 each: the limiter has nothing to do. */
static float *tones(double rate_hz, size_t count)
{
    float *audio = calloc(count, sizeof *audio);

    assert_non_null(audio);
    for (size_t i = 0; i < count; i++) {
        double sum = 0.0;
        for (size_t k = 0; k < TONES; k++) {
            sum += 0.2 * cos(2.0 * MB_PI * tones_hz[k] * (double)i / rate_hz);
        }
        audio[i] = (float)sum;
    }
    return audio;
}

/* Amplitude and time shift of a tone in the in-phase rail, over 0.2 s from 0.3 s on (whole periods). */
static void measure_tone(const passage *p, double rate_hz, double tone_hz, double *amplitude, double *late_s)
{
    size_t from = (size_t)lround(0.3 * rate_hz), length = (size_t)lround(0.2 * rate_hz);
    double re = 0.0, im = 0.0;

    assert_true(from + length <= p->count);
    for (size_t i = from; i < from + length; i++) {
        double angle = 2.0 * MB_PI * tone_hz * (double)i / rate_hz;
        re += (double)p->samples[i].re * cos(angle);
        im += (double)p->samples[i].re * sin(angle);
    }
    *amplitude = 2.0 * hypot(re, im) / (double)length;
    *late_s = atan2(im, re) / (2.0 * MB_PI * tone_hz);
}

/*
 * The delay is taken off to the nearest output sample, so what is left is half of one at most; what the
 * resamplers leave otherwise is below a thousandth of an audio sample. The length is that of the audio,
 * exact.
 */
static void the_first_sample_out_belongs_to_the_first_sample_in(void **state)
{
    static const double rates[][2] = {{8e3, 48e3},    {8e3, 240e3},     {16e3, 48e3}, {16e3, 2.4e6},
                                      {44.1e3, 48e3}, {44.1e3, 240e3},  {48e3, 48e3}, {48e3, 240e3},
                                      {48e3, 2.4e6},  {44.1e3, 1.024e6}};

    (void)state;
    for (size_t i = 0; i < sizeof rates / sizeof rates[0]; i++) {
        mb_transmit_settings settings = plain_transmit(rates[i][0], rates[i][1]);
        size_t count = (size_t)(0.6 * rates[i][0]) + 17;
        float *audio = tones(rates[i][0], count);
        passage p = transmit_all(&settings, audio, count);
        assert_int_equal(p.count, llround((double)count * rates[i][1] / rates[i][0]));
        for (size_t k = 0; k < TONES; k++) {
            double amplitude, late_s;
            measure_tone(&p, rates[i][1], tones_hz[k], &amplitude, &late_s);
            assert_near(late_s, 0.0, 0.5 / rates[i][1] + 1e-3 / rates[i][0]);
            assert_near(amplitude, 0.2, 0.2 * 0.006); /* flat to 0.05 dB */
        }
        free(p.samples);
        free(audio);
    }
}

/* An ideal product has no quadrature: what is there comes from the interpolator's rounding alone. */
static void a_message_about_the_centre_is_real(void **state)
{
    mb_transmit_settings settings = plain_transmit(48e3, 240e3);
    float *audio = tones(48e3, 24000);
    passage p = transmit_all(&settings, audio, 24000);

    (void)state;
    assert_at_most(signal_quadrature_db(p.samples, 0, p.count), -120.0);
    free(p.samples);
    free(audio);
}

/* The same emission about another centre: turned back by the offset it is what it was, to float rounding. */
static void the_offset_only_moves_the_emission(void **state)
{
    mb_transmit_settings settings = plain_transmit(48e3, 240e3);
    float *audio = tones(48e3, 24000);
    passage still = transmit_all(&settings, audio, 24000);
    double error = 0.0, power = 0.0;

    (void)state;
    settings.offset_hz = -31250.0;
    passage moved = transmit_all(&settings, audio, 24000);
    assert_int_equal(moved.count, still.count);
    passage_shift(&moved, 31250.0, 240e3);
    /* up to one constant phase: that of the offset's oscillator against the delay taken off */
    double re = 0.0, im = 0.0;
    for (size_t i = 0; i < still.count; i++) {
        re += (double)moved.samples[i].re * (double)still.samples[i].re;
        im += (double)moved.samples[i].im * (double)still.samples[i].re;
        power += (double)still.samples[i].re * (double)still.samples[i].re;
    }
    assert_near(hypot(re, im) / power, 1.0, 1e-3);
    for (size_t i = 0; i < still.count; i++) {
        double a = (double)moved.samples[i].re - re / power * (double)still.samples[i].re;
        double b = (double)moved.samples[i].im - im / power * (double)still.samples[i].re;
        error += a * a + b * b;
    }
    assert_at_most(mb_power_db(error / power), -80.0);
    free(moved.samples);
    free(still.samples);
    free(audio);
}

static size_t process_transmit(void *stage, const void *in, size_t n, void *out)
{
    return mb_transmit_process(stage, in, n, out);
}

static void reset_transmit(void *stage)
{
    mb_transmit_reset(stage);
}

static void the_output_does_not_depend_on_the_cuts(void **state)
{
    mb_transmit_settings settings = mb_transmit_settings_default();
    float *audio = calloc(20000, sizeof *audio);
    mb_transmit *transmit = NULL;

    (void)state;
    print_message("seed 801\n");
    settings.audio_rate_hz = 44100.0;
    settings.rate_hz = 96000.0;
    signal_voice_at(audio, 20000, 44100.0, 120.0, 801);
    audio[9000] = NAN;
    assert_ok(mb_transmit_create(&settings, &transmit));
    const stage_cuts cuts = {
        transmit, process_transmit, reset_transmit,  audio,
        20000,    sizeof *audio,    sizeof(mb_cf32), mb_transmit_output_bound(transmit, 20000)};
    assert_cuts_do_not_matter(&cuts);
    mb_transmit_destroy(transmit);
    free(audio);
}

/* Nothing in, nothing out: also when drained. */
static void no_audio_makes_no_emission(void **state)
{
    mb_transmit_settings settings = mb_transmit_settings_default();
    passage p = transmit_all(&settings, (const float[1]){0.0f}, 0);

    (void)state;
    assert_int_equal(p.count, 0);
    free(p.samples);
}

static void a_rate_too_low_says_how_much_it_takes(void **state)
{
    mb_transmit_settings settings = mb_transmit_settings_default();
    mb_transmit *transmit = NULL;

    (void)state;
    settings.rate_hz = 48000.0;
    settings.offset_hz = -30000.0;
    assert_fault(mb_transmit_create(&settings, &transmit), MB_ERROR_ARGUMENT, "rate_hz");
    assert_non_null(strstr(mb_last_fault()->text, "48000 Hz is too low"));
    assert_non_null(strstr(mb_last_fault()->text, "at least 71940 Hz")); /* 2.2 (2700 + 30000) */
    assert_null(transmit);
    settings.rate_hz = 71940.0;
    assert_ok(mb_transmit_create(&settings, &transmit));
    mb_transmit_destroy(transmit);
    settings = mb_transmit_settings_default();
    settings.rate_hz = 47999.0;
    assert_fault(mb_transmit_create(&settings, &transmit), MB_ERROR_ARGUMENT, "rate_hz");
}

static void each_bad_setting_is_named(void **state)
{
    mb_transmit_settings settings = mb_transmit_settings_default();
    mb_transmit *transmit = NULL;

    (void)state;
    settings.audio_rate_hz = 7000.0;
    assert_fault(mb_transmit_create(&settings, &transmit), MB_ERROR_ARGUMENT, "audio_rate_hz");
    settings = mb_transmit_settings_default();
    settings.rate_hz = NAN;
    assert_fault(mb_transmit_create(&settings, &transmit), MB_ERROR_ARGUMENT, "rate_hz");
    settings = mb_transmit_settings_default();
    settings.voice.peak = 2.0;
    assert_fault(mb_transmit_create(&settings, &transmit), MB_ERROR_ARGUMENT, "peak");
    settings = mb_transmit_settings_default();
    settings.product.iq_phase_deg = 90.0;
    assert_fault(mb_transmit_create(&settings, &transmit), MB_ERROR_ARGUMENT, "iq_phase_deg");
    assert_null(transmit);
}

static mb_status make_and_destroy(mb_modulator_kind kind)
{
    mb_transmit_settings settings = mb_transmit_settings_default();
    mb_transmit *transmit = NULL;

    settings.audio_rate_hz = 16000.0;
    settings.modulator = kind;
    mb_status status = mb_transmit_create(&settings, &transmit);
    assert_true((status == MB_OK) == (transmit != NULL));
    mb_transmit_destroy(transmit);
    return status;
}

static void lack_of_memory_is_told_and_nothing_leaks(void **state)
{
    (void)state;
    assert_survives_lack_of_memory(make_and_destroy(MB_MODULATOR_PRODUCT));
    assert_survives_lack_of_memory(make_and_destroy(MB_MODULATOR_EQUIVALENT));
    mb_transmit_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_first_sample_out_belongs_to_the_first_sample_in),
        cmocka_unit_test(a_message_about_the_centre_is_real),
        cmocka_unit_test(the_offset_only_moves_the_emission),
        cmocka_unit_test(the_output_does_not_depend_on_the_cuts),
        cmocka_unit_test(no_audio_makes_no_emission),
        cmocka_unit_test(a_rate_too_low_says_how_much_it_takes),
        cmocka_unit_test(each_bad_setting_is_named),
        cmocka_unit_test(lack_of_memory_is_told_and_nothing_leaks),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
