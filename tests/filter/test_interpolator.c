/* The interpolator puts baseband anywhere in a wide band: flat, on time, and with no image left to see. */
#include "failing_memory.h"
#include "signals.h"
#include "stage_cuts.h"

enum { LENGTH = 1 << 18 };

/* Rate of the baseband, full rate, where 0 goes, half width. */
typedef struct band {
    double in_hz, out_hz, offset_hz, passband_hz;
} band;

static const band bands[] = {{48000.0, 48000.0, 6240.0, 3000.0},   {48000.0, 96000.0, -20000.0, 3000.0},
                             {48000.0, 240000.0, 31200.0, 3000.0}, {48000.0, 1.024e6, 133120.0, 3000.0},
                             {48000.0, 2.4e6, -312000.0, 3000.0},  {48000.0, 20e6, 2.6e6, 3000.0},
                             {16000.0, 20e6, -3e6, 3700.0},        {16000.0, 44100.0, 1000.0, 3700.0},
                             {192000.0, 2.4e6, 1000.0, 80000.0},   {48000.0, 144000.3, 0.0, 3000.0}};

static mb_cf32 base[LENGTH], out[LENGTH], spectrum[LENGTH];

static mb_interpolator *made_interpolator(const band *b)
{
    mb_interpolator_settings settings = mb_interpolator_settings_default();
    mb_interpolator *interpolator = NULL;

    settings.rate_in_hz = b->in_hz;
    settings.rate_out_hz = b->out_hz;
    settings.offset_hz = b->offset_hz;
    settings.passband_hz = b->passband_hz;
    assert_ok(mb_interpolator_create(&settings, &interpolator));
    return interpolator;
}

/* Settled outputs of a tone in the passband, from out[*skip] on. */
static size_t feed(mb_interpolator *interpolator, const band *b, double frequency_hz, size_t *skip)
{
    double delay_s = mb_interpolator_delay_s(interpolator);
    size_t count = (size_t)fmin(8192.0, 0.9 * LENGTH * b->in_hz / b->out_hz);

    tone(frequency_hz, b->in_hz, 1.0, count, base);
    assert_true(mb_interpolator_output_bound(interpolator, count) <= LENGTH);
    mb_interpolator_reset(interpolator);
    size_t made = mb_interpolator_process(interpolator, base, count, out);
    *skip = (size_t)((2.0 * delay_s + 50e-6) * b->out_hz) + 2;
    return made - *skip;
}

static void the_passband_is_flat_and_on_time(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof bands / sizeof bands[0]; i++) {
        const band *b = &bands[i];
        mb_interpolator *interpolator = made_interpolator(b);
        double delay_s = mb_interpolator_delay_s(interpolator), re, im;
        for (int k = -2; k <= 2; k++) {
            double frequency_hz = b->passband_hz * k / 2.0;
            size_t skip, kept = feed(interpolator, b, frequency_hz, &skip);
            line_at(out + skip, kept, frequency_hz + b->offset_hz, b->out_hz, (double)skip / b->out_hz, &re,
                    &im);
            double late =
                -2.0 * MB_PI * fmod(frequency_hz * delay_s, 1.0); /* the tone is late, the mixing is not */
            assert_near(mb_power_db(re * re + im * im), 0.0, 0.05);
            assert_near(remainder(atan2(im, re) - late, 2.0 * MB_PI), 0.0, 1e-3);
        }
        mb_interpolator_destroy(interpolator);
    }
}

/* Largest line and mean floor of a spectrum apart from the tone, dB relative to it. Kaiser window of shape
 * 14: side lobes below -105 dB beyond 6 bins of a line. */
static void look(const band *b, const mb_cf32 *samples, size_t length, double frequency_hz,
                 double *line_level_db, double *floor_db)
{
    double *window = calloc(length, sizeof *window), sum = 0.0, square = 0.0, power = 0.0, most = 0.0;
    mb_fft *fft = NULL;
    size_t quiet = 0;

    mb_kaiser_window(length, 14.0, window);
    for (size_t i = 0; i < length; i++) {
        spectrum[i] = (mb_cf32){samples[i].re * (float)window[i], samples[i].im * (float)window[i]};
        sum += window[i];
        square += window[i] * window[i];
    }
    assert_ok(mb_fft_create(length, false, &fft));
    mb_fft_process(fft, spectrum, spectrum);
    double tone_bin = (b->offset_hz + frequency_hz) / b->out_hz * (double)length;
    for (size_t i = 0; i < length; i++) {
        double away = fabs(remainder((double)i - tone_bin, (double)length));
        double level = ((double)spectrum[i].re * (double)spectrum[i].re +
                        (double)spectrum[i].im * (double)spectrum[i].im) /
                       (sum * sum);
        most = away > 8.0 && level > most ? level : most;
        if (away > 8.0 && level < 1e-14) { /* no line here */
            power += level * sum * sum / square;
            quiet++;
        }
    }
    *line_level_db = mb_power_db(most);
    *floor_db = mb_power_db(power / (double)quiet);
    mb_fft_destroy(fft);
    free(window);
}

static void images_are_below_90_dbc_and_the_floor_below_120_dbfs(void **state)
{
    static const double shares[] = {0.03, -0.5, 1.0};

    (void)state;
    for (size_t i = 0; i < sizeof bands / sizeof bands[0]; i++) {
        const band *b = &bands[i];
        mb_interpolator *interpolator = made_interpolator(b);
        double worst_db = -400.0, worst_floor_db = -400.0;
        for (size_t s = 0; s < 3; s++) {
            double frequency_hz = shares[s] * b->passband_hz, line_level_db, floor_db;
            size_t skip, kept = feed(interpolator, b, frequency_hz, &skip), length = 1024;
            while (2 * length <= kept) {
                length *= 2;
            }
            look(b, out + skip, length, frequency_hz, &line_level_db, &floor_db);
            worst_db = fmax(worst_db, line_level_db);
            worst_floor_db = fmax(worst_floor_db, floor_db);
        }
        print_message("%g to %g Hz: images %.1f dBc, floor %.1f dBFS\n", b->in_hz, b->out_hz, worst_db,
                      worst_floor_db);
        assert_at_most(worst_db, -90.0);
        assert_at_most(worst_floor_db, -120.0);
        mb_interpolator_destroy(interpolator);
    }
}

static void what_goes_up_comes_down_again(void **state)
{
    mb_interpolator_settings up = {16000.0, 2.4e6, 700000.0, 3700.0, 90.0};
    mb_decimator_settings down = {2.4e6, 16000.0, 700000.0, 3700.0, 80.0};
    mb_interpolator *interpolator = NULL;
    mb_decimator *decimator = NULL;
    double re, im;

    (void)state;
    assert_ok(mb_interpolator_create(&up, &interpolator));
    assert_ok(mb_decimator_create(&down, &decimator));
    tone(-1234.0, 16000.0, 1.0, 1500, base);
    size_t count = mb_interpolator_process(interpolator, base, 1500, out);
    size_t made = mb_decimator_process_cf32(decimator, out, count, spectrum);
    double delay_s = mb_interpolator_delay_s(interpolator) + mb_decimator_delay_s(decimator);
    line_at(spectrum + 100, made - 100, -1234.0, 16000.0, 100.0 / 16000.0 - delay_s, &re, &im);
    /* the interpolator's delay lies before its mixing, the decimator's behind its own: no phase is left */
    assert_near(re, 1.0, 1e-3);
    assert_near(im, 0.0, 1e-4);
    mb_interpolator_destroy(interpolator);
    mb_decimator_destroy(decimator);
}

static size_t run(void *stage, const void *in, size_t n, void *to)
{
    return mb_interpolator_process(stage, in, n, to);
}

static void reset(void *stage)
{
    mb_interpolator_reset(stage);
}

static void cuts_do_not_matter(void **state)
{
    (void)state;
    for (size_t i = 0; i < 5; i++) {
        mb_interpolator *interpolator = made_interpolator(&bands[i]);
        tone(700.0, bands[i].in_hz, 0.5, 3000, base);
        stage_cuts cuts = {interpolator,
                           run,
                           reset,
                           base,
                           3000,
                           sizeof(mb_cf32),
                           sizeof(mb_cf32),
                           mb_interpolator_output_bound(interpolator, 3000)};
        assert_cuts_do_not_matter(&cuts);
        mb_interpolator_destroy(interpolator);
    }
}

static void what_is_no_number_counts_as_zero(void **state)
{
    (void)state;
    for (size_t i = 0; i < 3; i += 2) {
        mb_interpolator *interpolator = made_interpolator(&bands[i]);
        memset(base, 0, 500 * sizeof *base);
        base[3].re = NAN;
        base[400].im = -INFINITY;
        size_t made = mb_interpolator_process(interpolator, base, 500, out);
        for (size_t k = 0; k < made; k++) {
            assert_true(out[k].re == 0.0f && out[k].im == 0.0f);
        }
        assert_int_equal(mb_interpolator_state(interpolator).non_finite, 2);
        mb_interpolator_destroy(interpolator);
    }
}

static void fault(double in_hz, double out_hz, double offset_hz, double passband_hz, const char *field)
{
    mb_interpolator_settings settings = {in_hz, out_hz, offset_hz, passband_hz, 90.0};
    mb_interpolator *interpolator = NULL;

    assert_fault(mb_interpolator_create(&settings, &interpolator), MB_ERROR_ARGUMENT, field);
    assert_null(interpolator);
}

static void wrong_settings_and_lack_of_memory_are_told(void **state)
{
    mb_interpolator_settings settings = mb_interpolator_settings_default();
    mb_interpolator *interpolator = NULL;

    (void)state;
    fault(-1.0, 48000.0, 0.0, 3000.0, "rate_in_hz");
    fault(48000.0, 44100.0, 0.0, 3000.0, "rate_out_hz");
    fault(48000.0, 240000.0, 120001.0, 3000.0, "offset_hz");
    fault(48000.0, 240000.0, 0.0, 24000.0, "passband_hz");
    settings.attenuation_db = 0.0;
    assert_fault(mb_interpolator_create(&settings, &interpolator), MB_ERROR_ARGUMENT, "attenuation_db");
    settings = mb_interpolator_settings_default();
    settings.rate_out_hz = 2.4e6;
    assert_survives_lack_of_memory(mb_interpolator_create(&settings, &interpolator));
    mb_interpolator_destroy(interpolator);
    mb_interpolator_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_passband_is_flat_and_on_time),
        cmocka_unit_test(images_are_below_90_dbc_and_the_floor_below_120_dbfs),
        cmocka_unit_test(what_goes_up_comes_down_again),
        cmocka_unit_test(cuts_do_not_matter),
        cmocka_unit_test(what_is_no_number_counts_as_zero),
        cmocka_unit_test(wrong_settings_and_lack_of_memory_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
