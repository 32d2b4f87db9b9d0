/* Whatever is read, the reader ends with values in their ranges and a list of errors; memory refused is a
 * status. */
#include "check.h"

#include "keys.h"
#include "mirrorband/config.h"
#include "text_file.h"

enum { ROUNDS = 3000, TEXT_MAX = 2048, SEED = 20260117 };

static const char *const pieces[] = {
    "[channel]",  "[receive]",
    "[transmit",  "[]",
    "\n",         "\r\n",
    "=",          " = ",
    "#",          "\"",
    "offset",     "noise",
    "look_ahead", "fading",
    "off",        "all",
    "137 Hz",     "-40 dBc",
    "1e999",      "1e-999",
    "nan",        "\xef\xbb\xbf",
    "\xc3\xa9",   "\xff",
    "\t",         ".",
    "-",          "99999999999999999999999999999999999999999999999999999999999999999999999999"};

static size_t random_text(mb_random *random, char *text)
{
    size_t length = 0;

    while (length < TEXT_MAX - 128 && mb_random_uniform(random) > 0.01) {
        if (mb_random_uniform(random) < 0.1) {
            text[length++] = (char)(mb_random_bits(random) & 0xff);
        } else {
            const char *piece = pieces[mb_random_bits(random) % (sizeof pieces / sizeof pieces[0])];
            for (; *piece != '\0'; piece++) {
                text[length++] = *piece;
            }
        }
    }
    return length;
}

/* A shipped file with a few bytes changed, removed or doubled. */
static size_t mutated_text(mb_random *random, const char *from, size_t length, char *text)
{
    size_t made = 0;

    for (size_t i = 0; i < length && made < TEXT_MAX - 2; i++) {
        double luck = mb_random_uniform(random);
        if (luck < 0.01) {
            text[made++] = (char)(mb_random_bits(random) & 0xff);
        } else if (luck > 0.01 + 0.01) {
            text[made++] = from[i];
        }
        if (luck > 0.99) {
            text[made++] = from[i];
        }
    }
    return made;
}

static void assert_values_in_range(const mb_config *config)
{
    for (size_t i = 0; i < config_key_total; i++) {
        const config_key *key = &config_keys[i];
        if (mb_config_word(config, key->name) == NULL) {
            double number = mb_config_number(config, key->name);
            assert_true(number >= key->low && number <= key->high);
        }
    }
}

static void try_text(const char *text, size_t length)
{
    mb_config *config = NULL;
    char *copy = malloc(length + 1); /* exactly as long, so that the sanitizer sees a step too far */

    assert_non_null(copy);
    memcpy(copy, text, length);
    assert_ok(mb_config_create(&config));
    mb_status status = mb_config_read_text(config, "fuzz", copy, length);
    assert_int_equal(status, mb_config_error_count(config) > 0 ? MB_ERROR_CONFIG : MB_OK);
    copy[length] = '\0';
    (void)mb_config_set(config, copy);
    (void)mb_config_check(config);
    assert_values_in_range(config);
    free(copy);
    mb_config_destroy(config);
}

static void any_text_leaves_every_value_in_its_range(void **state)
{
    mb_random random;
    char text[TEXT_MAX];
    size_t length = 0;
    char *shipped = text_file_read(MB_TEST_SOURCE_DIR "/configs/snow-report.conf", &length);

    (void)state;
    print_message("seed %d\n", SEED);
    mb_random_seed(&random, SEED, 0);
    for (int i = 0; i < ROUNDS; i++) {
        size_t made = i % 2 == 0 ? random_text(&random, text) : mutated_text(&random, shipped, length, text);
        try_text(text, made);
    }
    free(shipped);
}

typedef struct gate {
    int asked, refuse_at;
} gate;

static bool let_through(void *user, size_t bytes)
{
    gate *g = user;

    (void)bytes;
    return g->asked++ != g->refuse_at;
}

static mb_status read_two_errors(void)
{
    mb_config *config = NULL;
    mb_status status = mb_config_create(&config);

    if (status == MB_OK) {
        status = mb_config_read_file(config, MB_TEST_SOURCE_DIR "/tests/config/bad/range-ends.conf");
        mb_config_destroy(config);
    }
    return status;
}

static void memory_refused_at_any_point_is_a_status(void **state)
{
    gate g = {.refuse_at = -1};

    (void)state;
    mb_allocation_gate_set(let_through, &g);
    assert_int_equal(read_two_errors(), MB_ERROR_CONFIG);
    int needed = g.asked;
    assert_true(needed > 4);
    for (int i = 0; i < needed; i++) {
        g = (gate){.refuse_at = i};
        assert_int_equal(read_two_errors(), MB_ERROR_MEMORY);
    }
    mb_allocation_gate_set(NULL, NULL);
}

static void nothing_to_destroy_is_fine(void **state)
{
    (void)state;
    mb_config_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(any_text_leaves_every_value_in_its_range),
        cmocka_unit_test(memory_refused_at_any_point_is_a_status),
        cmocka_unit_test(nothing_to_destroy_is_fine),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
