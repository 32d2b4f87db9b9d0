/* Every set of kernels this machine can run gives the bits of the plain one, and the plain one is right. */
#include "kernels/kernels.h"
#include "signals.h"

enum { COUNT = 1024, SEED = 11 };

static float a[2 * COUNT], b[2 * COUNT];
static mb_cf32 x[COUNT];
static mb_ci16 taps_re[COUNT], taps_im[COUNT], shorts[COUNT];

static int fill(void **state)
{
    mb_random random;

    (void)state;
    print_message("seed %d\n", SEED);
    mb_random_seed(&random, SEED, 0);
    for (size_t i = 0; i < 2 * COUNT; i++) {
        a[i] = (float)mb_random_normal(&random);
        b[i] = (float)mb_random_normal(&random);
    }
    for (size_t i = 0; i < COUNT; i++) {
        x[i] = (mb_cf32){(float)mb_random_normal(&random), (float)mb_random_normal(&random)};
        double angle = 2.0 * MB_PI * mb_random_uniform(&random);
        int16_t re = (int16_t)(MB_SHORT_TAP * cos(angle)), im = (int16_t)(MB_SHORT_TAP * sin(angle));
        uint64_t bits = mb_random_bits(&random);
        taps_re[i] = (mb_ci16){re, (int16_t)-im};
        taps_im[i] = (mb_ci16){im, re};
        shorts[i] = (mb_ci16){(int16_t)(bits & 0xffffu), (int16_t)(bits >> 48)};
    }
    return 0;
}

static bool same(const void *one, const void *other, size_t bytes)
{
    return memcmp(one, other, bytes) == 0;
}

static void sums_have_the_same_bits_in_every_set(void **state)
{
    const mb_kernels *plain = mb_kernels_at(0), *other;

    (void)state;
    for (size_t set = 1; (other = mb_kernels_at(set)) != NULL; set++) {
        for (size_t n = MB_LANES; n <= COUNT; n += MB_LANES) {
            float one = plain->dot(a + 1, b + 3, n - MB_LANES), two = other->dot(a + 1, b + 3, n - MB_LANES);
            mb_cf32 three = plain->dot_cf32(a, b, x, n), four = other->dot_cf32(a, b, x, n);
            mb_cf32 five = plain->dot_ci16(taps_re, taps_im, shorts, n - MB_SHORT_LANES);
            mb_cf32 six = other->dot_ci16(taps_re, taps_im, shorts, n - MB_SHORT_LANES);
            assert_true(same(&one, &two, sizeof one));
            assert_true(same(&three, &four, sizeof three));
            assert_true(same(&five, &six, sizeof five));
        }
        print_message("%s agrees with %s\n", other->name, plain->name);
    }
}

static void rotation_has_the_same_bits_in_every_set(void **state)
{
    const mb_kernels *plain = mb_kernels_at(0), *other;
    static mb_cf32 one[COUNT], two[COUNT];

    (void)state;
    for (size_t set = 1; (other = mb_kernels_at(set)) != NULL; set++) {
        for (size_t n = 1; n < COUNT; n += 37) {
            plain->rotate(UINT64_C(0x123456789abcdef) * n, UINT64_C(0xfedcba9876543211) / n, x, n, one);
            other->rotate(UINT64_C(0x123456789abcdef) * n, UINT64_C(0xfedcba9876543211) / n, x, n, two);
            assert_true(same(one, two, n * sizeof *one));
        }
    }
}

static void what_is_no_number_is_seen_wherever_it_stands(void **state)
{
    static const float bad[] = {NAN, -NAN, INFINITY, -INFINITY};
    const mb_kernels *kernels;
    float values[100];

    (void)state;
    for (size_t set = 0; (kernels = mb_kernels_at(set)) != NULL; set++) {
        for (size_t i = 0; i < 100; i++) {
            memcpy(values, a, sizeof values);
            values[50] = 3.4e38f; /* large, but a number */
            assert_true(kernels->all_finite(values, 100));
            values[i] = bad[i % 4];
            assert_false(kernels->all_finite(values, 100));
        }
    }
}

/* Tolerance: rounding of 1024 products of size 1 in float, some 1e-6 of the root of their number. */
static void sums_are_right(void **state)
{
    double sum = 0.0, re = 0.0, im = 0.0;

    (void)state;
    for (size_t i = 0; i < COUNT; i++) {
        sum += (double)a[i] * (double)b[i];
        re += (double)shorts[i].re * taps_re[i].re + (double)shorts[i].im * taps_re[i].im;
        im += (double)shorts[i].re * taps_im[i].re + (double)shorts[i].im * taps_im[i].im;
    }
    mb_cf32 made = mb_kernels_best()->dot_ci16(taps_re, taps_im, shorts, COUNT);
    assert_near(mb_kernels_best()->dot(a, b, COUNT), sum, 3e-5);
    assert_near(made.re, re, 1e-6 * 32768.0 * MB_SHORT_TAP * 32.0);
    assert_near(made.im, im, 1e-6 * 32768.0 * MB_SHORT_TAP * 32.0);
}

/* Worst case: every product of a whole segment as large as it can be, of either sign. */
static void full_scale_samples_do_not_overflow(void **state)
{
    static mb_ci16 hard[COUNT], re[COUNT], im[COUNT];
    int16_t part = (int16_t)lrint(MB_SHORT_TAP * sqrt(0.5));
    const mb_kernels *kernels;

    (void)state;
    for (size_t i = 0; i < COUNT; i++) {
        hard[i] = (mb_ci16){INT16_MIN, INT16_MIN};
        re[i] = (mb_ci16){part, part};
        im[i] = (mb_ci16){(int16_t)-part, (int16_t)-part};
    }
    for (size_t set = 0; (kernels = mb_kernels_at(set)) != NULL; set++) {
        mb_cf32 made = kernels->dot_ci16(re, im, hard, COUNT);
        assert_near(made.re / (-65536.0 * part * COUNT), 1.0, 1e-6);
        assert_near(made.im / (65536.0 * part * COUNT), 1.0, 1e-6);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(sums_have_the_same_bits_in_every_set),
        cmocka_unit_test(rotation_has_the_same_bits_in_every_set),
        cmocka_unit_test(what_is_no_number_is_seen_wherever_it_stands),
        cmocka_unit_test(sums_are_right),
        cmocka_unit_test(full_scale_samples_do_not_overflow),
    };
    return cmocka_run_group_tests(tests, fill, NULL);
}
