/* The decimator takes any part of any band to baseband: flat, on time, and free of what would fold into it.
 */
#include "first_stage.h"
#include "failing_memory.h"
#include "signals.h"
#include "stage_cuts.h"

enum { SEED = 3, LIMIT = 1 << 20 };

/* Full rate, rate of the baseband, frequency that goes to 0, half width, share of the folding bands that is
 * swept. */
typedef struct band {
    double in_hz, out_hz, offset_hz, passband_hz;
    size_t every;
} band;

static const band bands[] = {{20e6, 16000.0, 3.2e6, 3700.0, 5},       {2.4e6, 16000.0, -712345.6, 3700.0, 1},
                             {1.024e6, 16000.0, 511000.0, 3700.0, 1}, {250000.0, 16000.0, 12345.0, 3700.0, 1},
                             {44100.0, 16000.0, -3000.0, 3700.0, 1},  {48000.0, 48000.0, 1000.0, 3700.0, 1},
                             {2.4e6, 48000.0, 100000.0, 20000.0, 1},  {25e6, 44100.0, -12.5e6, 3000.0, 17},
                             {16000.0, 16000.0, 0.0, 3700.0, 1},      {96000.0, 16000.0, 0.0, 7000.0, 1}};

static mb_decimator_settings settings_of(const band *b)
{
    mb_decimator_settings settings = mb_decimator_settings_default();

    settings.rate_in_hz = b->in_hz;
    settings.rate_out_hz = b->out_hz;
    settings.offset_hz = b->offset_hz;
    settings.passband_hz = b->passband_hz;
    return settings;
}

static mb_decimator *made_decimator(const band *b)
{
    mb_decimator_settings settings = settings_of(b);
    mb_decimator *decimator = NULL;

    assert_ok(mb_decimator_create(&settings, &decimator));
    return decimator;
}

static mb_cf32 ones[LIMIT], wide[LIMIT], made[LIMIT];
static mb_ci16 wide_short[LIMIT];

static int fill_ones(void **state)
{
    (void)state;
    for (size_t i = 0; i < LIMIT; i++) {
        ones[i] = (mb_cf32){0.99f, 0.0f};
    }
    return 0;
}

/* Feeds a tone `frequency_hz` from the wanted middle and returns how many settled outputs stand in
 * made[skip...]. */
static size_t feed(mb_decimator *decimator, const band *b, double frequency_hz, double length_s,
                   bool is_short, size_t *skip)
{
    double delay_s = mb_decimator_delay_s(decimator);
    size_t count = (size_t)((2.0 * delay_s + length_s) * b->in_hz) + 2, out;
    mb_oscillator oscillator = {0, 0};

    assert_true(count <= LIMIT);
    mb_oscillator_set(&oscillator, b->offset_hz + frequency_hz, b->in_hz);
    mb_oscillator_rotate(&oscillator, ones, count, wide);
    mb_decimator_reset(decimator);
    if (is_short) {
        for (size_t i = 0; i < count; i++) {
            wide_short[i] =
                (mb_ci16){(int16_t)lrintf(wide[i].re * 32768.0f), (int16_t)lrintf(wide[i].im * 32768.0f)};
        }
        out = mb_decimator_process_ci16(decimator, wide_short, count, made);
    } else {
        out = mb_decimator_process_cf32(decimator, wide, count, made);
    }
    assert_true(out <= mb_decimator_output_bound(decimator, count));
    *skip = (size_t)(2.0 * delay_s * b->out_hz) + 2;
    return out - *skip;
}

static void the_passband_is_flat_and_on_time(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof bands / sizeof bands[0]; i++) {
        const band *b = &bands[i];
        mb_decimator *decimator = made_decimator(b);
        for (int k = -4; k <= 4; k++) {
            double frequency_hz = b->passband_hz * k / 4.0, re, im;
            size_t skip, kept = feed(decimator, b, frequency_hz, 0.003, k % 2 != 0, &skip);
            double delay_s = mb_decimator_delay_s(decimator), start_s = (double)skip / b->out_hz - delay_s;
            line_at(made + skip, kept, frequency_hz, b->out_hz, start_s, &re, &im);
            assert_near(mb_power_db(re * re + im * im) - mb_power_db(0.99 * 0.99), 0.0, 0.05);
            assert_near(atan2(im, re), 0.0, 1e-3); /* mixed first, then late by exactly the delay */
        }
        mb_decimator_destroy(decimator);
    }
}

/* The frequencies that fold into the passband: multiples of the rate after the first stage, and within the
 * middle of it multiples of the rate of the output. All others end in the part of the baseband that is not
 * promised. */
static double worst_fold_db(const band *b, bool is_short)
{
    mb_decimator_settings settings = settings_of(b);
    mb_decimator *decimator = made_decimator(b);
    size_t factor = mb_first_stage_factor(&settings), skip;
    double stage_hz = b->in_hz / (double)factor, worst_db = -400.0;
    mb_random random;

    mb_random_seed(&random, SEED, 0);
    for (size_t k = 1; 2 * k <= factor; k += b->every) {
        for (int side = -1; side <= 1; side += 2) {
            double place_hz = side * (double)k * stage_hz;
            double at_hz = place_hz + b->passband_hz * (2.0 * mb_random_uniform(&random) - 1.0);
            double edge_hz = place_hz + b->passband_hz * (k % 2 == 0 ? 1.0 : -1.0);
            size_t kept = feed(decimator, b, at_hz, 0.0015, is_short, &skip);
            worst_db = fmax(worst_db, mean_db(made + skip, kept));
            kept = feed(decimator, b, edge_hz, 0.0015, is_short, &skip);
            worst_db = fmax(worst_db, mean_db(made + skip, kept));
        }
    }
    for (double at_hz = b->out_hz; at_hz + b->passband_hz < 0.5 * stage_hz; at_hz += b->out_hz) {
        for (int k = -6; k <= 6; k++) {
            size_t kept = feed(decimator, b, at_hz + b->passband_hz * k / 6.0, 0.0015, is_short, &skip);
            worst_db = fmax(worst_db, mean_db(made + skip, kept));
        }
    }
    mb_decimator_destroy(decimator);
    return worst_db - mb_power_db(0.99 * 0.99);
}

static void what_would_fold_into_the_passband_is_gone(void **state)
{
    (void)state;
    print_message("seed %d\n", SEED);
    for (size_t i = 0; i < sizeof bands / sizeof bands[0]; i++) {
        double whole_db = worst_fold_db(&bands[i], false), short_db = worst_fold_db(&bands[i], true);
        print_message("%g to %g Hz: cf32 %.1f dB, ci16 %.1f dB\n", bands[i].in_hz, bands[i].out_hz, whole_db,
                      short_db);
        assert_at_most(whole_db, -80.0);
        assert_at_most(short_db, -80.0);
    }
}

static void any_rate_and_offset_will_do(void **state)
{
    mb_random random;

    (void)state;
    mb_random_seed(&random, SEED, 1);
    for (int i = 0; i < 24; i++) {
        double in_hz = 16000.0 * pow(60.0, mb_random_uniform(&random));
        double offset_hz = in_hz * (mb_random_uniform(&random) - 0.5);
        band b = {in_hz, 16000.0, offset_hz, 1600.0 + 4000.0 * mb_random_uniform(&random), 1};
        double whole_db = worst_fold_db(&b, false), short_db = worst_fold_db(&b, true);
        if (whole_db > -80.0 || short_db > -80.0) {
            fail_msg("%g Hz, offset %g Hz, half width %g Hz: cf32 %.1f dB, ci16 %.1f dB", b.in_hz,
                     b.offset_hz, b.passband_hz, whole_db, short_db);
        }
    }
}

static void live_reception_waits_less_than_6_ms(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof bands / sizeof bands[0]; i++) {
        mb_decimator *decimator = made_decimator(&bands[i]);
        assert_at_most(mb_decimator_delay_s(decimator), 0.006);
        mb_decimator_destroy(decimator);
    }
}

static size_t run_whole(void *stage, const void *in, size_t n, void *out)
{
    return mb_decimator_process_cf32(stage, in, n, out);
}

static size_t run_short(void *stage, const void *in, size_t n, void *out)
{
    return mb_decimator_process_ci16(stage, in, n, out);
}

static void reset(void *stage)
{
    mb_decimator_reset(stage);
}

static void cuts_do_not_matter(void **state)
{
    static const size_t tried[] = {1, 3, 4, 5};

    (void)state;
    tone(1000.0, 48000.0, 0.7, 12000, wide);
    for (size_t i = 0; i < 12000; i++) {
        wide_short[i] = (mb_ci16){(int16_t)(32000.0f * wide[i].re), (int16_t)(32000.0f * wide[i].im)};
    }
    for (size_t i = 0; i < sizeof tried / sizeof tried[0]; i++) {
        mb_decimator *decimator = made_decimator(&bands[tried[i]]);
        size_t bound = mb_decimator_output_bound(decimator, 12000);
        stage_cuts whole = {decimator, run_whole,       reset,           wide,
                            12000,     sizeof(mb_cf32), sizeof(mb_cf32), bound};
        stage_cuts cut = {decimator, run_short,       reset,           wide_short,
                          12000,     sizeof(mb_ci16), sizeof(mb_cf32), bound};
        assert_cuts_do_not_matter(&whole);
        assert_cuts_do_not_matter(&cut);
        mb_decimator_destroy(decimator);
    }
}

static void what_is_no_number_counts_as_zero(void **state)
{
    static const size_t tried[] = {1, 4};

    (void)state;
    for (size_t i = 0; i < 2; i++) {
        mb_decimator *decimator = made_decimator(&bands[tried[i]]);
        memset(wide, 0, 9000 * sizeof *wide);
        wide[5000].re = INFINITY;
        wide[5001].im = NAN;
        size_t count = mb_decimator_process_cf32(decimator, wide, 9000, made);
        for (size_t k = 0; k < count; k++) {
            assert_true(made[k].re == 0.0f && made[k].im == 0.0f);
        }
        assert_int_equal(mb_decimator_state(decimator).non_finite, 2);
        mb_decimator_destroy(decimator);
    }
}

static void full_scale_shorts_do_not_wrap(void **state)
{
    mb_decimator *decimator = made_decimator(&bands[0]);
    size_t count = 400000, outputs;

    (void)state;
    for (size_t i = 0; i < count;
         i++) { /* the largest samples that follow the wanted frequency, 0.16 of the rate */
        double turns = fmod(0.16 * (double)i, 1.0);
        wide_short[i].re = cos(2.0 * MB_PI * turns) >= 0.0 ? INT16_MAX : INT16_MIN;
        wide_short[i].im = sin(2.0 * MB_PI * turns) >= 0.0 ? INT16_MAX : INT16_MIN;
    }
    outputs = mb_decimator_process_ci16(decimator, wide_short, count, made);
    for (size_t k = 20; k < outputs; k++) { /* line of a square wave of 25 samples' period: near 4 / pi */
        assert_near(hypot((double)made[k].re, (double)made[k].im), 4.0 / MB_PI, 0.03);
    }
    mb_decimator_destroy(decimator);
}

static void fault(double in_hz, double out_hz, double offset_hz, double passband_hz, const char *field)
{
    mb_decimator_settings settings = {in_hz, out_hz, offset_hz, passband_hz, 80.0};
    mb_decimator *decimator = NULL;

    assert_fault(mb_decimator_create(&settings, &decimator), MB_ERROR_ARGUMENT, field);
    assert_null(decimator);
}

static void wrong_settings_and_lack_of_memory_are_told(void **state)
{
    mb_decimator_settings settings = mb_decimator_settings_default();
    mb_decimator *decimator = NULL;

    (void)state;
    fault(NAN, 16000.0, 0.0, 3700.0, "rate_in_hz");
    fault(12000.0, 16000.0, 0.0, 3700.0, "rate_out_hz");
    fault(48000.0, 16000.0, 24001.0, 3700.0, "offset_hz");
    fault(48000.0, 16000.0, 0.0, 8000.0, "passband_hz");
    settings.attenuation_db = 130.0;
    assert_fault(mb_decimator_create(&settings, &decimator), MB_ERROR_ARGUMENT, "attenuation_db");
    settings = mb_decimator_settings_default();
    assert_survives_lack_of_memory(mb_decimator_create(&settings, &decimator));
    mb_decimator_destroy(decimator);
    mb_decimator_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_passband_is_flat_and_on_time),
        cmocka_unit_test(what_would_fold_into_the_passband_is_gone),
        cmocka_unit_test(any_rate_and_offset_will_do),
        cmocka_unit_test(live_reception_waits_less_than_6_ms),
        cmocka_unit_test(cuts_do_not_matter),
        cmocka_unit_test(what_is_no_number_counts_as_zero),
        cmocka_unit_test(full_scale_shorts_do_not_wrap),
        cmocka_unit_test(wrong_settings_and_lack_of_memory_are_told),
    };
    return cmocka_run_group_tests(tests, fill_ones, NULL);
}
