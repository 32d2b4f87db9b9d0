/* Two paths: their powers, delay and notches, named channels, and the phase for coherent detection. */
#include "samples.h"

#include "channel_reference.h"

enum { SEED = 520 };

/* Mean powers of the two path gains and their cross product, over many seeds. */
typedef struct path_moments {
    double power[2], cross_re, cross_im;
} path_moments;

static path_moments moments_over_seeds(const mb_channel_settings *base, uint64_t seeds)
{
    path_moments moments = {{0.0, 0.0}, 0.0, 0.0};
    mb_channel_settings settings = *base;

    for (uint64_t seed = 0; seed < seeds; seed++) {
        settings.seed = SEED + seed;
        mb_channel *channel = channel_of(&settings);
        mb_truth truth = mb_channel_truth(channel);
        for (int k = 0; k < 2; k++) {
            double square = truth.path_re[k] * truth.path_re[k] + truth.path_im[k] * truth.path_im[k];
            moments.power[k] += square / (double)seeds;
        }
        moments.cross_re +=
            (truth.path_re[0] * truth.path_re[1] + truth.path_im[0] * truth.path_im[1]) / (double)seeds;
        moments.cross_im +=
            (truth.path_im[0] * truth.path_re[1] - truth.path_re[0] * truth.path_im[1]) / (double)seeds;
        mb_channel_destroy(channel);
    }
    return moments;
}

/* Four standard deviations: those of a mean of 2000 exponential powers 1/2, and of their cross products. */
static void paths_are_independent_and_share_a_power_of_one(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();

    (void)state;
    print_message("seeds from %d\n", SEED);
    assert_ok(mb_channel_settings_fading(&settings, "mid-moderate"));
    path_moments moments = moments_over_seeds(&settings, 2000);
    for (int k = 0; k < 2; k++) {
        assert_near(moments.power[k], 0.5, 4.0 * 0.5 / sqrt(2000.0));
    }
    assert_near(moments.cross_re, 0.0, 4.0 * 0.5 / sqrt(4000.0));
    assert_near(moments.cross_im, 0.0, 4.0 * 0.5 / sqrt(4000.0));
}

static void the_second_path_has_the_level_asked_for(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();

    (void)state;
    assert_ok(mb_channel_settings_fading(&settings, "gentle"));
    path_moments moments = moments_over_seeds(&settings, 2000);
    double share = 1.0 / (1.0 + mb_db_power(-12.0));
    assert_near(moments.power[0] / share, 1.0, 4.0 / sqrt(2000.0));
    assert_near(moments.power[1] / (1.0 - share), 1.0, 4.0 / sqrt(2000.0));
    settings.first_path_steady = true;
    moments = moments_over_seeds(&settings, 10);
    assert_near(moments.power[0], share, 1e-12);
}

/* Response of paths that stand still against scipy.signal.freqz; notches every 1/delay = 500 Hz (FACTS D). */
static void notches_are_one_over_the_delay_apart(void **state)
{
    enum { COUNT = 48096, SETTLED = 96 };
    mb_cf32 *samples = samples_of(COUNT);
    mb_channel_settings settings = mb_channel_settings_default();

    (void)state;
    settings.paths = 2;
    settings.delay_s = 2e-3;
    mb_channel *channel = channel_of(&settings);
    for (size_t k = 0; k < sizeof notch_response / sizeof notch_response[0]; k++) {
        fill_tone(samples, COUNT, notch_response[k].frequency_hz / 48e3, 1.0);
        mb_channel_reset(channel);
        mb_channel_process(channel, samples, COUNT, samples);
        double power = power_of(samples + SETTLED, COUNT - SETTLED);
        assert_near(mb_power_db(power), notch_response[k].gain_db, 1e-3);
    }
    for (int notch = -6; notch < 6; notch++) {
        double notch_hz = 250.0 + 500.0 * notch;
        fill_tone(samples, COUNT, notch_hz / 48e3, 1.0);
        mb_channel_reset(channel);
        mb_channel_process(channel, samples, COUNT, samples);
        assert_at_most(mb_power_db(power_of(samples + SETTLED, COUNT - SETTLED)), -120.0); /* float samples */
    }
    mb_channel_destroy(channel);
    free(samples);
}

/* To within half a sample, and the channel tells. */
static void the_delay_is_rounded_to_a_sample(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 samples[8] = {{1.0f, 0.0f}};

    (void)state;
    settings.rate_hz = 8000.0;
    settings.paths = 2;
    settings.delay_s = 0.7e-3; /* 5.6 samples */
    mb_channel *channel = channel_of(&settings);
    assert_near(mb_channel_state(channel).delay_s, 6.0 / 8000.0, 1e-15);
    mb_channel_process(channel, samples, 8, samples);
    for (int n = 0; n < 8; n++) {
        assert_near(samples[n].re, n == 0 || n == 6 ? sqrt(0.5) : 0.0, 1e-7);
    }
    mb_channel_destroy(channel);
}

/* FACTS D, table of ITU-R F.1487 Annex 3. */
static void presets_are_those_of_the_recommendation(void **state)
{
    static const struct {
        const char *name;
        double delay_s, spread_hz;
    } rows[] = {
        {"low-quiet", 0.5e-3, 0.5},       {"low-moderate", 2e-3, 1.5}, {"low-disturbed", 6e-3, 10.0},
        {"mid-quiet", 0.5e-3, 0.1},       {"mid-moderate", 1e-3, 0.5}, {"mid-disturbed", 2e-3, 1.0},
        {"mid-near-vertical", 7e-3, 1.0}, {"high-quiet", 1e-3, 0.5},   {"high-moderate", 3e-3, 10.0},
        {"high-disturbed", 7e-3, 30.0},   {"gentle", 0.5e-3, 0.05},
    };
    const size_t count = sizeof rows / sizeof rows[0];

    (void)state;
    for (size_t k = 0; k < count; k++) {
        double delay_s = 0.0, spread_hz = 0.0;
        assert_string_equal(mb_fading_preset_name(k), rows[k].name);
        assert_ok(mb_fading_preset(rows[k].name, &delay_s, &spread_hz));
        assert_true(delay_s == rows[k].delay_s && spread_hz == rows[k].spread_hz);
    }
    assert_null(mb_fading_preset_name(count));
}

static void an_unknown_preset_is_told_with_the_names_there_are(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    double delay_s = 7.0;

    (void)state;
    assert_fault(mb_fading_preset("mid-awful", &delay_s, NULL), MB_ERROR_ARGUMENT, "fading");
    assert_non_null(strstr(mb_last_fault()->text, "mid-awful"));
    assert_non_null(strstr(mb_last_fault()->text, "high-disturbed"));
    assert_true(delay_s == 7.0);
    assert_fault(mb_channel_settings_fading(&settings, ""), MB_ERROR_ARGUMENT, "fading");
    assert_int_equal(settings.paths, 0);
    assert_ok(mb_channel_settings_fading(&settings, "high-quiet"));
    assert_int_equal(settings.paths, 2);
    assert_ok(mb_channel_settings_fading(&settings, "none"));
    assert_int_equal(settings.paths, 0);
}

/* Against a maximum of the in-phase power found by search (scipy.optimize; trapezoids of 0.1 Hz, tolerance of
 * its minimum 1e-6). */
static void the_coherent_phase_maximises_the_in_phase_power(void **state)
{
    (void)state;
    for (size_t k = 0; k < sizeof best_phases / sizeof best_phases[0]; k++) {
        const double re[2] = {best_phases[k].a_re, best_phases[k].b_re};
        const double im[2] = {best_phases[k].a_im, best_phases[k].b_im};
        double phase = mb_fading_phase(re, im, best_phases[k].delay_s, 300.0, 2700.0);
        assert_near(remainder(phase - best_phases[k].phase_rad, 2.0 * MB_PI), 0.0, 1e-5);
        assert_true(phase > -MB_PI - 1e-12 && phase <= MB_PI + 1e-12);
    }
}

static void the_coherent_phase_of_one_path_is_its_own(void **state)
{
    (void)state;
    for (int tenth = -31; tenth <= 31; tenth++) {
        double angle = tenth / 10.0;
        const double re[2] = {2.0 * cos(angle), 0.0}, im[2] = {2.0 * sin(angle), 0.0};
        assert_near(mb_fading_phase(re, im, 1e-3, 300.0, 2700.0), angle, 1e-12);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(paths_are_independent_and_share_a_power_of_one),
        cmocka_unit_test(the_second_path_has_the_level_asked_for),
        cmocka_unit_test(notches_are_one_over_the_delay_apart),
        cmocka_unit_test(the_delay_is_rounded_to_a_sample),
        cmocka_unit_test(presets_are_those_of_the_recommendation),
        cmocka_unit_test(an_unknown_preset_is_told_with_the_names_there_are),
        cmocka_unit_test(the_coherent_phase_maximises_the_in_phase_power),
        cmocka_unit_test(the_coherent_phase_of_one_path_is_its_own),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
