/* Quantities are read with their unit, and printed the way they are read. */
#include "check.h"

static void a_unit_may_stand_with_or_without_a_space(void **state)
{
    double spaced = 0.0, joined = 0.0;

    (void)state;
    assert_ok(mb_quantity_parse("137 Hz", MB_UNIT_HZ, &spaced));
    assert_ok(mb_quantity_parse("137Hz", MB_UNIT_HZ, &joined));
    assert_true(spaced == 137.0 && joined == 137.0);
}

static void prefixes_scale_exactly(void **state)
{
    static const struct {
        const char *text;
        mb_unit unit;
        double value;
    } cases[] = {
        {"7.285 MHz", MB_UNIT_HZ, 7285000.0}, {"-40 dBc", MB_UNIT_DBC, -40.0}, {"250 ms", MB_UNIT_S, 0.25},
        {"0.2 Hz/s", MB_UNIT_HZ_PER_S, 0.2},  {"2 min", MB_UNIT_S, 120.0},     {"1e3 Hz", MB_UNIT_HZ, 1000.0},
        {" 3 % ", MB_UNIT_PERCENT, 3.0},      {"0", MB_UNIT_HZ, 0.0},          {"16", MB_UNIT_NUMBER, 16.0}};

    (void)state;
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        double value = NAN;
        assert_ok(mb_quantity_parse(cases[i].text, cases[i].unit, &value));
        assert_true(value == cases[i].value);
    }
}

static void a_wrong_unit_is_named_with_the_units_accepted(void **state)
{
    double value = 0.0;

    (void)state;
    static const char *const wrong[] = {"137", "137 dB", "Hz", "", "1,5 Hz", "137 hz", "nan Hz", "1 Hz Hz"};
    for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++) {
        assert_int_equal(mb_quantity_parse(wrong[i], MB_UNIT_HZ, &value), MB_ERROR_CONFIG);
        assert_non_null(strstr(mb_last_fault()->text, "Hz, kHz, MHz, GHz"));
    }
    assert_int_equal(mb_quantity_parse("3 Hz", MB_UNIT_NUMBER, &value), MB_ERROR_CONFIG);
}

static void what_is_printed_reads_back(void **state)
{
    static const double values[] = {0.0, 7285000.0, 137.0, -137.0, 0.001, 2.4e6, 999.5, 1e9};

    (void)state;
    for (size_t i = 0; i < sizeof values / sizeof values[0]; i++) {
        char text[64];
        double value = NAN;
        mb_quantity_print(values[i], MB_UNIT_HZ, text, sizeof text);
        assert_ok(mb_quantity_parse(text, MB_UNIT_HZ, &value));
        assert_near(value, values[i], 1e-9 * fabs(values[i]));
    }
    char text[64];
    mb_quantity_print(7285000.0, MB_UNIT_HZ, text, sizeof text);
    assert_string_equal(text, "7.285 MHz");
    mb_quantity_print(0.25, MB_UNIT_S, text, sizeof text);
    assert_string_equal(text, "250 ms");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_unit_may_stand_with_or_without_a_space),
        cmocka_unit_test(prefixes_scale_exactly),
        cmocka_unit_test(a_wrong_unit_is_named_with_the_units_accepted),
        cmocka_unit_test(what_is_printed_reads_back),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
