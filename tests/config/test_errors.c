/* Every mistake in a file is told, all at once, with place, range and the nearest name. */
#include "check.h"

#include <dirent.h>

#include "mirrorband/config.h"
#include "text_file.h"

#define BAD_FOLDER MB_TEST_SOURCE_DIR "/tests/config/bad"

static void errors_to_text(FILE *stream, const void *user)
{
    const mb_config *config = user;

    for (size_t i = 0; i < mb_config_error_count(config); i++) {
        (void)fprintf(stream, "%s\n", mb_config_error(config, i));
    }
}

/* All errors of a text, one a line, to be freed. */
static char *errors_of(const char *source, const char *text, size_t length)
{
    mb_config *config = NULL;

    assert_ok(mb_config_create(&config));
    (void)mb_config_read_text(config, source, text, length);
    assert_int_equal(mb_config_check(config), MB_ERROR_CONFIG);
    char *errors = text_written(errors_to_text, config);
    mb_config_destroy(config);
    return errors;
}

static void check_bad_file(const char *name)
{
    char path[512];
    size_t length = 0, expected_length = 0;

    (void)snprintf(path, sizeof path, "%s/%s", BAD_FOLDER, name);
    char *text = text_file_read(path, &length);
    char *errors = errors_of(name, text, length);
    (void)snprintf(path, sizeof path, "%s/%.*s.expected", BAD_FOLDER, (int)(strlen(name) - 5), name);
    char *expected = text_file_read(path, &expected_length);
    assert_string_equal(errors, expected);
    free(text);
    free(errors);
    free(expected);
}

static void every_bad_file_gives_exactly_the_messages_beside_it(void **state)
{
    DIR *folder = opendir(BAD_FOLDER);
    size_t files = 0;

    (void)state;
    assert_non_null(folder);
    for (struct dirent *entry = readdir(folder); entry != NULL; entry = readdir(folder)) {
        const char *ending = strrchr(entry->d_name, '.');
        if (ending != NULL && strcmp(ending, ".conf") == 0) {
            check_bad_file(entry->d_name);
            files++;
        }
    }
    (void)closedir(folder);
    assert_true(files >= 9);
}

/* The lines with a mistake are counted by hand in bad/planted.conf. */
static void eighteen_planted_mistakes_are_found_in_one_run_with_their_lines(void **state)
{
    static const int lines[] = {2, 3, 6, 7, 8, 9, 10, 11, 12, 13, 15, 16, 18, 20, 21, 22, 24, 26};
    size_t length = 0, found = 0;

    (void)state;
    char *text = text_file_read(BAD_FOLDER "/planted.conf", &length);
    char *errors = errors_of("planted.conf", text, length);
    for (char *line = strtok(errors, "\n"); line != NULL; line = strtok(NULL, "\n"), found++) {
        char start[32];
        assert_true(found < sizeof lines / sizeof lines[0]);
        (void)snprintf(start, sizeof start, "planted.conf:%d:", lines[found]);
        assert_memory_equal(line, start, strlen(start));
    }
    assert_int_equal(found, sizeof lines / sizeof lines[0]);
    free(text);
    free(errors);
}

/* The first error of one assignment. */
static void assert_set_error(const char *assignment, const char *expected)
{
    mb_config *config = NULL;

    assert_ok(mb_config_create(&config));
    assert_int_equal(mb_config_set(config, assignment), MB_ERROR_CONFIG);
    assert_string_equal(mb_config_error(config, 0), expected);
    assert_string_equal(mb_last_fault()->text, expected);
    assert_null(mb_config_error(config, 1));
    mb_config_destroy(config);
}

static void an_assignment_from_the_command_line_is_checked_alike(void **state)
{
    (void)state;
    assert_set_error("channel.ofset=137Hz",
                     "--set: channel.ofset: there is no such key; nearest key: channel.offset");
    assert_set_error("chanel.ofset=137Hz",
                     "--set: chanel.ofset: there is no such key; nearest key: channel.offset");
    assert_set_error(
        "look_ahead=all",
        "--set: look_ahead: the section is missing before the key; nearest key: receive.look_ahead");
    assert_set_error("receive.noise=3dB",
                     "--set: receive.noise: there is no such key; nearest key: channel.noise");
    assert_set_error(
        "receive.lopo_bandwidth=3Hz",
        "--set: receive.lopo_bandwidth: there is no such key; nearest key: receive.loop_bandwidth");
    assert_set_error("receive.bandwidth=3Hz",
                     "--set: receive.bandwidth: there is no such key; nearest key: receive.loop_bandwidth");
    assert_set_error("zebra.crossing=3",
                     "--set: zebra.crossing: there is no such key; --set help lists all keys");
    assert_set_error("station.call=QQ1VLY",
                     "--set: station.call: section station has no keys in this version; take the key out");
    assert_set_error("channel.offset",
                     "--set: \"channel.offset\" must be section.key=value, such as channel.offset=137Hz");
    assert_set_error("channel.noise=101 dB",
                     "--set: channel.noise: \"101 dB\" is out of range; allowed: off, or -20 dB to 100 dB");
    assert_set_error("channel.offset=137",
                     "--set: channel.offset: \"137\" must be a number with one of the units Hz, "
                     "kHz, MHz, GHz, such as \"1 Hz\"; allowed: -10 MHz to 10 MHz");
}

static void errors_of_file_and_command_line_are_kept_together(void **state)
{
    mb_config *config = NULL;
    static const char text[] = "[channel]\nofset = 3 Hz\n";

    (void)state;
    assert_ok(mb_config_create(&config));
    assert_int_equal(mb_config_read_text(config, "a.conf", text, strlen(text)), MB_ERROR_CONFIG);
    assert_int_equal(mb_config_set(config, "channel.noise=loud"), MB_ERROR_CONFIG);
    assert_ok(mb_config_set(config, "channel.drift=1Hz/s"));
    assert_int_equal(mb_config_check(config), MB_ERROR_CONFIG);
    assert_int_equal(mb_config_error_count(config), 2);
    mb_config_destroy(config);
}

static void a_flood_of_errors_is_cut_short_and_says_so(void **state)
{
    mb_config *config = NULL;

    (void)state;
    assert_ok(mb_config_create(&config));
    for (int i = 0; i < 1000; i++) {
        (void)mb_config_set(config, "x");
    }
    assert_int_equal(mb_config_error_count(config), 201);
    assert_non_null(strstr(mb_config_error(config, 200), "more errors"));
    assert_int_equal(mb_config_check(config), MB_ERROR_CONFIG);
    mb_config_destroy(config);
}

static void a_file_that_cannot_be_read_is_named_with_the_reason(void **state)
{
    mb_config *config = NULL;

    (void)state;
    assert_ok(mb_config_create(&config));
    assert_int_equal(mb_config_read_file(config, "no/such/file.conf"), MB_ERROR_FILE);
    assert_string_equal(mb_last_fault()->text,
                        "config file no/such/file.conf cannot be read: No such file or directory");
    assert_int_equal(mb_config_read_file(config, MB_TEST_BINARY_DIR), MB_ERROR_FILE);
    assert_non_null(strstr(mb_last_fault()->text, "Is a directory"));
    assert_int_equal(mb_config_read_file(config, "/dev/zero"), MB_ERROR_FILE);
    assert_non_null(strstr(mb_last_fault()->text, "larger than 1 MiB"));
    assert_ok(mb_config_check(config));
    mb_config_destroy(config);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_bad_file_gives_exactly_the_messages_beside_it),
        cmocka_unit_test(eighteen_planted_mistakes_are_found_in_one_run_with_their_lines),
        cmocka_unit_test(an_assignment_from_the_command_line_is_checked_alike),
        cmocka_unit_test(errors_of_file_and_command_line_are_kept_together),
        cmocka_unit_test(a_flood_of_errors_is_cut_short_and_says_so),
        cmocka_unit_test(a_file_that_cannot_be_read_is_named_with_the_reason),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
