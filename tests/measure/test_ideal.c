/* Ideal detection takes the true phase off exactly, and says when it has to wait for it. */
#include "check.h"
#include "failing_memory.h"

#include "mirrorband/measure.h"

enum { RATE = 16000, COUNT = 48000, POINTS = COUNT / 160 + 1 };

/* Offset, drift and a slow wobble; rad at a time. */
static double carrier_phase(double t)
{
    return 0.3 + 2.0 * MB_PI * (137.0 * t + 0.1 * t * t) + 0.5 * sin(2.0 * MB_PI * 1.5 * t);
}

static double message(int i)
{
    return 0.5 * sin(2.0 * MB_PI * 900.0 * i / RATE);
}

static mb_cf32 *received(void)
{
    mb_cf32 *samples = mb_allocate(COUNT, sizeof *samples);

    assert_non_null(samples);
    for (int i = 0; i < COUNT; i++) {
        double phase = carrier_phase((double)i / RATE);
        samples[i] = (mb_cf32){(float)(message(i) * cos(phase)), (float)(message(i) * sin(phase))};
    }
    return samples;
}

/* Points every 10 ms, as a truth has them. */
static void track_of(mb_phase_point points[POINTS])
{
    for (int i = 0; i < POINTS; i++) {
        points[i] = (mb_phase_point){0.01 * i, carrier_phase(0.01 * i)};
    }
}

static double worst_error(const float *audio, int count)
{
    double worst = 0.0;

    for (int i = 0; i < count; i++) {
        worst = fmax(worst, fabs((double)audio[i] - message(i)));
    }
    return worst;
}

/* Error of the cubic: |phase''''| h^4/384 = 0.5 (2 pi 1.5)^4 1e-8/384 = 1e-7 rad, in the middle; slopes of
 * parabolas add (2 pi 1.5)^3 h^3/24 0.5 = 2e-5 rad. An in-phase error is half its square. So rounding to
 * single precision (0.5 x 2^-24 twice) rules. */
static void the_message_comes_back_to_single_precision(void **state)
{
    mb_ideal_settings settings = mb_ideal_settings_default();
    mb_ideal *ideal = NULL;
    mb_phase_point points[POINTS];
    mb_cf32 *samples = received();
    float *audio = mb_allocate(COUNT, sizeof *audio);

    (void)state;
    assert_non_null(audio);
    track_of(points);
    assert_ok(mb_ideal_create(&settings, &ideal));
    assert_int_equal(mb_ideal_track(ideal, points, POINTS), POINTS);
    mb_ideal_track_end(ideal);
    assert_int_equal(mb_ideal_process(ideal, samples, COUNT, audio), COUNT);
    assert_at_most(worst_error(audio, COUNT), 1.5e-7);
    mb_ideal_destroy(ideal);
    mb_release(audio);
    mb_release(samples);
}

/* Straight lines err by |phase''| h^2/8 = (0.4 pi + 0.5 (2 pi 1.5)^2) 1e-4/8 = 5.7e-4 rad, at half its
 * square. */
static void straight_lines_lose_little(void **state)
{
    mb_ideal_settings settings = mb_ideal_settings_default();
    mb_ideal *ideal = NULL;
    mb_phase_point points[POINTS];
    mb_cf32 *samples = received();
    float *audio = mb_allocate(COUNT, sizeof *audio);

    (void)state;
    assert_non_null(audio);
    track_of(points);
    settings.linear = true;
    assert_ok(mb_ideal_create(&settings, &ideal));
    assert_int_equal(mb_ideal_track(ideal, points, POINTS), POINTS);
    mb_ideal_track_end(ideal);
    assert_int_equal(mb_ideal_process(ideal, samples, COUNT, audio), COUNT);
    assert_at_most(worst_error(audio, COUNT), 0.5 * 0.5 * 5.7e-4 * 5.7e-4 + 1e-7);
    mb_ideal_destroy(ideal);
    mb_release(audio);
    mb_release(samples);
}

/* Points and samples in small pieces: the stage waits for the track, and gives the same bits. */
static void it_waits_for_the_track_and_cuts_change_no_bit(void **state)
{
    mb_ideal_settings settings = mb_ideal_settings_default();
    mb_ideal *ideal = NULL;
    mb_phase_point points[POINTS];
    mb_cf32 *samples = received();
    float *whole = mb_allocate(COUNT, sizeof *whole), *cut = mb_allocate(COUNT, sizeof *cut);
    size_t given = 0, made = 0;

    (void)state;
    assert_true(whole != NULL && cut != NULL);
    track_of(points);
    assert_ok(mb_ideal_create(&settings, &ideal));
    assert_int_equal(mb_ideal_process(ideal, samples, 10, whole), 0);
    assert_int_equal(mb_ideal_track(ideal, points, POINTS), POINTS);
    size_t reached = mb_ideal_process(ideal, samples, COUNT, whole);
    assert_int_equal(reached, COUNT - 160); /* the last two points enclose nothing that has two ahead */
    mb_ideal_reset(ideal);
    while (made < reached) {
        given += mb_ideal_track(ideal, points + given, POINTS - given > 3 ? 3 : POINTS - given);
        size_t offered = reached - made > 333 ? 333 : reached - made;
        made += mb_ideal_process(ideal, samples + made, offered, cut + made);
    }
    assert_memory_equal(whole, cut, reached * sizeof *whole);
    mb_ideal_destroy(ideal);
    mb_release(whole);
    mb_release(cut);
    mb_release(samples);
}

/* Beyond its ends a track runs on at its last slope: a steady offset needs two points only. */
static void a_track_runs_on_beyond_its_ends(void **state)
{
    mb_ideal_settings settings = mb_ideal_settings_default();
    mb_ideal *ideal = NULL;
    const double turn = 2.0 * MB_PI * 50.0;
    const mb_phase_point points[2] = {{0.5, turn * 0.5}, {1.0, turn * 1.0}};
    mb_cf32 sample;
    float audio;

    (void)state;
    assert_ok(mb_ideal_create(&settings, &ideal));
    assert_int_equal(mb_ideal_track(ideal, points, 2), 2);
    mb_ideal_track_end(ideal);
    for (int i = 0; i < 2 * RATE; i++) {
        double phase = turn * i / RATE;
        sample = (mb_cf32){(float)cos(phase), (float)sin(phase)};
        assert_int_equal(mb_ideal_process(ideal, &sample, 1, &audio), 1);
        assert_near(audio, 1.0, 1e-6);
    }
    mb_ideal_destroy(ideal);
}

static void bad_points_samples_and_settings_are_dealt_with(void **state)
{
    mb_ideal_settings settings = mb_ideal_settings_default();
    mb_ideal *ideal = NULL;
    const mb_phase_point points[4] = {{0.0, 0.0}, {NAN, 1.0}, {0.0, 2.0}, {1.0, 0.0}};
    mb_phase_point many[5000];
    const mb_cf32 samples[2] = {{NAN, 0.0f}, {0.25f, 1.0f}};
    float audio[2];

    (void)state;
    settings.rate_hz = 1.0;
    assert_fault(mb_ideal_create(&settings, &ideal), MB_ERROR_ARGUMENT, "rate_hz");
    assert_null(ideal);
    settings.rate_hz = RATE;
    assert_survives_lack_of_memory(mb_ideal_create(&settings, &ideal));
    assert_int_equal(mb_ideal_track(ideal, points, 4), 4);
    mb_ideal_track_end(ideal);
    assert_int_equal(mb_ideal_process(ideal, samples, 2, audio), 2);
    assert_near(audio[0], 0.0, 0.0);
    assert_near(audio[1], 0.25, 1e-7);
    assert_int_equal(mb_ideal_non_finite(ideal), 1);
    mb_ideal_reset(ideal);
    for (int i = 0; i < 5000; i++) {
        many[i] = (mb_phase_point){0.01 * i, 0.0};
    }
    assert_int_equal(mb_ideal_track(ideal, many, 5000), 4098); /* full: the rest is offered again later */
    mb_ideal_destroy(ideal);
    mb_ideal_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_message_comes_back_to_single_precision),
        cmocka_unit_test(straight_lines_lose_little),
        cmocka_unit_test(it_waits_for_the_track_and_cuts_change_no_bit),
        cmocka_unit_test(a_track_runs_on_beyond_its_ends),
        cmocka_unit_test(bad_points_samples_and_settings_are_dealt_with),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
