/* The progress line says part and speed, and is not written where nobody watches. */
#include "check.h"

#include "outcome.h"
#include "progress.h"

static const app_program sample = {.name = "mb-sample"};

static void the_line_says_part_and_speed(void **state)
{
    char text[160];
    app_progress progress = {.program = "mb-sample", .doing = "receiving", .total_s = 60.0};

    (void)state;
    app_progress_text(&progress, 15.0, 0.05, text, sizeof text);
    assert_string_equal(text, "mb-sample: receiving 25 %, 300 x real time");
    app_progress_text(&progress, 61.0, 10.0, text, sizeof text);
    assert_string_equal(text, "mb-sample: receiving 100 %, 6.1 x real time");
    progress.total_s = 0.0;
    app_progress_text(&progress, 15.0, 0.0, text, sizeof text);
    assert_string_equal(text, "mb-sample: receiving 15 s");
}

static int work(void *user)
{
    app_common common = {.quiet = false};
    app_progress progress = app_progress_begin(&sample, &common, "receiving", 10.0);

    (void)user;
    progress.shown_s -= 1.0;
    app_progress_update(&progress, 5.0);
    app_progress_end(&progress);
    return progress.visible ? 1 : 0;
}

static void nothing_is_written_into_a_file(void **state)
{
    outcome result;

    (void)state;
    outcome_of(work, NULL, &result);
    assert_int_equal(result.status, 0);
    assert_string_equal(result.errors, "");
    assert_string_equal(result.output, "");
}

static int work_on_terminal(void *user)
{
    app_common common = {.quiet = false};
    app_progress progress = app_progress_begin(&sample, &common, "receiving", 10.0);

    (void)user;
    progress.visible = true;
    app_progress_update(&progress, 4.0); /* too early after the beginning */
    progress.shown_s -= 1.0;
    progress.begun_s = mb_clock_s() - 5.0;
    app_progress_update(&progress, 5.0);
    app_progress_end(&progress);
    app_progress_end(&progress);
    return 0;
}

static void on_a_terminal_the_line_is_drawn_and_cleared(void **state)
{
    outcome result;

    (void)state;
    outcome_of(work_on_terminal, NULL, &result);
    assert_string_equal(result.errors, "\rmb-sample: receiving 50 %, 1.0 x real time\033[K\r\033[K");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_line_says_part_and_speed),
        cmocka_unit_test(nothing_is_written_into_a_file),
        cmocka_unit_test(on_a_terminal_the_line_is_drawn_and_cleared),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
