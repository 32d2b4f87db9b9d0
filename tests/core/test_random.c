/* Random numbers: repeatable, independent between streams, and Gaussian. */
#include "check.h"

enum { SEED = 20, DRAWS = 1000000 };

static void equal_seeds_repeat_and_streams_differ(void **state)
{
    mb_random first, again, other;

    (void)state;
    mb_random_seed(&first, SEED, 0);
    mb_random_seed(&again, SEED, 0);
    mb_random_seed(&other, SEED, 1);
    uint64_t number = mb_random_bits(&first);
    assert_true(number == mb_random_bits(&again));
    assert_true(number != mb_random_bits(&other));
}

/* Tail shares of a Gaussian: P(|x| > 2, 3 sigma) = 0.0455003, 0.00269980 (error function,
 * scipy.special.erfc). Tolerance: four standard deviations of a count of DRAWS trials. */
static void normal_numbers_have_gaussian_moments_and_tails(void **state)
{
    mb_random random;
    double sum = 0.0, square = 0.0, beyond_2 = 0.0, beyond_3 = 0.0;

    (void)state;
    print_message("seed %d\n", SEED);
    mb_random_seed(&random, SEED, 0);
    for (int i = 0; i < DRAWS; i++) {
        double x = mb_random_normal(&random);
        sum += x;
        square += x * x;
        beyond_2 += fabs(x) > 2.0;
        beyond_3 += fabs(x) > 3.0;
    }
    assert_near(sum / DRAWS, 0.0, 4.0 / sqrt(DRAWS));
    assert_near(square / DRAWS, 1.0, 4.0 * sqrt(2.0 / DRAWS));
    assert_near(beyond_2 / DRAWS, 0.0455003, 4.0 * sqrt(0.0455003 / DRAWS));
    assert_near(beyond_3 / DRAWS, 0.0026998, 4.0 * sqrt(0.0026998 / DRAWS));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(equal_seeds_repeat_and_streams_differ),
        cmocka_unit_test(normal_numbers_have_gaussian_moments_and_tails),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
