/* The picture, and failing memory of all parts of the assessment. */
#include <unistd.h>

#include "assess_signals.h"

enum { RATE = 48000, COUNT = 4 * RATE, TEXT_ROOM = 1048576 };

static char picture_path[512];

static mb_assess_iq *assessed(bool noise_only)
{
    emission_plan plan = {.rate_hz = RATE,
                          .offset_hz = 137.0,
                          .drift_hz_per_s = 0.5,
                          .leak_dbc = -40.0,
                          .noise_db = noise_only ? 40.0 : -15.0};
    mb_assess_iq_settings settings = mb_assess_iq_settings_default();
    mb_assess_iq *assess = NULL;
    float *message = speech_like(RATE, COUNT, 41);
    mb_cf32 *air = on_air(&plan, message, COUNT, 42);

    settings.picture = true;
    (void)assess_in_blocks(&settings, air, COUNT, 4800, &assess);
    for (size_t i = 0; i < (size_t)COUNT / RATE * 100; i++) {
        double time_s = (double)i / 100.0;
        mb_assess_iq_truth(assess, time_s, plan.offset_hz + plan.drift_hz_per_s * time_s);
    }
    mb_release(air);
    mb_release(message);
    return assess;
}

/* The picture as text; the caller's (free). */
static char *drawn(const mb_assess_iq *assess)
{
    mb_assess_iq_result result;

    assert_ok(mb_assess_iq_finish(assess, &result));
    assert_ok(mb_assess_picture(assess, &result, "report of QQ1RDG", picture_path));
    FILE *file = fopen(picture_path, "rb");
    assert_non_null(file);
    char *text = calloc(1, TEXT_ROOM);
    assert_non_null(text);
    assert_true(fread(text, 1, TEXT_ROOM - 1, file) > 1000);
    (void)fclose(file);
    return text;
}

static void the_picture_shows_sidebands_phase_and_offset(void **state)
{
    (void)state;
    const char *const parts[] = {"<svg",           "</svg>",     "report of QQ1RDG",
                                 "mirrored",       "Phase line", "quadrature",
                                 "Carrier offset", "truth",      "distance from the missing carrier"};
    mb_assess_iq *assess = assessed(false);
    char *text = drawn(assess);

    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
        assert_non_null(strstr(text, parts[i]));
    }
    free(text);
    mb_assess_iq_destroy(assess);
}

static void without_a_signal_the_spectrum_is_drawn_alone(void **state)
{
    (void)state;
    mb_assess_iq *assess = assessed(true);
    char *text = drawn(assess);

    assert_non_null(strstr(text, "No suppressed-carrier signal"));
    assert_null(strstr(text, "Phase line"));
    free(text);
    mb_assess_iq_destroy(assess);
}

static void a_picture_must_be_asked_for_first(void **state)
{
    (void)state;
    mb_assess_iq_settings settings = mb_assess_iq_settings_default();
    mb_assess_iq_result result = {0};
    mb_assess_iq *assess = NULL;

    assert_ok(mb_assess_iq_create(&settings, &assess));
    assert_fault(mb_assess_picture(assess, &result, NULL, picture_path), MB_ERROR_ARGUMENT, "picture");
    mb_assess_iq_destroy(assess);
}

typedef struct gate {
    size_t left;
} gate;

static bool allow(void *user, size_t bytes)
{
    gate *g = user;

    (void)bytes;
    if (g->left == 0) {
        return false;
    }
    g->left--;
    return true;
}

static mb_status make_iq(void *context)
{
    mb_assess_iq_settings settings = mb_assess_iq_settings_default();
    mb_assess_iq *made = NULL;
    mb_status status = mb_assess_iq_create(&settings, &made);

    (void)context;
    mb_assess_iq_destroy(made);
    return status;
}

static mb_status make_audio(void *context)
{
    mb_assess_audio_settings settings = mb_assess_audio_settings_default();
    mb_assess_audio *made = NULL;
    mb_status status = mb_assess_audio_create(&settings, &made);

    (void)context;
    mb_assess_audio_destroy(made);
    return status;
}

static mb_status make_ideal(void *context)
{
    mb_assess_ideal_settings settings = mb_assess_ideal_settings_default();
    mb_assess_ideal *made = NULL;
    mb_status status = mb_assess_ideal_create(&settings, &made);

    (void)context;
    mb_assess_ideal_destroy(made);
    return status;
}

static mb_status finish_and_draw(void *context)
{
    mb_assess_iq_result result;
    mb_status status = mb_assess_iq_finish(context, &result);

    return status == MB_OK ? mb_assess_picture(context, &result, NULL, picture_path) : status;
}

static mb_status hear_silence(void *context)
{
    static const mb_cf32 silence[9600];
    mb_assess_iq_settings settings = mb_assess_iq_settings_default();
    mb_assess_iq *made = NULL;
    mb_status status = mb_assess_iq_create(&settings, &made);

    (void)context;
    if (status == MB_OK) {
        status = mb_assess_iq_listen(made, silence, 9600);
    }
    if (status == MB_OK) {
        status = mb_assess_iq_resolve(made);
    }
    mb_assess_iq_destroy(made);
    return status == MB_ERROR_NO_SIGNAL ? MB_OK : status;
}

static void failing_memory_is_survived(void **state)
{
    (void)state;
    mb_assess_iq *assess = assessed(false);
    mb_status (*const works[])(void *) = {make_iq, make_audio, make_ideal, finish_and_draw, hear_silence};

    for (size_t i = 0; i < sizeof works / sizeof works[0]; i++) {
        mb_status status = MB_ERROR_MEMORY;
        for (size_t k = 0; status != MB_OK && k < 500; k++) {
            gate g = {.left = k};
            mb_allocation_gate_set(allow, &g);
            status = works[i](assess);
            mb_allocation_gate_set(NULL, NULL);
            assert_true(status == MB_OK || status == MB_ERROR_MEMORY);
        }
        assert_int_equal(status, MB_OK);
    }
    mb_assess_iq_destroy(assess);
}

static int name_the_picture(void **state)
{
    (void)state;
    (void)snprintf(picture_path, sizeof picture_path, "%s/assess_%ld.svg", MB_TEST_BINARY_DIR,
                   (long)getpid());
    return 0;
}

static int remove_the_picture(void **state)
{
    (void)state;
    (void)unlink(picture_path);
    return 0;
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_picture_shows_sidebands_phase_and_offset),
        cmocka_unit_test(without_a_signal_the_spectrum_is_drawn_alone),
        cmocka_unit_test(a_picture_must_be_asked_for_first),
        cmocka_unit_test(failing_memory_is_survived),
    };

    return cmocka_run_group_tests(tests, name_the_picture, remove_the_picture);
}
