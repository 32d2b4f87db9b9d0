/* The look-ahead gain: smooth, and never more than was asked for. */
#include "check.h"
#include "look_ahead.h"
#include "voice_reference.h"

/* Against scipy.ndimage.minimum_filter1d and scipy.signal.windows.kaiser
 * (tests/reference/voice_reference.py); the wanted gains are made alike here and there. Tolerance: rounding
 * of sums of 37 terms. */
static void the_gain_is_the_windowed_sliding_minimum(void **state)
{
    mb_look_ahead ahead;
    uint64_t word = 12345;

    (void)state;
    assert_ok(mb_look_ahead_start(&ahead, REFERENCE_LENGTH));
    mb_look_ahead_clear(&ahead, 1.0);
    for (size_t i = 0; i < REFERENCE_COUNT; i++) {
        word = (1103515245 * word + 12345) % (UINT64_C(1) << 31);
        double part = (double)word / (double)(UINT64_C(1) << 31);
        double wanted = part < 0.2 ? 0.05 + 0.95 * part / 0.2 : 1.0;
        assert_near(mb_look_ahead_next(&ahead, wanted), reference_gain[i], 1e-14);
    }
    mb_look_ahead_stop(&ahead);
}

/* Wanted gains over 60 dB at random, lengths odd, even and least: the gain for sample n - L + 1 is at most
 * what that sample asked for, within rounding. */
static void the_gain_never_exceeds_what_was_asked_for(void **state)
{
    static const size_t lengths[] = {2, 3, 16, 191, 192};
    double wanted[2000];
    mb_random random;

    (void)state;
    print_message("seed 8\n");
    mb_random_seed(&random, 8, 0);
    for (size_t k = 0; k < sizeof lengths / sizeof lengths[0]; k++) {
        mb_look_ahead ahead;
        assert_ok(mb_look_ahead_start(&ahead, lengths[k]));
        mb_look_ahead_clear(&ahead, 1000.0);
        for (size_t i = 0; i < 2000; i++) {
            wanted[i] = pow(10.0, -3.0 * mb_random_uniform(&random));
            double gain = mb_look_ahead_next(&ahead, wanted[i]);
            if (i + 1 >= lengths[k]) {
                assert_at_most(gain, wanted[i + 1 - lengths[k]] * (1.0 + 1e-12));
            }
        }
        mb_look_ahead_stop(&ahead);
    }
}

/* So that a voice below the bound is not touched. */
static void a_steady_wish_is_granted_as_it_is(void **state)
{
    mb_look_ahead ahead;

    (void)state;
    assert_ok(mb_look_ahead_start(&ahead, 192));
    mb_look_ahead_clear(&ahead, 1.0);
    for (size_t i = 0; i < 1000; i++) {
        assert_near(mb_look_ahead_next(&ahead, 1.0), 1.0, 1e-15);
    }
    mb_look_ahead_stop(&ahead);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_gain_is_the_windowed_sliding_minimum),
        cmocka_unit_test(the_gain_never_exceeds_what_was_asked_for),
        cmocka_unit_test(a_steady_wish_is_granted_as_it_is),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
