/* Results are valid JSON with the digits that were meant. */
#include "check.h"

#include "json.h"
#include "outcome.h"

static const app_program sample = {.name = "mb-sample"};

/* What app_json_print writes of an object, to be freed. */
static char *printed(json_t *object)
{
    char *text = NULL;
    size_t length = 0;
    FILE *stream = open_memstream(&text, &length);

    assert_non_null(stream);
    assert_int_equal(app_json_print(&sample, object, stream), APP_OK);
    assert_int_equal(fclose(stream), 0);
    return text;
}

static void numbers_have_the_decimals_asked_for(void **state)
{
    json_t *object = app_json_begin(&sample);

    (void)state;
    app_json_set(object, "snr_db", 15.123456789, 2);
    app_json_set(object, "rate_hz", 240000.0, 3);
    app_json_set(object, "tiny", -0.0001, 2);
    app_json_set(object, "large", 1e300, 12);
    app_json_set_whole(object, "samples", 123456789012345);
    app_json_set_text(object, "polarity", "kept");
    app_json_set_flag(object, "locked", true);
    char *text = printed(object);
    char expected[512];
    (void)snprintf(expected, sizeof expected,
                   "{\n  \"program\": \"mb-sample\",\n  \"version\": \"%s\",\n  \"snr_db\": 15.12,\n  "
                   "\"rate_hz\": 240000.0,\n"
                   "  \"tiny\": 0.0,\n  \"large\": 1e300,\n  \"samples\": 123456789012345,\n"
                   "  \"polarity\": \"kept\",\n  \"locked\": true\n}\n",
                   mb_version());
    assert_string_equal(text, expected);
    free(text);
}

static void what_is_not_a_number_is_null(void **state)
{
    json_t *object = app_json_begin(&sample);

    (void)state;
    app_json_set(object, "a", NAN, 2);
    app_json_set(object, "b", -INFINITY, 2);
    app_json_set_text(object, "c", NULL);
    char *text = printed(object);
    json_t *read = json_loads(text, JSON_REJECT_DUPLICATES, NULL);
    assert_non_null(read);
    assert_true(json_is_null(json_object_get(read, "a")) && json_is_null(json_object_get(read, "b")) &&
                json_is_null(json_object_get(read, "c")));
    json_decref(read);
    free(text);
}

static int print_to_full_disk(void *user)
{
    FILE *full = fopen("/dev/full", "w");

    (void)user;
    int status = full == NULL ? 99 : app_json_print(&sample, app_json_begin(&sample), full);
    if (full != NULL) {
        (void)fclose(full);
    }
    return status;
}

static void a_full_disk_is_told(void **state)
{
    outcome result;

    (void)state;
    outcome_of(print_to_full_disk, NULL, &result);
    assert_int_equal(result.status, APP_FAILURE);
    assert_non_null(strstr(result.errors, "No space left on device"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(numbers_have_the_decimals_asked_for),
        cmocka_unit_test(what_is_not_a_number_is_null),
        cmocka_unit_test(a_full_disk_is_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
