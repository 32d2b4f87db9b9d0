/* Help, manual page and the printed config come from the one table. */
#include "check.h"

#include "mirrorband/config.h"
#include "text_file.h"

static void write_help(FILE *stream, const void *user)
{
    (void)user;
    assert_ok(mb_config_help(stream));
}

static void write_man_page(FILE *stream, const void *user)
{
    (void)user;
    assert_ok(mb_config_man_page(stream));
}

static void write_config(FILE *stream, const void *user)
{
    assert_ok(mb_config_print(user, stream));
}

static void the_help_names_every_key(void **state)
{
    char *help = text_written(write_help, NULL);

    (void)state;
    for (size_t i = 0; i < mb_config_key_count(); i++) {
        char line[80];
        (void)snprintf(line, sizeof line, "\n  %s ", mb_config_key_name(i));
        assert_non_null(strstr(help, line));
    }
    assert_non_null(strstr(help, "  transmit.low_cut                 300 Hz     (100 Hz to 1 kHz)\n"
                                 "      lower edge of the message\n"));
    assert_non_null(strstr(help, "(off, all, or 0 s to 5 s)"));
    free(help);
}

static void the_manual_page_is_current(void **state)
{
    size_t length = 0;
    char *made = text_written(write_man_page, NULL);
    char *committed = text_file_read(MB_TEST_SOURCE_DIR "/docs/man/mirrorband.5", &length);

    (void)state;
    if (strcmp(made, committed) != 0) {
        fail_msg("docs/man/mirrorband.5 is not what the table gives; make it anew: ninja -C build man-page");
    }
    free(made);
    free(committed);
}

static void a_printed_config_reads_back_to_the_same_values(void **state)
{
    mb_config *config = NULL, *again = NULL;
    static const char *const given[] = {"channel.offset=137.123456789012 Hz", "receive.look_ahead=all",
                                        "channel.noise=15dB", "transmit.conditioning=off",
                                        "audio.rate=44.1 kHz"};

    (void)state;
    assert_ok(mb_config_create(&config));
    assert_ok(mb_config_create(&again));
    for (size_t i = 0; i < sizeof given / sizeof given[0]; i++) {
        assert_ok(mb_config_set(config, given[i]));
    }
    char *text = text_written(write_config, config);
    assert_ok(mb_config_read_text(again, "printed", text, strlen(text)));
    for (size_t i = 0; i < mb_config_key_count(); i++) {
        const char *key = mb_config_key_name(i);
        double number = mb_config_number_or(config, key, 0.0);
        assert_true(number == mb_config_number_or(again, key, 0.0));
        assert_true(mb_config_word(config, key) == mb_config_word(again, key));
        assert_int_equal(mb_config_is_set(config, key), mb_config_is_set(again, key));
    }
    assert_non_null(strstr(text, "\n# drift = 0 Hz/s\n"));
    free(text);
    mb_config_destroy(config);
    mb_config_destroy(again);
}

static void a_full_disk_is_told(void **state)
{
    FILE *full = fopen("/dev/full", "w");

    (void)state;
    assert_non_null(full);
    assert_int_equal(mb_config_help(full), MB_ERROR_FILE);
    (void)fclose(full);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_help_names_every_key),
        cmocka_unit_test(the_manual_page_is_current),
        cmocka_unit_test(a_printed_config_reads_back_to_the_same_values),
        cmocka_unit_test(a_full_disk_is_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
