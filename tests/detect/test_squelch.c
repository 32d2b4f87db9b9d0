/* Squelch on lock quality: hysteresis, hang, fades, and the contract of a stage. */
#include "failing_memory.h"
#include "mirrorband/detect.h"
#include "stage_cuts.h"

enum { RATE = 16000, COUNT = 2 * RATE };

static float ones[COUNT], output[COUNT];

static mb_squelch *make_squelch(void)
{
    mb_squelch_settings settings = mb_squelch_settings_default();
    mb_squelch *squelch = NULL;

    settings.open_quality = 0.4;
    settings.close_quality = 0.2;
    settings.hang_s = 0.5;
    settings.fade_s = 0.01;
    assert_ok(mb_squelch_create(&settings, &squelch));
    for (size_t i = 0; i < COUNT; i++) {
        ones[i] = 1.0f;
    }
    return squelch;
}

/* Reports, then a time of ones; whether it is open at the end. */
static bool open_after(mb_squelch *squelch, bool tracked, double quality, double seconds)
{
    mb_squelch_report(squelch, tracked, quality);
    mb_squelch_process(squelch, ones, (size_t)lround(seconds * RATE), output);
    return mb_squelch_is_open(squelch);
}

static void it_opens_and_closes_with_hysteresis(void **state)
{
    mb_squelch *squelch = make_squelch();

    (void)state;
    assert_false(open_after(squelch, false, 0.9, 0.1)); /* nothing tracked: quality says nothing */
    assert_false(open_after(squelch, true, 0.3, 0.1));  /* above close, below open */
    assert_true(open_after(squelch, true, 0.4, 0.1));
    assert_true(open_after(squelch, true, 0.3, 1.0)); /* stays open between the two */
    assert_true(open_after(squelch, true, 0.2, 1.0));
    assert_true(open_after(squelch, true, 0.19, 0.4)); /* hangs */
    assert_false(open_after(squelch, true, 0.19, 0.2));
    assert_false(open_after(squelch, true, 0.3, 1.0));
    mb_squelch_destroy(squelch);
}

/* Stays open hang_s into a pause, to the sample, and the wait starts anew with each word. */
static void it_hangs_over_pauses(void **state)
{
    mb_squelch *squelch = make_squelch();

    (void)state;
    assert_true(open_after(squelch, true, 0.9, 0.1));
    assert_true(open_after(squelch, false, 0.9, 0.45));
    assert_true(open_after(squelch, true, 0.9, 0.01));
    assert_true(open_after(squelch, false, 0.9, 0.5));
    assert_false(open_after(squelch, false, 0.9, 1.0 / RATE));
    mb_squelch_destroy(squelch);
}

/* Closed: zeros. Open: the input itself. Between: never more than 1/fade a sample, 0.01 s x 16 kHz = 160. */
static void fades_make_no_clicks(void **state)
{
    const double most = 1.0 / 160.0 + 1e-6;
    mb_squelch *squelch = make_squelch();
    float last = 0.0f;

    (void)state;
    (void)open_after(squelch, false, 0.0, 0.1);
    for (size_t i = 0; i < RATE / 10; i++) {
        assert_near(output[i], 0.0, 0.0);
    }
    for (int opens = 1; opens >= 0; opens--) {
        (void)open_after(squelch, opens == 1, 0.9, 1.0);
        for (size_t i = 0; i < RATE; i++) {
            assert_at_most(fabs((double)output[i] - (double)last), most);
            last = output[i];
        }
        assert_near(last, opens, 0.0);
    }
    mb_squelch_destroy(squelch);
}

static void a_reset_squelch_is_closed(void **state)
{
    mb_squelch *squelch = make_squelch();

    (void)state;
    assert_true(open_after(squelch, true, 0.9, 0.5));
    mb_squelch_reset(squelch);
    assert_false(mb_squelch_is_open(squelch));
    mb_squelch_process(squelch, ones, 100, output);
    for (size_t i = 0; i < 100; i++) {
        assert_near(output[i], 0.0, 0.0);
    }
    mb_squelch_destroy(squelch);
}

static size_t process_squelch(void *stage, const void *in, size_t n, void *out)
{
    mb_squelch_process(stage, in, n, out);
    return n;
}

/* Open at first, and left alone: fades in, hangs, fades out. */
static void reset_squelch(void *stage)
{
    mb_squelch_reset(stage);
    mb_squelch_report(stage, true, 1.0);
    mb_squelch_report(stage, false, 1.0);
}

static void the_output_does_not_depend_on_the_cuts_and_bad_samples_are_zero(void **state)
{
    mb_squelch *squelch = make_squelch();

    (void)state;
    ones[3000] = NAN;
    const stage_cuts cuts = {squelch, process_squelch, reset_squelch, ones,
                             COUNT,   sizeof *ones,    sizeof *ones,  COUNT};
    assert_cuts_do_not_matter(&cuts);
    reset_squelch(squelch);
    mb_squelch_process(squelch, ones, COUNT, output);
    assert_near(output[2999], 1.0, 0.0);
    assert_near(output[3000], 0.0, 0.0);
    assert_near(output[COUNT - 1], 0.0, 0.0);
    mb_squelch_destroy(squelch);
}

static void each_bad_setting_is_named(void **state)
{
    static const struct {
        size_t offset;
        double value;
        const char *field;
    } rows[] = {
        {offsetof(mb_squelch_settings, rate_hz), NAN, "rate_hz"},
        {offsetof(mb_squelch_settings, open_quality), 1.1, "open_quality"},
        {offsetof(mb_squelch_settings, close_quality), 0.31, "close_quality"}, /* above open_quality */
        {offsetof(mb_squelch_settings, hang_s), -0.1, "hang_s"},
        {offsetof(mb_squelch_settings, fade_s), 0.0, "fade_s"},
    };

    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        mb_squelch_settings settings = mb_squelch_settings_default();
        mb_squelch *squelch = NULL;
        memcpy((char *)&settings + rows[i].offset, &rows[i].value, sizeof rows[i].value);
        assert_fault(mb_squelch_create(&settings, &squelch), MB_ERROR_ARGUMENT, rows[i].field);
        assert_null(squelch);
    }
}

static mb_status make_and_destroy(void)
{
    const mb_squelch_settings settings = mb_squelch_settings_default();
    mb_squelch *squelch = NULL;
    mb_status status = mb_squelch_create(&settings, &squelch);

    mb_squelch_destroy(squelch);
    return status;
}

static void lack_of_memory_is_told(void **state)
{
    (void)state;
    assert_survives_lack_of_memory(make_and_destroy());
    mb_squelch_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(it_opens_and_closes_with_hysteresis),
        cmocka_unit_test(it_hangs_over_pauses),
        cmocka_unit_test(fades_make_no_clicks),
        cmocka_unit_test(a_reset_squelch_is_closed),
        cmocka_unit_test(the_output_does_not_depend_on_the_cuts_and_bad_samples_are_zero),
        cmocka_unit_test(each_bad_setting_is_named),
        cmocka_unit_test(lack_of_memory_is_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
