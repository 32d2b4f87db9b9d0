/* Live recovery of the carrier: search, lock, track, hold, and the sense of the message. */
#include "signals.h"

#include "mirrorband/carrier.h"

enum { LONGEST = 20 * 16000, BLOCK = 160 };

static float message[LONGEST];
static mb_cf32 baseband[LONGEST], rotated[LONGEST];
static mb_carrier_state states[LONGEST / BLOCK];

static mb_recovery *make_recovery(void)
{
    mb_recovery_settings settings = mb_recovery_settings_default();
    mb_recovery *recovery = NULL;

    assert_ok(mb_recovery_create(&settings, &recovery));
    return recovery;
}

/* Runs `count` samples through a new recovery, a state kept every 10 ms; returns the delay. */
static size_t run(size_t count)
{
    mb_recovery *recovery = make_recovery();
    size_t delay = mb_recovery_delay_samples(recovery);

    for (size_t at = 0; at + BLOCK <= count; at += BLOCK) {
        mb_recovery_process(recovery, baseband + at, BLOCK, rotated + at);
        states[at / BLOCK] = mb_recovery_state(recovery);
    }
    mb_recovery_destroy(recovery);
    return delay;
}

/* A perfect turn leaves nothing; the tracker's floor is 1e-4 rad^2 a block, smoothed far below -40 dB. */
static void no_message_is_left_in_the_quadrature_arm_when_locked(void **state)
{
    static const signal_carrier carriers[] = {{137.0, 0.0, 1.0}, {-890.0, 0.2, 2.0}, {0.0, -0.2, 3.0}};

    (void)state;
    print_message("seed 201\n");
    signal_voice(message, signal_samples(8.0), 115.0, 201);
    for (size_t i = 0; i < 3; i++) {
        signal_noisy_voice(message, signal_samples(8.0), &carriers[i], 60.0, 202, baseband);
        size_t delay = run(signal_samples(8.0));
        size_t from = signal_samples(1.0), to = signal_samples(7.5);
        assert_at_most(signal_quadrature_db(rotated, from + delay, to + delay), -40.0);
        assert_at_least(fabs(signal_likeness(message, rotated, from, to, delay)), 0.9999);
        const mb_carrier_state *last = &states[signal_samples(8.0) / BLOCK - 1];
        double offset_hz = carriers[i].offset_hz + carriers[i].drift_hz_s * 8.0;
        assert_near(last->carrier_offset_hz, offset_hz, 0.05);
        assert_int_equal(last->locks, 1);
        assert_at_least(last->lock_quality, 0.99);
    }
}

/* The output is the input, turned: nothing is scaled, and it lags by the stated delay to the sample. */
static void the_output_is_the_input_turned_and_delayed_as_stated(void **state)
{
    const signal_carrier carrier = {321.0, 0.0, 0.5};

    (void)state;
    signal_voice(message, signal_samples(3.0), 140.0, 211);
    signal_noisy_voice(message, signal_samples(3.0), &carrier, 30.0, 212, baseband);
    size_t delay = run(signal_samples(3.0));
    for (size_t i = signal_samples(1.0); i + delay < signal_samples(3.0); i++) {
        double in = hypot((double)baseband[i].re, (double)baseband[i].im);
        double out = hypot((double)rotated[i + delay].re, (double)rotated[i + delay].im);
        assert_near(out, in, 1e-6);
    }
}

/* 60 ms of look-ahead, 15 ms of block and middle, the delay of the low-pass: within 90 ms, so that the whole
 * live chain keeps to 120 ms. */
static void the_delay_is_that_of_live_reception(void **state)
{
    mb_recovery *recovery = make_recovery();

    (void)state;
    assert_at_most((double)mb_recovery_delay_samples(recovery) / SIGNAL_RATE_HZ, 0.09);
    mb_recovery_destroy(recovery);
}

/* SNR that goes with a correlation coefficient, dB. */
static double likeness_db(double r)
{
    return mb_power_db(r * r / (1.0 - r * r));
}

/* What ideal detection makes of the baseband: turned by the true phase. */
static void turn_ideally(const signal_carrier *carrier, size_t count, mb_cf32 *out)
{
    for (size_t i = 0; i < count; i++) {
        double c = cos(signal_phase(carrier, (double)i)), s = sin(signal_phase(carrier, (double)i));
        double re = (double)baseband[i].re, im = (double)baseband[i].im;
        out[i] = (mb_cf32){(float)(re * c + im * s), (float)(im * c - re * s)};
    }
}

/* At 10 dB the output is within 1 dB of ideal detection no later than 300 ms after speech begins: over the
 * 300 ms that follow. */
static void it_locks_within_300_ms_of_speech(void **state)
{
    static mb_cf32 ideal[LONGEST];

    (void)state;
    print_message("seeds 220 to 231\n");
    for (uint64_t seed = 220; seed < 232; seed++) {
        const double nth = (double)(seed - 220);
        const signal_carrier carrier = {-950.0 + 170.0 * nth, 0.2, 0.5 * nth};
        const size_t speech = signal_samples(1.0), count = signal_samples(2.2);
        const size_t from = signal_samples(1.3), to = signal_samples(1.6);
        memset(message, 0, speech * sizeof *message);
        signal_voice(message + speech, count - speech, 95.0 + 12.0 * nth, seed);
        signal_noisy_voice(message, count, &carrier, 10.0, seed, baseband);
        size_t delay = run(count);
        turn_ideally(&carrier, count, ideal);
        double best_db = likeness_db(signal_likeness(message, ideal, from, to, 0));
        assert_near(likeness_db(signal_likeness(message, rotated, from, to, delay)), best_db, 1.0);
    }
}

/* 4 s of voice, 1 s of pause, 4 s of voice, 3 s of pause, 4 s of voice. */
static const double pauses_s[2][2] = {{4.0, 5.0}, {9.0, 12.0}};

static void voice_with_pauses(double pitch_hz, uint64_t seed)
{
    signal_voice(message, signal_samples(16.0), pitch_hz, seed);
    for (size_t i = 0; i < 2; i++) {
        signal_pause(message, pauses_s[i][0], pauses_s[i][1]);
    }
}

/* A change of sense would turn the sign of one of the likenesses. */
static void the_sense_of_the_message_is_kept_over_pauses(void **state)
{
    static const double snrs_db[] = {10.0, 20.0, 30.0};

    (void)state;
    print_message("seeds 240 to 245\n");
    for (uint64_t i = 0; i < 6; i++) {
        const signal_carrier carrier = {-400.0 + 100.0 * (double)i, i % 2 == 0 ? 0.2 : -0.2, 0.7 * (double)i};
        voice_with_pauses(95.0 + 15.0 * (double)i, 240 + i);
        signal_noisy_voice(message, signal_samples(16.0), &carrier, snrs_db[i % 3], 240 + i, baseband);
        size_t delay = run(signal_samples(16.0));
        double before = signal_likeness(message, rotated, signal_samples(1.0), signal_samples(4.0), delay);
        double between = signal_likeness(message, rotated, signal_samples(5.0), signal_samples(9.0), delay);
        double after = signal_likeness(message, rotated, signal_samples(12.0), signal_samples(15.8), delay);
        assert_at_least(fabs(before), 0.8);
        assert_at_least(before * between, 0.6);
        assert_at_least(before * after, 0.6);
    }
}

/* Search, locked, hold in the pause, locked: each in its time, one lock, and both pauses counted. */
static void the_modes_follow_the_voice_and_are_counted(void **state)
{
    const signal_carrier carrier = {77.0, 0.1, 0.0};

    (void)state;
    print_message("seed 251\n");
    voice_with_pauses(120.0, 251);
    memset(message, 0, signal_samples(1.0) * sizeof *message);
    signal_noisy_voice(message, signal_samples(16.0), &carrier, 20.0, 251, baseband);
    (void)run(signal_samples(16.0));
    assert_int_equal(states[95].mode, MB_CARRIER_SEARCH);
    assert_int_equal(states[130].mode, MB_CARRIER_LOCKED);
    for (size_t i = 0; i < 2; i++) {
        size_t middle = (size_t)(50.0 * (pauses_s[i][0] + pauses_s[i][1]));
        assert_int_equal(states[middle].mode, MB_CARRIER_HOLD);
        size_t locked = 0, end = (size_t)(100.0 * pauses_s[i][1]);
        for (size_t k = end; k < end + 30; k++) {
            locked += states[k].mode == MB_CARRIER_LOCKED ? 1 : 0;
        }
        assert_true(locked > 10); /* of the 30 blocks that follow the pause */
    }
    const mb_carrier_state *last = &states[1599];
    assert_int_equal(last->locks, 1);
    assert_at_least((double)last->holds, 2.0);
    assert_at_least(last->active_s, 3.0);
    assert_at_most(last->active_s, 11.0); /* of 11 s of voice */
    assert_near(last->time_s, 16.0, 1e-9);
    assert_near(last->snr_db, 20.0, 3.0);
}

/* The oscillator may wander by a quarter turn in some 6 s (frequency walk 0.01 Hz a root second): a pause of
 * 1 s leaves no doubt about the polarity, one of 12 s does, and says so. */
static void a_pause_too_long_makes_the_polarity_uncertain(void **state)
{
    const signal_carrier carrier = {200.0, 0.0, 0.0};
    const size_t count = signal_samples(16.0);

    (void)state;
    print_message("seed 291\n");
    signal_voice(message, count, 120.0, 291);
    signal_pause(message, 3.0, 15.0);
    signal_noisy_voice(message, count, &carrier, 20.0, 291, baseband);
    (void)run(count);
    assert_false(states[290].polarity_uncertain);
    assert_false(states[400].polarity_uncertain);
    assert_true(states[1500].polarity_uncertain);
    assert_at_least(states[1490].phase_sigma_rad, 0.5);
}

/* A constant factor is no matter; the rounding of float and the floor of the noise meter leave 1e-4. */
static void the_level_of_the_input_does_not_matter(void **state)
{
    static const double gains_db[] = {0.0, -50.0, 20.0}; /* of a voice at -20 dBFS: -70 dBFS to full scale */
    const signal_carrier carrier = {-612.0, 0.2, 0.0};
    mb_carrier_state first = {.mode = MB_CARRIER_SEARCH};

    (void)state;
    print_message("seed 261\n");
    for (size_t k = 0; k < 3; k++) {
        signal_voice(message, signal_samples(4.0), 130.0, 261);
        signal_noisy_voice(message, signal_samples(4.0), &carrier, 20.0, 261, baseband);
        float gain = (float)pow(10.0, gains_db[k] / 20.0);
        for (size_t i = 0; i < signal_samples(4.0); i++) {
            baseband[i] = (mb_cf32){gain * baseband[i].re, gain * baseband[i].im};
        }
        (void)run(signal_samples(4.0));
        mb_carrier_state last = states[399];
        first = k == 0 ? last : first;
        assert_int_equal(last.locks, 1);
        assert_near(last.carrier_offset_hz, first.carrier_offset_hz, 1e-4);
        assert_near(last.lock_quality, first.lock_quality, 1e-4);
        assert_near(last.active_s, first.active_s, 0.011); /* a block at the gate may fall either way */
        assert_near(last.in_phase_dbfs, first.in_phase_dbfs + gains_db[k], 0.01);
    }
}

/* Zeros until something is locked. */
static void the_output_is_muted_while_nothing_is_locked(void **state)
{
    (void)state;
    memset(baseband, 0, sizeof baseband);
    signal_add_noise(baseband, 32000, 1.0, 0.0, 271);
    (void)run(32000);
    for (size_t i = 0; i < 32000; i++) {
        assert_true(fabsf(rotated[i].re) <= 0.0f && fabsf(rotated[i].im) <= 0.0f);
    }
    assert_int_equal(states[199].mode, MB_CARRIER_SEARCH);
}

/* The textbook loop behind the same interface: locked by the search, no message in the quadrature arm. */
static void the_costas_tracker_works_behind_the_same_interface(void **state)
{
    mb_recovery_settings settings = mb_recovery_settings_default();
    const signal_carrier carrier = {505.0, 0.0, 1.0};
    const size_t count = signal_samples(6.0);
    mb_recovery *recovery = NULL;

    (void)state;
    settings.tracker = MB_TRACKER_COSTAS;
    assert_ok(mb_recovery_create(&settings, &recovery));
    signal_voice(message, count, 110.0, 281);
    signal_noisy_voice(message, count, &carrier, 30.0, 282, baseband);
    mb_recovery_process(recovery, baseband, count, rotated);
    mb_carrier_state last = mb_recovery_state(recovery);
    assert_near(last.carrier_offset_hz, 505.0, 1.0);
    assert_int_equal(last.locks, 1);
    size_t delay = mb_recovery_delay_samples(recovery);
    assert_at_least(fabs(signal_likeness(message, rotated, signal_samples(1.0), signal_samples(5.5), delay)),
                    0.99);
    mb_recovery_destroy(recovery);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(no_message_is_left_in_the_quadrature_arm_when_locked),
        cmocka_unit_test(the_output_is_the_input_turned_and_delayed_as_stated),
        cmocka_unit_test(the_delay_is_that_of_live_reception),
        cmocka_unit_test(it_locks_within_300_ms_of_speech),
        cmocka_unit_test(the_sense_of_the_message_is_kept_over_pauses),
        cmocka_unit_test(the_modes_follow_the_voice_and_are_counted),
        cmocka_unit_test(a_pause_too_long_makes_the_polarity_uncertain),
        cmocka_unit_test(the_level_of_the_input_does_not_matter),
        cmocka_unit_test(the_output_is_muted_while_nothing_is_locked),
        cmocka_unit_test(the_costas_tracker_works_behind_the_same_interface),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
