/* The contract of a stage, for all of the carrier room: cuts, faults, lack of memory, NULL. */
#include "signals.h"

#include "failing_memory.h"
#include "mirrorband/carrier.h"
#include "stage_cuts.h"

enum { COUNT = 40000 };

static float message[COUNT];
static mb_cf32 baseband[COUNT];

static void make_input(void)
{
    const signal_carrier carrier = {222.0, 0.1, 0.0};

    signal_voice(message, COUNT, 120.0, 501);
    signal_noisy_voice(message, COUNT, &carrier, 15.0, 502, baseband);
    baseband[25000].re = NAN;
    baseband[25001].im = INFINITY;
}

static size_t process_recovery(void *stage, const void *in, size_t n, void *out)
{
    mb_recovery_process(stage, in, n, out);
    return n;
}

static void reset_recovery(void *stage)
{
    mb_recovery_reset(stage);
}

static void the_output_of_the_recovery_does_not_depend_on_the_cuts(void **state)
{
    (void)state;
    print_message("seeds 501, 502\n");
    make_input();
    for (int tracker = MB_TRACKER_KALMAN; tracker <= MB_TRACKER_COSTAS; tracker++) {
        mb_recovery_settings settings = mb_recovery_settings_default();
        mb_recovery *recovery = NULL;
        settings.tracker = (mb_tracker_kind)tracker;
        assert_ok(mb_recovery_create(&settings, &recovery));
        const stage_cuts cuts = {recovery, process_recovery, reset_recovery,   baseband,
                                 COUNT,    sizeof *baseband, sizeof *baseband, COUNT};
        assert_cuts_do_not_matter(&cuts);
        mb_recovery_destroy(recovery);
    }
}

static size_t process_costas(void *stage, const void *in, size_t n, void *out)
{
    mb_costas_process(stage, in, n, out);
    return n;
}

static void reset_costas(void *stage)
{
    mb_costas_reset(stage);
}

static void the_output_of_the_costas_loop_does_not_depend_on_the_cuts(void **state)
{
    const mb_costas_settings settings = mb_costas_settings_default();
    mb_costas *loop = NULL;

    (void)state;
    make_input();
    assert_ok(mb_costas_create(&settings, &loop));
    const stage_cuts cuts = {loop,  process_costas,   reset_costas,     baseband,
                             COUNT, sizeof *baseband, sizeof *baseband, COUNT};
    assert_cuts_do_not_matter(&cuts);
    mb_costas_destroy(loop);
}

static void the_output_may_take_the_place_of_the_input(void **state)
{
    static mb_cf32 apart[COUNT], within[COUNT];
    const mb_recovery_settings settings = mb_recovery_settings_default();
    mb_recovery *recovery = NULL;

    (void)state;
    make_input();
    assert_ok(mb_recovery_create(&settings, &recovery));
    mb_recovery_process(recovery, baseband, COUNT, apart);
    mb_recovery_reset(recovery);
    memcpy(within, baseband, sizeof within);
    mb_recovery_process(recovery, within, COUNT, within);
    assert_memory_equal(apart, within, sizeof within);
    mb_recovery_destroy(recovery);
}

/* A field of a settings struct and a value outside its range. */
typedef struct bad_field {
    size_t offset;
    double value;
    const char *field;
} bad_field;

#define BAD(type, name, value)                                                                               \
    {                                                                                                        \
        offsetof(type, name), value, #name                                                                   \
    }
#define ROWS(rows)           (sizeof(rows) / sizeof(rows)[0])
#define spoil(settings, row) memcpy((char *)&(settings) + (row).offset, &(row).value, sizeof(double))

static void each_bad_setting_of_the_recovery_is_named(void **state)
{
    static const bad_field rows[] = {
        BAD(mb_recovery_settings, rate_hz, 8000.0),
        BAD(mb_recovery_settings, rate_hz, NAN),
        BAD(mb_recovery_settings, span_hz, 3500.0),
        BAD(mb_recovery_settings, span_hz, 5.0),
        BAD(mb_recovery_settings, low_cut_hz, 10.0),
        BAD(mb_recovery_settings, high_cut_hz, 900.0),
        BAD(mb_recovery_settings, high_cut_hz, 6500.0),
        BAD(mb_recovery_settings, look_ahead_s, -0.1),
        BAD(mb_recovery_settings, look_ahead_s, 6.0),
        BAD(mb_recovery_settings, loop_bandwidth_hz, 0.0),
        BAD(mb_recovery_settings, loop_bandwidth_hz, INFINITY),
        BAD(mb_recovery_settings, damping, 0.1),
        BAD(mb_recovery_settings, noise.phase_rad2_s, -1.0),
        BAD(mb_recovery_settings, noise.frequency_rad2_s3, NAN),
        BAD(mb_recovery_settings, noise.drift_rad2_s5, 1e9),
        BAD(mb_recovery_settings, drift_sigma_hz_s, 101.0),
    };

    (void)state;
    for (size_t i = 0; i < ROWS(rows); i++) {
        mb_recovery_settings settings = mb_recovery_settings_default();
        mb_recovery *recovery = NULL;
        mb_smoother *smoother = NULL;
        spoil(settings, rows[i]);
        assert_fault(mb_recovery_create(&settings, &recovery), MB_ERROR_ARGUMENT, rows[i].field);
        assert_fault(mb_smoother_create(&settings, &smoother), MB_ERROR_ARGUMENT, rows[i].field);
        assert_null(recovery);
        assert_null(smoother);
    }
}

static void a_tracker_that_does_not_exist_is_refused(void **state)
{
    mb_recovery_settings settings = mb_recovery_settings_default();
    mb_recovery *recovery = NULL;
    const int unknown = 7;

    (void)state;
    memcpy(&settings.tracker, &unknown, sizeof settings.tracker);
    assert_fault(mb_recovery_create(&settings, &recovery), MB_ERROR_ARGUMENT, "tracker");
}

static void each_bad_setting_of_the_sighter_is_named(void **state)
{
    static const bad_field rows[] = {
        BAD(mb_sighting_settings, rate_hz, 4000.0),
        BAD(mb_sighting_settings, length_s, 0.05),
        BAD(mb_sighting_settings, length_s, 2.1),
        BAD(mb_sighting_settings, span_hz, 3300.0),
        BAD(mb_sighting_settings, low_cut_hz, 40.0),
        BAD(mb_sighting_settings, high_cut_hz, 7300.0),
        BAD(mb_sighting_settings, coherence_min, 1.1),
        BAD(mb_sighting_settings, purity_min, NAN),
        BAD(mb_sighting_settings, centre_share_max, -0.001),
    };

    (void)state;
    for (size_t i = 0; i < ROWS(rows); i++) {
        mb_sighting_settings settings = mb_sighting_settings_default();
        mb_sighter *sighter = NULL;
        spoil(settings, rows[i]);
        assert_fault(mb_sighter_create(&settings, &sighter), MB_ERROR_ARGUMENT, rows[i].field);
        assert_null(sighter);
    }
}

static void each_bad_setting_of_the_costas_loop_is_named(void **state)
{
    static const bad_field rows[] = {
        BAD(mb_costas_settings, rate_hz, 999.0),
        BAD(mb_costas_settings, loop_bandwidth_hz, 321.0),
        BAD(mb_costas_settings, damping, 3.1),
        BAD(mb_costas_settings, offset_hz, 8001.0),
        BAD(mb_costas_settings, offset_limit_hz, -1.0),
        BAD(mb_costas_settings, energy_time_s, 1e-4),
        BAD(mb_costas_settings, energy_time_s, INFINITY),
        BAD(mb_costas_settings, gate, -0.5),
    };

    (void)state;
    for (size_t i = 0; i < ROWS(rows); i++) {
        mb_costas_settings settings = mb_costas_settings_default();
        mb_costas *loop = NULL;
        spoil(settings, rows[i]);
        assert_fault(mb_costas_create(&settings, &loop), MB_ERROR_ARGUMENT, rows[i].field);
        assert_null(loop);
    }
}

static mb_status make_and_destroy_recovery(mb_tracker_kind tracker)
{
    mb_recovery_settings settings = mb_recovery_settings_default();
    mb_recovery *recovery = NULL;

    settings.tracker = tracker;
    mb_status status = mb_recovery_create(&settings, &recovery);
    assert_true((status == MB_OK) == (recovery != NULL));
    mb_recovery_destroy(recovery);
    return status;
}

static mb_status make_and_destroy_sighter(void)
{
    const mb_sighting_settings settings = mb_sighting_settings_default();
    mb_sighter *sighter = NULL;
    mb_status status = mb_sighter_create(&settings, &sighter);

    assert_true((status == MB_OK) == (sighter != NULL));
    mb_sighter_destroy(sighter);
    return status;
}

static mb_status make_and_destroy_costas(void)
{
    const mb_costas_settings settings = mb_costas_settings_default();
    mb_costas *loop = NULL;
    mb_status status = mb_costas_create(&settings, &loop);

    assert_true((status == MB_OK) == (loop != NULL));
    mb_costas_destroy(loop);
    return status;
}

/* Creation, and the growing list of the first pass. */
static mb_status use_smoother(void)
{
    const mb_recovery_settings settings = mb_recovery_settings_default();
    mb_smoother *smoother = NULL;
    mb_status status = mb_smoother_create(&settings, &smoother);

    assert_true((status == MB_OK) == (smoother != NULL));
    if (status == MB_OK) {
        status = mb_smoother_listen(smoother, baseband, 1600);
    }
    mb_smoother_destroy(smoother);
    return status;
}

static void lack_of_memory_is_told_and_nothing_leaks(void **state)
{
    (void)state;
    assert_survives_lack_of_memory(make_and_destroy_recovery(MB_TRACKER_KALMAN));
    assert_survives_lack_of_memory(make_and_destroy_recovery(MB_TRACKER_COSTAS));
    assert_survives_lack_of_memory(make_and_destroy_sighter());
    assert_survives_lack_of_memory(make_and_destroy_costas());
    assert_survives_lack_of_memory(use_smoother());
}

static void nothing_can_be_destroyed(void **state)
{
    (void)state;
    mb_recovery_destroy(NULL);
    mb_smoother_destroy(NULL);
    mb_sighter_destroy(NULL);
    mb_costas_destroy(NULL);
}

static void every_mode_has_a_name(void **state)
{
    (void)state;
    assert_string_equal(mb_carrier_mode_text(MB_CARRIER_SEARCH), "search");
    assert_string_equal(mb_carrier_mode_text(MB_CARRIER_LOCKED), "locked");
    assert_string_equal(mb_carrier_mode_text(MB_CARRIER_HOLD), "hold");
    assert_string_equal(mb_carrier_mode_text(MB_CARRIER_LOST), "lost");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_output_of_the_recovery_does_not_depend_on_the_cuts),
        cmocka_unit_test(the_output_of_the_costas_loop_does_not_depend_on_the_cuts),
        cmocka_unit_test(the_output_may_take_the_place_of_the_input),
        cmocka_unit_test(each_bad_setting_of_the_recovery_is_named),
        cmocka_unit_test(a_tracker_that_does_not_exist_is_refused),
        cmocka_unit_test(each_bad_setting_of_the_sighter_is_named),
        cmocka_unit_test(each_bad_setting_of_the_costas_loop_is_named),
        cmocka_unit_test(lack_of_memory_is_told_and_nothing_leaks),
        cmocka_unit_test(nothing_can_be_destroyed),
        cmocka_unit_test(every_mode_has_a_name),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
