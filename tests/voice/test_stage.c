/* The contract of a stage, for mb_voice: cuts, reset, faults, memory, bad samples. */
#include "signals.h"

enum { COUNT = 30000 };

static float input[COUNT], whole[COUNT], cut[COUNT];

static void make_input(void)
{
    mb_random random;

    mb_random_seed(&random, 21, 0);
    for (size_t i = 0; i < COUNT; i++) {
        double loud = i / 6000 % 2 == 0 ? 1.5 : 0.01; /* so that the limiter comes and goes */
        input[i] = (float)(loud * mb_random_normal(&random));
    }
    input[5000] = NAN;
    input[5001] = -INFINITY;
    input[20000] = INFINITY;
}

/* Blocks of `block` samples; 0 means of random length up to 2000. */
static void run_in_blocks(mb_voice *voice, size_t block)
{
    mb_random random;

    mb_random_seed(&random, 22, 0);
    for (size_t done = 0; done < COUNT;) {
        size_t now = block > 0 ? block : (size_t)(mb_random_uniform(&random) * 2000.0);
        now = now < COUNT - done ? now : COUNT - done;
        mb_voice_process(voice, input + done, now, cut + done);
        done += now;
    }
}

static void the_output_does_not_depend_on_the_cuts(void **state)
{
    static const size_t blocks[] = {1, 7, 64, 1000, 0};
    mb_voice_settings settings = mb_voice_settings_default();
    mb_voice *voice = NULL;

    (void)state;
    print_message("seeds 21, 22\n");
    make_input();
    for (size_t conditioning = 0; conditioning < 2; conditioning++) {
        settings.conditioning = conditioning == 1;
        voice_run(&settings, input, COUNT, whole);
        assert_ok(mb_voice_create(&settings, &voice));
        for (size_t k = 0; k < sizeof blocks / sizeof blocks[0]; k++) {
            mb_voice_reset(voice); /* a reset stage is like a new one */
            run_in_blocks(voice, blocks[k]);
            assert_memory_equal(cut, whole, sizeof whole);
        }
        mb_voice_destroy(voice);
    }
}

static void the_output_may_take_the_place_of_the_input(void **state)
{
    const mb_voice_settings settings = mb_voice_settings_default();

    (void)state;
    make_input();
    voice_run(&settings, input, COUNT, whole);
    memcpy(cut, input, sizeof cut);
    voice_run(&settings, cut, COUNT, cut);
    assert_memory_equal(cut, whole, sizeof whole);
}

static void bad_samples_are_counted_and_taken_as_zero(void **state)
{
    const mb_voice_settings settings = mb_voice_settings_default();
    mb_voice *voice = NULL;

    (void)state;
    make_input();
    assert_ok(mb_voice_create(&settings, &voice));
    mb_voice_process(voice, input, COUNT, whole);
    assert_int_equal(mb_voice_state(voice).non_finite, 3);
    assert_near(mb_voice_state(voice).peak, greatest(whole, COUNT), 1e-6);
    mb_voice_reset(voice);
    assert_int_equal(mb_voice_state(voice).non_finite, 0);
    input[5000] = input[5001] = input[20000] = 0.0f;
    mb_voice_process(voice, input, COUNT, cut);
    assert_memory_equal(cut, whole, sizeof whole);
    mb_voice_destroy(voice);
}

static void each_setting_out_of_its_range_is_named(void **state)
{
    static const struct {
        size_t offset;
        double value;
        const char *field;
    } rows[] = {
        {offsetof(mb_voice_settings, rate_hz), 8000.0, "rate_hz"},
        {offsetof(mb_voice_settings, low_hz), 50.0, "low_hz"},
        {offsetof(mb_voice_settings, high_hz), 700.0, "high_hz"},
        {offsetof(mb_voice_settings, high_hz), 6500.0, "high_hz"},
        {offsetof(mb_voice_settings, peak), 1.5, "peak"},
        {offsetof(mb_voice_settings, gain_db), NAN, "gain_db"},
        {offsetof(mb_voice_settings, drive_db), 21.0, "drive_db"},
        {offsetof(mb_voice_settings, level_s), 0.0, "level_s"},
        {offsetof(mb_voice_settings, max_gain_db), -1.0, "max_gain_db"},
        {offsetof(mb_voice_settings, compression_ratio), 0.5, "compression_ratio"},
        {offsetof(mb_voice_settings, compression_threshold_db), 1.0, "compression_threshold_db"},
        {offsetof(mb_voice_settings, attack_s), 0.0, "attack_s"},
        {offsetof(mb_voice_settings, release_s), INFINITY, "release_s"},
        {offsetof(mb_voice_settings, look_ahead_s), 0.1, "look_ahead_s"},
    };

    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        mb_voice_settings settings = mb_voice_settings_default();
        mb_voice *voice = NULL;
        memcpy((char *)&settings + rows[i].offset, &rows[i].value, sizeof rows[i].value);
        assert_fault(mb_voice_create(&settings, &voice), MB_ERROR_ARGUMENT, rows[i].field);
        assert_null(voice);
    }
}

/* At 16 kHz the message may reach to 0.4 of the rate only. */
static void a_message_too_high_for_its_rate_is_refused(void **state)
{
    mb_voice_settings settings = mb_voice_settings_default();
    mb_voice *voice = NULL;

    (void)state;
    settings.rate_hz = 16000.0;
    settings.high_hz = 5900.0;
    assert_ok(mb_voice_create(&settings, &voice));
    mb_voice_destroy(voice);
    settings.rate_hz = 16000.0;
    settings.high_hz = 6401.0;
    assert_fault(mb_voice_create(&settings, &voice), MB_ERROR_ARGUMENT, "high_hz");
}

static bool refuse_after(void *user, size_t bytes)
{
    size_t *left = user;

    (void)bytes;
    if (*left == 0) {
        return false;
    }
    *left -= 1;
    return true;
}

static void refused_memory_is_told_at_every_allocation(void **state)
{
    const mb_voice_settings settings = mb_voice_settings_default();
    mb_status status = MB_ERROR_MEMORY;
    size_t allowed = 0;

    (void)state;
    for (; status != MB_OK && allowed < 100; allowed++) {
        size_t left = allowed;
        mb_voice *voice = NULL;
        mb_allocation_gate_set(refuse_after, &left);
        status = mb_voice_create(&settings, &voice);
        mb_allocation_gate_set(NULL, NULL);
        assert_true(status == MB_OK || status == MB_ERROR_MEMORY);
        assert_true((status == MB_OK) == (voice != NULL));
        mb_voice_destroy(voice);
    }
    assert_int_equal(status, MB_OK);
    assert_true(allowed > 5);
    mb_voice_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_output_does_not_depend_on_the_cuts),
        cmocka_unit_test(the_output_may_take_the_place_of_the_input),
        cmocka_unit_test(bad_samples_are_counted_and_taken_as_zero),
        cmocka_unit_test(each_setting_out_of_its_range_is_named),
        cmocka_unit_test(a_message_too_high_for_its_rate_is_refused),
        cmocka_unit_test(refused_memory_is_told_at_every_allocation),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
