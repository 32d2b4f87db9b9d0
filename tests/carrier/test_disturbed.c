/* What recovery must not lock on, and what must not throw it once locked. */
#include "signals.h"

#include "mirrorband/carrier.h"

enum { LONGEST = 1 << 18, BLOCK = 160 };

static float message[LONGEST];
static mb_cf32 baseband[LONGEST], rotated[LONGEST];

static size_t delay_now; /* of the recovery last run */

/* Share of the blocks of 10 ms in which the recovery is muted, and its last state. */
static double muted_share(size_t count, mb_carrier_state *last)
{
    mb_recovery_settings settings = mb_recovery_settings_default();
    mb_recovery *recovery = NULL;
    size_t muted = 0;

    *last = (mb_carrier_state){.mode = MB_CARRIER_SEARCH};
    assert_ok(mb_recovery_create(&settings, &recovery));
    delay_now = mb_recovery_delay_samples(recovery);
    for (size_t at = 0; at + BLOCK <= count; at += BLOCK) {
        mb_recovery_process(recovery, baseband + at, BLOCK, rotated + at);
        *last = mb_recovery_state(recovery);
        muted += last->mode == MB_CARRIER_SEARCH || last->mode == MB_CARRIER_LOST ? 1 : 0;
    }
    mb_recovery_destroy(recovery);
    const size_t blocks = count / BLOCK;
    return (double)muted / (double)blocks;
}

static void assert_never_locks(size_t count)
{
    mb_carrier_state last;

    assert_near(muted_share(count, &last), 1.0, 0.0);
    assert_int_equal(last.locks, 0);
    assert_int_equal(last.mode, MB_CARRIER_SEARCH);
}

static void it_never_locks_on_noise(void **state)
{
    (void)state;
    print_message("seeds 301, 302\n");
    for (uint64_t seed = 301; seed <= 302; seed++) {
        memset(baseband, 0, sizeof baseband);
        signal_add_noise(baseband, LONGEST, 0.01, 0.0, seed);
        assert_never_locks(LONGEST);
    }
}

static void it_never_locks_on_silence(void **state)
{
    (void)state;
    memset(baseband, 0, sizeof baseband);
    assert_never_locks(LONGEST / 4);
}

static void it_never_locks_on_a_plain_carrier(void **state)
{
    static const signal_carrier carriers[] = {{0.0, 0.0, 0.0}, {440.0, 0.0, 1.0}, {-700.0, 1.0, 2.0}};

    (void)state;
    memset(message, 0, sizeof message);
    for (size_t i = 0; i < 3; i++) {
        signal_am(message, 0.1, LONGEST / 4, &carriers[i], baseband);
        signal_add_noise(baseband, LONGEST / 4, 0.01, 10.0 + 15.0 * (double)i, 311);
        assert_never_locks(LONGEST / 4);
    }
}

/* Full AM, the carrier at five times the root mean square of the voice. */
static void it_never_locks_on_a_voice_with_its_full_carrier(void **state)
{
    const signal_carrier carrier = {150.0, 0.0, 0.1};

    (void)state;
    print_message("seeds 321, 322\n");
    signal_voice(message, LONGEST / 2, 105.0, 321);
    signal_am(message, 5.0 * SIGNAL_VOICE_LEVEL, LONGEST / 2, &carrier, baseband);
    signal_add_noise(baseband, LONGEST / 2, 0.01, 20.0, 322);
    assert_never_locks(LONGEST / 2);
}

static void it_never_locks_on_one_sideband_alone(void **state)
{
    static const signal_carrier carriers[] = {{0.0, 0.0, 0.0}, {-300.0, 0.0, 1.0}, {500.0, 0.2, 2.0}};

    (void)state;
    print_message("seeds 331 to 333\n");
    for (uint64_t i = 0; i < 3; i++) {
        signal_voice(message, LONGEST / 2, 90.0 + 55.0 * (double)i, 331 + i);
        signal_ssb(message, LONGEST / 2, &carriers[i], baseband);
        signal_add_noise(baseband, LONGEST / 2, 0.01, 15.0 + 10.0 * (double)i, 331 + i);
        assert_never_locks(LONGEST / 2);
    }
}

/* 8 s of a voice at 20 dB, -137 Hz; `from` to `to` seconds are where something happens to it. */
static const signal_carrier voice_carrier = {-137.0, 0.2, 0.0};

static void make_voice(uint64_t seed)
{
    signal_voice(message, signal_samples(8.0), 120.0, seed);
    signal_noisy_voice(message, signal_samples(8.0), &voice_carrier, 20.0, seed, baseband);
}

/* One lock for the whole of it, on the right carrier, and the sense before and after is the same. */
static void assert_survived(double before_s, double after_s)
{
    mb_recovery_settings settings = mb_recovery_settings_default();
    mb_recovery *recovery = NULL;

    assert_ok(mb_recovery_create(&settings, &recovery));
    size_t delay = mb_recovery_delay_samples(recovery), count = signal_samples(8.0);
    mb_recovery_process(recovery, baseband, count, rotated);
    mb_carrier_state last = mb_recovery_state(recovery);
    mb_recovery_destroy(recovery);
    double first = signal_likeness(message, rotated, signal_samples(1.0), signal_samples(before_s), delay);
    double second = signal_likeness(message, rotated, signal_samples(after_s), signal_samples(7.8), delay);
    assert_at_least(fabs(first), 0.95);
    assert_at_least(first * second, 0.9);
    assert_int_equal(last.locks, 1);
    assert_near(last.carrier_offset_hz, -137.0 + 0.2 * 8.0, 0.3);
}

static void level_steps_of_30_db_are_survived(void **state)
{
    static const float gains[] = {0.0316f, 31.6f};

    (void)state;
    print_message("seeds 341, 342\n");
    for (uint64_t k = 0; k < 2; k++) {
        make_voice(341 + k);
        for (size_t i = signal_samples(4.0); i < signal_samples(8.0); i++) {
            baseband[i] = (mb_cf32){gains[k] * baseband[i].re, gains[k] * baseband[i].im};
        }
        assert_survived(3.9, 4.5);
    }
}

/* Zeros where samples were lost, their number known: the carrier is as it would have been. */
static void a_gap_of_zeros_is_survived(void **state)
{
    (void)state;
    print_message("seed 351\n");
    make_voice(351);
    memset(baseband + signal_samples(4.0), 0, signal_samples(0.8) * sizeof *baseband);
    assert_survived(3.9, 5.0);
}

/* Samples lost without notice: phase and time jump; what follows is followed, no other carrier is taken. */
static void samples_cut_out_without_notice_are_survived(void **state)
{
    const size_t cut = signal_samples(4.0), lost = 1234, count = signal_samples(8.0) - 1234;
    mb_carrier_state last;

    (void)state;
    print_message("seed 361\n");
    make_voice(361);
    memmove(baseband + cut, baseband + cut + lost, (count - cut) * sizeof *baseband);
    memmove(message + cut, message + cut + lost, (count - cut) * sizeof *message);
    (void)muted_share(count, &last);
    assert_near(last.carrier_offset_hz, -137.0 + 0.2 * 8.0, 0.3);
    assert_int_equal(last.mode, MB_CARRIER_LOCKED);
    assert_at_least(
        fabs(signal_likeness(message, rotated, signal_samples(5.0), signal_samples(7.5), delay_now)), 0.95);
}

/* Bad samples count as zero: the same bits come out as with zeros in their place. */
static void samples_that_are_not_numbers_count_as_zero(void **state)
{
    static const float bad[] = {NAN, INFINITY, -INFINITY};
    static mb_cf32 clean[LONGEST];
    const size_t count = signal_samples(8.0);
    mb_carrier_state last;

    (void)state;
    print_message("seed 371\n");
    make_voice(371);
    for (size_t i = 0; i < 300; i++) {
        baseband[16000 + 97 * i] = (mb_cf32){0.0f, 0.0f};
    }
    (void)muted_share(count, &last);
    memcpy(clean, rotated, sizeof clean);
    for (size_t i = 0; i < 300; i++) {
        baseband[16000 + 97 * i] = i % 2 == 0 ? (mb_cf32){bad[i % 3], 0.1f} : (mb_cf32){0.1f, bad[i % 3]};
    }
    (void)muted_share(count, &last);
    assert_memory_equal(clean, rotated, count * sizeof *clean);
    assert_int_equal(last.locks, 1);
}

/* A voice that goes and is followed by a strong one elsewhere: the recovery moves over in a few seconds. */
static void another_voice_that_takes_its_place_is_found(void **state)
{
    const signal_carrier other = {612.0, 0.0, 0.3};
    const size_t half = signal_samples(8.0), count = 2 * half;
    mb_carrier_state last;

    (void)state;
    print_message("seeds 381, 382\n");
    make_voice(381);
    signal_voice(message, half, 170.0, 382);
    assert_true(count <= LONGEST);
    signal_noisy_voice(message, half, &other, 20.0, 382, baseband + half);
    (void)muted_share(count, &last);
    assert_near(last.carrier_offset_hz, 612.0, 0.3);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(it_never_locks_on_noise),
        cmocka_unit_test(it_never_locks_on_silence),
        cmocka_unit_test(it_never_locks_on_a_plain_carrier),
        cmocka_unit_test(it_never_locks_on_a_voice_with_its_full_carrier),
        cmocka_unit_test(it_never_locks_on_one_sideband_alone),
        cmocka_unit_test(level_steps_of_30_db_are_survived),
        cmocka_unit_test(a_gap_of_zeros_is_survived),
        cmocka_unit_test(samples_cut_out_without_notice_are_survived),
        cmocka_unit_test(samples_that_are_not_numbers_count_as_zero),
        cmocka_unit_test(another_voice_that_takes_its_place_is_found),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
