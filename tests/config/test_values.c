/* Values come back in base units, by file or by assignment, and the table of keys is in order. */
#include "check.h"

#include <dirent.h>

#include "keys.h"
#include "mirrorband/config.h"

static mb_config *fresh(void)
{
    mb_config *config = NULL;

    assert_ok(mb_config_create(&config));
    return config;
}

static mb_config *config_of(const char *text)
{
    mb_config *config = fresh();

    assert_ok(mb_config_read_text(config, "text", text, strlen(text)));
    assert_ok(mb_config_check(config));
    return config;
}

static void an_assignment_may_have_its_unit_joined_spaced_or_quoted(void **state)
{
    static const char *const same[] = {"channel.offset=137Hz", "channel.offset=137 Hz",
                                       "channel.offset = 0.137 kHz", " channel.offset=\"137 Hz\"",
                                       "channel.offset=+1.37e2Hz "};

    (void)state;
    for (size_t i = 0; i < sizeof same / sizeof same[0]; i++) {
        mb_config *config = fresh();
        assert_ok(mb_config_set(config, same[i]));
        assert_true(mb_config_number(config, "channel.offset") == 137.0);
        assert_true(mb_config_is_set(config, "channel.offset"));
        assert_false(mb_config_is_set(config, "channel.drift"));
        mb_config_destroy(config);
    }
}

static void a_file_sets_sections_of_keys(void **state)
{
    mb_config *config =
        config_of("\xef\xbb\xbf# caf\xc3\xa9\r\n[channel]\r\n\toffset=137Hz # near\r\n\r\n"
                  "  [ receive ]\nlook_ahead = all\ngain_control = on\n[channel]\nnoise = \"15 dB\"");

    (void)state;
    assert_true(mb_config_number(config, "channel.offset") == 137.0);
    assert_true(mb_config_number(config, "channel.noise") == 15.0);
    assert_string_equal(mb_config_word(config, "receive.look_ahead"), "all");
    assert_true(mb_config_switch(config, "receive.gain_control"));
    assert_false(mb_config_switch(config, "receive.squelch"));
    assert_string_equal(mb_config_text(config, "channel.offset"), "137Hz");
    mb_config_destroy(config);
}

static void the_last_source_counts(void **state)
{
    mb_config *config = config_of("[channel]\nnoise = 15 dB\nleak = -40 dBc\n");

    (void)state;
    assert_ok(mb_config_set(config, "channel.noise=off"));
    assert_ok(mb_config_set(config, "channel.leak=-30dBc"));
    assert_ok(mb_config_set(config, "channel.leak=-20dBc"));
    assert_string_equal(mb_config_word(config, "channel.noise"), "off");
    assert_true(mb_config_number(config, "channel.leak") == -20.0);
    mb_config_destroy(config);
}

static void a_word_in_place_of_a_quantity_is_no_number(void **state)
{
    mb_config *config = fresh();

    (void)state;
    assert_true(isnan(mb_config_number(config, "channel.noise")));
    assert_true(mb_config_number_or(config, "channel.noise", INFINITY) == INFINITY);
    assert_true(mb_config_is(config, "channel.noise", "off"));
    assert_ok(mb_config_set(config, "channel.noise=3dB"));
    assert_null(mb_config_word(config, "channel.noise"));
    assert_true(mb_config_number_or(config, "channel.noise", INFINITY) == 3.0);
    assert_false(mb_config_is(config, "channel.noise", "off"));
    mb_config_destroy(config);
}

static void a_key_that_does_not_exist_has_no_value(void **state)
{
    mb_config *config = fresh();

    (void)state;
    assert_true(isnan(mb_config_number(config, "channel.colour")));
    assert_null(mb_config_word(config, "channel.colour"));
    assert_null(mb_config_text(config, "channel.colour"));
    assert_false(mb_config_switch(config, "channel.colour"));
    assert_false(mb_config_is_set(config, "channel.colour"));
    assert_string_equal(mb_config_unit("channel.colour"), "");
    assert_string_equal(mb_config_unit("channel.drift"), "Hz/s");
    assert_string_equal(mb_config_unit("channel.fading"), "");
    mb_config_destroy(config);
}

static void ends_of_a_range_are_inside(void **state)
{
    mb_config *config = fresh();

    (void)state;
    assert_ok(mb_config_set(config, "receive.span=50Hz"));
    assert_ok(mb_config_set(config, "receive.span=9.6kHz"));
    assert_ok(mb_config_set(config, "receive.look_ahead=0"));
    assert_ok(mb_config_set(config, "receive.look_ahead=5s"));
    assert_ok(mb_config_set(config, "channel.quantise=16"));
    assert_ok(mb_config_check(config));
    mb_config_destroy(config);
}

static void values_that_do_not_fit_each_other_are_refused(void **state)
{
    mb_config *config = fresh();

    (void)state;
    assert_ok(mb_config_set(config, "transmit.low_cut=900Hz"));
    assert_ok(mb_config_set(config, "transmit.high_cut=1.3kHz"));
    assert_int_equal(mb_config_check(config), MB_ERROR_CONFIG);
    assert_string_equal(mb_config_error(config, 0), "config: transmit.high_cut: \"1.3kHz\" is too low with "
                                                    "transmit.low_cut = 900Hz; it must be at least 1.4 kHz");
    mb_config_destroy(config);
}

static void every_key_of_the_table_is_well_formed(void **state)
{
    (void)state;
    assert_int_equal(mb_config_key_count(), config_key_total);
    for (size_t i = 0; i < config_key_total; i++) {
        const config_key *key = &config_keys[i];
        char section[CONFIG_NAME_MAX] = "";
        const char *dot = strchr(key->name, '.');
        assert_non_null(dot);
        memcpy(section, key->name, (size_t)(dot - key->name));
        assert_true(config_section_known(section) && config_key_in(key, section));
        assert_int_equal(config_key_find(key->name), (int)i);
        assert_true(strlen(key->meaning) > 5 && strlen(key->meaning) <= 90);
        assert_true(key->kind == CONFIG_WORD ? key->words != NULL : key->low < key->high);
        assert_string_equal(mb_config_key_name(i), key->name);
        assert_string_equal(config_key_nearest(key->name), key->name);
    }
    assert_null(mb_config_key_name(config_key_total));
}

static void the_distance_of_names_counts_edits(void **state)
{
    (void)state;
    assert_int_equal(config_distance("", "abc"), 3);
    assert_int_equal(config_distance("offset", "offset"), 0);
    assert_int_equal(config_distance("offset", "ofset"), 1);
    assert_int_equal(config_distance("offset", "offfset"), 1);
    assert_int_equal(config_distance("offset", "oftset"), 1);
    assert_int_equal(config_distance("offset", "foset"), 2);
    assert_int_equal(config_distance("offset", "fofset"), 1); /* neighbours swapped */
    assert_int_equal(config_distance("Offset", "oFFset"), 0);
    assert_int_equal(config_distance("kitten", "sitting"), 3);
}

static void every_config_that_is_shipped_reads_without_error(void **state)
{
    DIR *folder = opendir(MB_TEST_SOURCE_DIR "/configs");
    size_t files = 0;

    (void)state;
    assert_non_null(folder);
    for (struct dirent *entry = readdir(folder); entry != NULL; entry = readdir(folder)) {
        char path[512];
        if (entry->d_name[0] == '.') {
            continue;
        }
        mb_config *config = fresh();
        (void)snprintf(path, sizeof path, MB_TEST_SOURCE_DIR "/configs/%s", entry->d_name);
        assert_ok(mb_config_read_file(config, path));
        assert_ok(mb_config_check(config));
        mb_config_destroy(config);
        files++;
    }
    (void)closedir(folder);
    assert_true(files >= 3);
}

static void the_snow_report_is_the_channel_of_the_main_job(void **state)
{
    mb_config *config = fresh();

    (void)state;
    assert_ok(mb_config_read_file(config, MB_TEST_SOURCE_DIR "/configs/snow-report.conf"));
    assert_true(mb_config_number(config, "channel.leak") == -40.0);
    assert_true(mb_config_number(config, "channel.offset") == 137.0);
    assert_true(mb_config_number(config, "channel.drift") == 0.2);
    assert_true(mb_config_number(config, "channel.noise") == 15.0);
    assert_true(mb_config_is(config, "channel.fading", "gentle"));
    assert_true(mb_config_is(config, "channel.phase", "random"));
    mb_config_destroy(config);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(an_assignment_may_have_its_unit_joined_spaced_or_quoted),
        cmocka_unit_test(a_file_sets_sections_of_keys),
        cmocka_unit_test(the_last_source_counts),
        cmocka_unit_test(a_word_in_place_of_a_quantity_is_no_number),
        cmocka_unit_test(a_key_that_does_not_exist_has_no_value),
        cmocka_unit_test(ends_of_a_range_are_inside),
        cmocka_unit_test(values_that_do_not_fit_each_other_are_refused),
        cmocka_unit_test(every_key_of_the_table_is_well_formed),
        cmocka_unit_test(the_distance_of_names_counts_edits),
        cmocka_unit_test(every_config_that_is_shipped_reads_without_error),
        cmocka_unit_test(the_snow_report_is_the_channel_of_the_main_job),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
