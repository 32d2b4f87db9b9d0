/* Gain control: the level that speech is brought to, hold in pauses, and the contract of a stage. */
#include "carrier/signals.h"
#include "failing_memory.h"
#include "mirrorband/detect.h"
#include "stage_cuts.h"

enum { COUNT = 16000 * 30 };

static float input[COUNT], output[COUNT];

static mb_gain_control *make_control(void)
{
    const mb_gain_control_settings settings = mb_gain_control_settings_default();
    mb_gain_control *control = NULL;

    assert_ok(mb_gain_control_create(&settings, &control));
    return control;
}

/*
 * Speech, white noise and a tone of any level come out at -20 dBFS root mean square: 0.5 dB asked, of which
 * the syllables moving a mean of 1 s take 0.2. Measured over the last 10 s of 30: from -60 dBFS the mean has
 * 40 dB to fall, 9.2 release times.
 */
static void any_level_is_brought_to_the_one_wanted(void **state)
{
    (void)state;
    print_message("seeds 701, 702\n");
    for (int kind = 0; kind < 3; kind++) {
        for (int step = 0; step < 4; step++) {
            double level_db = -60.0 + 20.0 * (double)step;
            mb_gain_control *control = make_control();
            signal_voice(input, COUNT, 120.0, 701);
            if (kind == 1) {
                signal_white(input, COUNT, 702);
            }
            for (size_t i = 0; i < COUNT && kind == 2; i++) {
                input[i] = (float)sin(2.0 * MB_PI * 700.0 * (double)i / SIGNAL_RATE_HZ);
            }
            signal_scale(input, COUNT, sqrt(mb_db_power(level_db) / signal_power(input, COUNT)));
            mb_gain_control_process(control, input, COUNT, output);
            assert_near(mb_power_db(signal_power(output + 320000, COUNT - 320000)), -20.0, 0.5);
            assert_near(mb_gain_control_gain_db(control), -20.0 - level_db, 3.0);
            mb_gain_control_destroy(control);
        }
    }
}

/* A voice 40 dB louder is followed within a quarter of a second, to 9 dB above the level wanted. */
static void a_louder_voice_is_followed_fast(void **state)
{
    mb_gain_control *control = make_control();
    const size_t step = 160000, later = step + 4000;

    (void)state;
    print_message("seed 711\n");
    signal_white(input, COUNT, 711);
    signal_scale(input, step, 1e-3);
    signal_scale(input + step, COUNT - step, 0.1);
    mb_gain_control_process(control, input, COUNT, output);
    assert_at_most(mb_power_db(signal_power(output + later, 4000)), -20.0 + 9.5);
    for (size_t i = 0; i < COUNT; i++) {
        assert_at_most(fabs((double)output[i]), 1.0);
    }
    mb_gain_control_destroy(control);
}

static void the_gain_does_not_rise_while_held(void **state)
{
    mb_gain_control *control = make_control();

    (void)state;
    signal_white(input, COUNT, 721);
    mb_gain_control_process(control, input, 48000, output);
    double before_db = mb_gain_control_gain_db(control);
    signal_scale(input, COUNT, 0.01);
    mb_gain_control_hold(control, true);
    for (size_t at = 0; at < 160000; at += 1000) {
        mb_gain_control_process(control, input + at, 1000, output);
        assert_at_most(mb_gain_control_gain_db(control), before_db + 1e-9);
    }
    mb_gain_control_hold(control, false);
    mb_gain_control_process(control, input, 160000, output);
    assert_at_least(mb_gain_control_gain_db(control), before_db + 35.0);
    mb_gain_control_destroy(control);
}

static void the_gain_stops_at_its_limit(void **state)
{
    mb_gain_control_settings settings = mb_gain_control_settings_default();
    mb_gain_control *control = NULL;

    (void)state;
    settings.gain_limit_db = 30.0;
    settings.release_s = 0.1;
    assert_ok(mb_gain_control_create(&settings, &control));
    memset(input, 0, sizeof input);
    mb_gain_control_process(control, input, 160000, output);
    assert_near(mb_gain_control_gain_db(control), 30.0, 1e-9);
    mb_gain_control_reset(control);
    assert_near(mb_gain_control_gain_db(control), 0.0, 1e-9);
    mb_gain_control_destroy(control);
}

static size_t process_control(void *stage, const void *in, size_t n, void *out)
{
    mb_gain_control_process(stage, in, n, out);
    return n;
}

static void reset_control(void *stage)
{
    mb_gain_control_reset(stage);
}

static void the_output_does_not_depend_on_the_cuts_and_bad_samples_are_zero(void **state)
{
    mb_gain_control *control = make_control();

    (void)state;
    signal_white(input, 20000, 731);
    input[7000] = NAN;
    input[7001] = INFINITY;
    const stage_cuts cuts = {control, process_control, reset_control, input,
                             20000,   sizeof *input,   sizeof *input, 20000};
    assert_cuts_do_not_matter(&cuts);
    mb_gain_control_reset(control);
    mb_gain_control_process(control, input, 20000, output);
    assert_near(output[7000], 0.0, 0.0);
    assert_near(output[7001], 0.0, 0.0);
    assert_true(isfinite(mb_gain_control_gain_db(control)));
    mb_gain_control_destroy(control);
}

static void each_bad_setting_is_named(void **state)
{
    static const struct {
        size_t offset;
        double value;
        const char *field;
    } rows[] = {
        {offsetof(mb_gain_control_settings, rate_hz), 200e3, "rate_hz"},
        {offsetof(mb_gain_control_settings, level_dbfs), -5.0, "level_dbfs"},
        {offsetof(mb_gain_control_settings, attack_s), 0.0, "attack_s"},
        {offsetof(mb_gain_control_settings, release_s), NAN, "release_s"},
        {offsetof(mb_gain_control_settings, gain_limit_db), 121.0, "gain_limit_db"},
    };

    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        mb_gain_control_settings settings = mb_gain_control_settings_default();
        mb_gain_control *control = NULL;
        memcpy((char *)&settings + rows[i].offset, &rows[i].value, sizeof rows[i].value);
        assert_fault(mb_gain_control_create(&settings, &control), MB_ERROR_ARGUMENT, rows[i].field);
        assert_null(control);
    }
}

static mb_status make_and_destroy(void)
{
    const mb_gain_control_settings settings = mb_gain_control_settings_default();
    mb_gain_control *control = NULL;
    mb_status status = mb_gain_control_create(&settings, &control);

    mb_gain_control_destroy(control);
    return status;
}

static void lack_of_memory_is_told(void **state)
{
    (void)state;
    assert_survives_lack_of_memory(make_and_destroy());
    mb_gain_control_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(any_level_is_brought_to_the_one_wanted),
        cmocka_unit_test(a_louder_voice_is_followed_fast),
        cmocka_unit_test(the_gain_does_not_rise_while_held),
        cmocka_unit_test(the_gain_stops_at_its_limit),
        cmocka_unit_test(the_output_does_not_depend_on_the_cuts_and_bad_samples_are_zero),
        cmocka_unit_test(each_bad_setting_is_named),
        cmocka_unit_test(lack_of_memory_is_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
