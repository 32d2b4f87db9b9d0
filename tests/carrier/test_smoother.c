/* The carrier of a whole recording, in two passes. */
#include "signals.h"

#include "mirrorband/carrier.h"

enum { LONGEST = 20 * 16000 };

static float message[LONGEST];
static mb_cf32 baseband[LONGEST], rotated[LONGEST], again[LONGEST];

static mb_smoother *make_smoother(void)
{
    mb_recovery_settings settings = mb_recovery_settings_default();
    mb_smoother *smoother = NULL;

    assert_ok(mb_smoother_create(&settings, &smoother));
    return smoother;
}

/* Both passes over the baseband; the caller destroys. */
static mb_smoother *smooth(size_t count)
{
    mb_smoother *smoother = make_smoother();

    assert_ok(mb_smoother_listen(smoother, baseband, count));
    assert_ok(mb_smoother_resolve(smoother));
    mb_smoother_rotate(smoother, baseband, count, rotated);
    return smoother;
}

/* From the first sample on: what came before the lock is told by what followed it. */
static void no_message_is_left_in_the_quadrature_arm(void **state)
{
    static const signal_carrier carriers[] = {{137.0, 0.2, 1.0}, {-960.0, -0.2, 2.0}};
    const size_t count = signal_samples(8.0);

    (void)state;
    print_message("seeds 401, 402\n");
    signal_voice(message, count, 115.0, 401);
    for (size_t i = 0; i < 2; i++) {
        signal_noisy_voice(message, count, &carriers[i], 60.0, 402, baseband);
        mb_smoother *smoother = smooth(count);
        assert_at_most(signal_quadrature_db(rotated, 0, count), -40.0);
        assert_at_least(fabs(signal_likeness(message, rotated, 0, count, 0)), 0.9999);
        mb_carrier_state summary = mb_smoother_state(smoother);
        assert_near(summary.carrier_offset_hz, carriers[i].offset_hz + carriers[i].drift_hz_s * 4.0, 0.1);
        assert_at_least(summary.lock_quality, 0.99);
        mb_smoother_destroy(smoother);
    }
}

/*
 * The track against the truth: at 10 dB the steady tracker averages over about a second, and the variance of
 * a second of blocks is (1 + 1/2 rho)/(4 W T rho) = 1e-5 rad^2 for a white message; a voice fills the band
 * worse and speaks less: 0.02 rad rms (0.002 dB of loss) is asked for.
 */
static void the_track_is_the_phase_of_the_carrier(void **state)
{
    const signal_carrier carrier = {411.0, 0.2, 0.9};
    const size_t count = signal_samples(10.0);
    double sum = 0.0, at_first = 0.0;

    (void)state;
    print_message("seed 411\n");
    signal_voice(message, count, 130.0, 411);
    signal_noisy_voice(message, count, &carrier, 10.0, 411, baseband);
    mb_smoother *smoother = smooth(count);
    size_t points = mb_smoother_point_count(smoother);
    assert_near(mb_smoother_step_s(smoother), 0.01, 1e-12);
    assert_int_equal(points, 1000);
    for (size_t i = 5; i + 5 < points; i++) {
        mb_track_point point = mb_smoother_point(smoother, i);
        double error = point.phase_rad - signal_phase(&carrier, point.time_s * SIGNAL_RATE_HZ);
        at_first = i == 5 ? MB_PI * nearbyint(error / MB_PI) : at_first;
        sum += (error - at_first) * (error - at_first); /* unwrapped: a slip anywhere would show */
        assert_near(point.carrier_offset_hz, 411.0 + 0.2 * point.time_s, 0.3);
    }
    assert_at_most(sqrt(sum / (double)points), 0.02);
    mb_smoother_destroy(smoother);
}

/* Voice to 4 s, pause 1 s, voice, pause 3 s, voice from 12 to 16 s: one sense throughout. */
static void the_branch_of_pi_is_settled_across_pauses(void **state)
{
    static const double snrs_db[] = {6.0, 15.0, 30.0};
    const size_t count = signal_samples(16.0);

    (void)state;
    print_message("seeds 420 to 422\n");
    for (uint64_t i = 0; i < 3; i++) {
        const signal_carrier carrier = {-800.0 + 300.0 * (double)i, i % 2 == 0 ? 0.2 : -0.2, (double)i};
        signal_voice(message, count, 95.0 + 20.0 * (double)i, 420 + i);
        signal_pause(message, 4.0, 5.0);
        signal_pause(message, 9.0, 12.0);
        signal_noisy_voice(message, count, &carrier, snrs_db[i % 3], 420 + i, baseband);
        mb_smoother_destroy(smooth(count));
        double before = signal_likeness(message, rotated, 0, signal_samples(4.0), 0);
        double between = signal_likeness(message, rotated, signal_samples(5.0), signal_samples(9.0), 0);
        double after = signal_likeness(message, rotated, signal_samples(12.0), count, 0);
        assert_at_least(before * between, 0.5); /* at 6 dB noise of 16/5.4 x 1/4 / 2 leaves 0.85 each */
        assert_at_least(before * after, 0.5);
    }
}

static void the_second_pass_repeats_itself_after_a_rewind_and_whatever_the_cuts(void **state)
{
    const signal_carrier carrier = {-50.0, 0.1, 0.0};
    const size_t count = signal_samples(4.0) + 77;
    mb_random random;

    (void)state;
    print_message("seeds 431, 432\n");
    signal_voice(message, count, 150.0, 431);
    signal_noisy_voice(message, count, &carrier, 15.0, 431, baseband);
    mb_smoother *smoother = smooth(count);
    mb_random_seed(&random, 432, 0);
    mb_smoother_rewind(smoother);
    for (size_t done = 0; done < count;) {
        size_t now = (size_t)(mb_random_bits(&random) % 700);
        now = now < count - done ? now : count - done;
        mb_smoother_rotate(smoother, baseband + done, now, again + done);
        done += now;
    }
    assert_memory_equal(again, rotated, count * sizeof *again);
    mb_smoother_destroy(smoother);
}

static void the_first_pass_gives_the_same_track_whatever_the_cuts(void **state)
{
    const signal_carrier carrier = {-50.0, 0.1, 0.0};
    const size_t count = signal_samples(4.0);

    (void)state;
    signal_voice(message, count, 150.0, 441);
    signal_noisy_voice(message, count, &carrier, 15.0, 441, baseband);
    mb_smoother *whole = smooth(count), *pieces = make_smoother();
    for (size_t done = 0; done < count;) {
        size_t now = 61 < count - done ? 61 : count - done;
        assert_ok(mb_smoother_listen(pieces, baseband + done, now));
        done += now;
    }
    assert_ok(mb_smoother_resolve(pieces));
    assert_int_equal(mb_smoother_point_count(pieces), mb_smoother_point_count(whole));
    for (size_t i = 0; i < mb_smoother_point_count(whole); i++) {
        mb_track_point a = mb_smoother_point(pieces, i), b = mb_smoother_point(whole, i);
        assert_near(a.phase_rad, b.phase_rad, 0.0);
        assert_near(a.in_phase_dbfs, b.in_phase_dbfs, 0.0);
    }
    mb_smoother_destroy(whole);
    mb_smoother_destroy(pieces);
}

static void assert_no_signal(size_t count)
{
    mb_smoother *smoother = make_smoother();

    assert_ok(mb_smoother_listen(smoother, baseband, count));
    assert_int_equal(mb_smoother_resolve(smoother), MB_ERROR_NO_SIGNAL);
    assert_non_null(strstr(mb_last_fault()->text, "no suppressed-carrier signal"));
    mb_smoother_destroy(smoother);
}

/* Nothing at all, too little, noise, a plain carrier, one sideband. */
static void recordings_without_a_suppressed_carrier_say_so(void **state)
{
    enum { COUNT = 1 << 17 };
    const signal_carrier carrier = {220.0, 0.0, 0.4};

    (void)state;
    print_message("seeds 451 to 453\n");
    memset(baseband, 0, sizeof baseband);
    assert_no_signal(0);
    assert_no_signal(COUNT);
    signal_add_noise(baseband, COUNT, 0.01, 0.0, 451);
    assert_no_signal(COUNT);
    assert_no_signal(100);
    memset(message, 0, sizeof message);
    signal_am(message, 0.2, COUNT, &carrier, baseband);
    signal_add_noise(baseband, COUNT, 0.01, 15.0, 452);
    assert_no_signal(COUNT);
    signal_voice(message, COUNT, 110.0, 453);
    signal_ssb(message, COUNT, &carrier, baseband);
    signal_add_noise(baseband, COUNT, 0.01, 25.0, 453);
    assert_no_signal(COUNT);
}

static size_t bytes_asked;

static bool count_bytes(void *user, size_t bytes)
{
    (void)user;
    bytes_asked += bytes;
    return true;
}

/* The list of an hour (360000 points) stays below 64 MiB: from what a minute of silence asks for,
 * the whole last piece included. */
static void an_hour_takes_less_than_64_mib(void **state)
{
    mb_smoother *smoother = make_smoother();

    (void)state;
    memset(baseband, 0, sizeof baseband);
    bytes_asked = 0;
    mb_allocation_gate_set(count_bytes, NULL);
    for (size_t i = 0; i < 3; i++) {
        assert_ok(mb_smoother_listen(smoother, baseband, LONGEST));
    }
    mb_allocation_gate_set(NULL, NULL);
    assert_at_most((double)bytes_asked * 3600.0 / 60.0, 64.0 * 1048576.0);
    mb_smoother_destroy(smoother);
}

static void bad_samples_come_out_as_zero(void **state)
{
    const signal_carrier carrier = {70.0, 0.0, 0.0};
    const size_t count = signal_samples(4.0);

    (void)state;
    signal_voice(message, count, 125.0, 461);
    signal_noisy_voice(message, count, &carrier, 20.0, 461, baseband);
    baseband[20000] = (mb_cf32){NAN, 1.0f};
    baseband[30000] = (mb_cf32){1.0f, -INFINITY};
    mb_smoother_destroy(smooth(count));
    for (size_t i = 0; i < count; i++) {
        assert_true(isfinite(rotated[i].re) && isfinite(rotated[i].im));
    }
    assert_at_least(fabs(signal_likeness(message, rotated, 0, count, 0)), 0.95);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(no_message_is_left_in_the_quadrature_arm),
        cmocka_unit_test(the_track_is_the_phase_of_the_carrier),
        cmocka_unit_test(the_branch_of_pi_is_settled_across_pauses),
        cmocka_unit_test(the_second_pass_repeats_itself_after_a_rewind_and_whatever_the_cuts),
        cmocka_unit_test(the_first_pass_gives_the_same_track_whatever_the_cuts),
        cmocka_unit_test(recordings_without_a_suppressed_carrier_say_so),
        cmocka_unit_test(an_hour_takes_less_than_64_mib),
        cmocka_unit_test(bad_samples_come_out_as_zero),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
