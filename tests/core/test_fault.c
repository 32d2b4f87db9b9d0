/* A failure names the field, the range and the value; memory refused is a status, never a crash. */
#include "check.h"

static bool refuse(void *user, size_t bytes)
{
    (void)bytes;
    *(int *)user += 1;
    return false;
}

static void a_value_out_of_range_is_told_with_its_range(void **state)
{
    (void)state;
    assert_int_equal(mb_check_range("span_hz", 5.0, 1.0, 10.0, "Hz"), MB_OK);
    assert_fault(mb_check_range("span_hz", 50.0, 1.0, 10.0, "Hz"), MB_ERROR_ARGUMENT, "span_hz");
    assert_string_equal(mb_last_fault()->text, "span_hz must be between 1 and 10 Hz; it is 50");
    assert_int_equal(mb_check_range("span_hz", NAN, 1.0, 10.0, "Hz"), MB_ERROR_ARGUMENT);
}

static void refused_memory_is_a_status(void **state)
{
    mb_ring *ring = NULL;
    int asked = 0;

    (void)state;
    mb_allocation_gate_set(refuse, &asked);
    assert_int_equal(mb_ring_create(8, 4, &ring), MB_ERROR_MEMORY);
    mb_allocation_gate_set(NULL, NULL);
    assert_null(ring);
    assert_true(asked > 0);
}

static void non_finite_samples_become_zero_and_are_counted(void **state)
{
    mb_cf32 samples[3] = {{1.0f, 2.0f}, {NAN, 1.0f}, {0.5f, -INFINITY}};

    (void)state;
    assert_int_equal(mb_scrub_cf32(samples, 3), 2);
    assert_true(samples[0].im == 2.0f && samples[1].im == 0.0f && samples[2].re == 0.0f);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_value_out_of_range_is_told_with_its_range),
        cmocka_unit_test(refused_memory_is_a_status),
        cmocka_unit_test(non_finite_samples_become_zero_and_are_counted),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
