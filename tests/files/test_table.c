/* A table gives back the very same numbers, by the names of its columns, whatever the locale. */
#include <locale.h>

#include "samples.h"

static const char *path_in(const char *name)
{
    return path_of("table", name);
}

static void numbers_come_back_to_the_last_bit(void **state)
{
    static const char *const columns[] = {"time_s", "phase_rad", "gain_db"};
    static const char *const wanted[] = {"gain_db", "time_s"};
    mb_table_writer *writer = NULL;
    mb_table_reader *reader = NULL;
    double rows[500][3], back[2];
    bool more = true;
    mb_random random;

    (void)state;
    mb_random_seed(&random, 11, 0);
    for (size_t i = 0; i < 500; i++) {
        rows[i][0] = (double)i * 0.01;
        rows[i][1] = mb_random_normal(&random) * pow(10.0, 40.0 * mb_random_uniform(&random) - 20.0);
        rows[i][2] = i % 7 == 0 ? NAN : i % 11 == 0 ? -INFINITY : mb_random_normal(&random);
    }
    assert_ok(mb_table_writer_create(path_in("a.csv"), columns, 3, "truth of a channel\nseed 11", &writer));
    for (size_t i = 0; i < 500; i++) {
        assert_ok(mb_table_writer_row(writer, rows[i]));
    }
    assert_ok(mb_table_writer_commit(writer));
    mb_table_writer_destroy(writer);
    assert_ok(mb_table_reader_open(path_in("a.csv"), wanted, 2, &reader));
    assert_int_equal(mb_table_reader_column_count(reader), 3);
    assert_string_equal(mb_table_reader_column(reader, 1), "phase_rad");
    assert_null(mb_table_reader_column(reader, 3));
    assert_true(mb_table_reader_has(reader, "gain_db") && !mb_table_reader_has(reader, "gain"));
    for (size_t i = 0; i < 500; i++) {
        assert_ok(mb_table_reader_row(reader, back, &more));
        assert_true(more && back[1] == rows[i][0]);
        assert_true(back[0] == rows[i][2] || (isnan(back[0]) && isnan(rows[i][2])));
    }
    assert_ok(mb_table_reader_row(reader, back, &more));
    assert_false(more);
    mb_table_reader_close(reader);
}

static void short_numbers_stay_short(void **state)
{
    static const char *const columns[] = {"a", "b"};
    static const char expected[] = "# x\na,b\n0.1,137\n-2.5e-07,0.30000000000000004\n";
    char text[100] = "";
    mb_table_writer *writer = NULL;

    (void)state;
    assert_ok(mb_table_writer_create(path_in("short.csv"), columns, 2, "x", &writer));
    assert_ok(mb_table_writer_row(writer, (const double[]){0.1, 137.0}));
    assert_ok(mb_table_writer_row(writer, (const double[]){-2.5e-7, 0.1 + 0.2}));
    assert_false(is_there(path_in("short.csv")));
    assert_ok(mb_table_writer_commit(writer));
    mb_table_writer_destroy(writer);
    (void)get_file(path_in("short.csv"), text, sizeof text - 1);
    assert_string_equal(text, expected);
    assert_int_equal(remove(path_in("short.csv")), 0);
}

static void a_decimal_comma_of_the_locale_does_not_matter(void **state)
{
    (void)state;
    if (setlocale(LC_ALL, "de_DE.UTF-8") == NULL && setlocale(LC_ALL, "sv_SE.UTF-8") == NULL) {
        skip();
    }
    numbers_come_back_to_the_last_bit(state);
    (void)setlocale(LC_ALL, "C");
}

static void tables_of_others_are_read(void **state)
{
    static const char text[] = "\xef\xbb\xbftime_s , offset_hz\r\n# remark\r\n\r\n 0, 1e3 \r\n1,\r\n2,+inf";
    mb_table_reader *reader = NULL;
    double row[2];
    bool more = false;

    (void)state;
    put_file(path_in("others.csv"), text, sizeof text - 1);
    assert_ok(mb_table_reader_open(path_in("others.csv"), NULL, 0, &reader));
    assert_ok(mb_table_reader_row(reader, row, &more));
    assert_true(row[0] == 0.0 && row[1] == 1000.0);
    assert_ok(mb_table_reader_row(reader, row, &more));
    assert_true(row[0] == 1.0 && isnan(row[1]));
    assert_ok(mb_table_reader_row(reader, row, &more));
    assert_true(more && row[1] == INFINITY);
    assert_ok(mb_table_reader_row(reader, row, &more));
    assert_false(more);
    mb_table_reader_close(reader);
    mb_table_reader_close(NULL);
}

static void names_of_columns_are_checked(void **state)
{
    static const char *const twice[] = {"a", "a"}, *const comma[] = {"a,b"};
    mb_table_writer *writer = NULL;
    mb_table_reader *reader = NULL;

    (void)state;
    assert_fault(mb_table_writer_create("x.csv", twice, 2, NULL, &writer), MB_ERROR_ARGUMENT, "columns");
    assert_fault(mb_table_writer_create("x.csv", comma, 1, NULL, &writer), MB_ERROR_ARGUMENT, "columns");
    assert_fault(mb_table_writer_create("x.csv", comma, 0, NULL, &writer), MB_ERROR_ARGUMENT, "column_count");
    assert_fault(mb_table_reader_open(MB_TEST_SOURCE_DIR "/tests/files/bad/good.csv",
                                      (const char *const[]){"time_s", "time_s"}, 2, &reader),
                 MB_ERROR_ARGUMENT, "columns");
    mb_table_writer_destroy(NULL);
    mb_table_writer_abandon(NULL);
}

static void an_interrupted_table_says_so(void **state)
{
    char text[100] = "";
    mb_table_writer *writer = NULL;

    (void)state;
    assert_ok(mb_table_writer_create(path_in("kept.csv"), (const char *const[]){"a"}, 1, NULL, &writer));
    assert_ok(mb_table_writer_row(writer, (const double[]){1.0}));
    assert_ok(mb_table_writer_keep_partial(writer));
    mb_table_writer_destroy(writer);
    (void)get_file(path_in("kept.csv"), text, sizeof text - 1);
    assert_string_equal(text, "a\n1\n# interrupted here\n");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(numbers_come_back_to_the_last_bit),
        cmocka_unit_test(short_numbers_stay_short),
        cmocka_unit_test(a_decimal_comma_of_the_locale_does_not_matter),
        cmocka_unit_test(tables_of_others_are_read),
        cmocka_unit_test(names_of_columns_are_checked),
        cmocka_unit_test(an_interrupted_table_says_so),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
