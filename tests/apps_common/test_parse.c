/* A command line gives settings, or one clear sentence and the exit status that goes with it. */
#include "check.h"

#include <signal.h>

#include "endpoint.h"
#include "outcome.h"
#include "program.h"
#include "signals.h"

enum { WENT_ON = 77, ARGUMENTS_MAX = 32 };

static double rate_hz;
static const char *track;
static bool on_air;
static uint64_t repeats;

static const app_option options[] = {
    {.name = "rate",
     .argument = "HZ",
     .meaning = "sample rate of raw samples",
     .kind = APP_QUANTITY,
     .unit = MB_UNIT_HZ,
     .target = &rate_hz,
     .low = 1e3,
     .high = 20e6},
    {.name = "track", .argument = "FILE.csv", .meaning = "what was done", .kind = APP_TEXT, .target = &track},
    {.name = "on-air", .meaning = "to a real radio", .kind = APP_FLAG, .target = &on_air},
    {.name = "repeats",
     .argument = "N",
     .meaning = "how often",
     .kind = APP_WHOLE,
     .target = &repeats,
     .low = 1,
     .high = 100},
    {.name = "look-ahead",
     .argument = "TIME",
     .meaning = "off, a time, or all",
     .kind = APP_KEY,
     .key = "receive.look_ahead"},
    {.name = "offset",
     .argument = "HZ",
     .meaning = "where to look",
     .kind = APP_KEY,
     .key = "receive.offset"},
};

static const app_program sample = {.name = "mb-sample",
                                   .summary = "Takes samples and gives samples.",
                                   .from = "IQ samples",
                                   .to = "audio",
                                   .example = "mb-sample --from a.cf32 --to b.wav",
                                   .common = APP_FROM | APP_TO | APP_JSON | APP_REPORT | APP_SEED,
                                   .options = options,
                                   .option_count = sizeof options / sizeof options[0]};

/* Parses the words; prints what came of it. */
static int parse_words(void *user)
{
    char *words = user, *arguments[ARGUMENTS_MAX] = {(char[]){"mb-sample"}};
    int count = 1;
    app_common common;

    for (char *word = strtok(words, "|"); word != NULL && count < ARGUMENTS_MAX - 1;
         word = strtok(NULL, "|")) {
        arguments[count++] = word;
    }
    int status = app_parse(&sample, count, arguments, &common);
    if (status == APP_CONTINUE) {
        (void)printf(
            "from %s to %s rate %g track %s air %d repeats %d look %s offset %g noise %s seed %d json %d\n",
            common.from, common.to, rate_hz, track != NULL ? track : "-", on_air, (int)repeats,
            mb_config_text(common.config, "receive.look_ahead"),
            mb_config_number(common.config, "receive.offset"), mb_config_text(common.config, "channel.noise"),
            (int)common.seed, common.json);
        app_note(&sample, &common, "a remark");
        status = WENT_ON;
    }
    app_finish(&common);
    return status;
}

/* Words are parted by |, so that a value may hold blanks. */
static void run(const char *words, outcome *result)
{
    char copy[1024];

    (void)snprintf(copy, sizeof copy, "%s", words);
    outcome_of(parse_words, copy, result);
}

static void assert_refused(const char *words, const char *sentence)
{
    outcome result;
    char line[512];

    run(words, &result);
    (void)snprintf(line, sizeof line, "mb-sample: %s\n", sentence);
    if (strncmp(result.errors, line, strlen(line)) != 0) {
        fail_msg("%s says\n%sexpected\n%s", words, result.errors, line);
    }
    assert_int_equal(result.status, APP_USAGE);
    assert_string_equal(result.output, "");
}

static void options_fill_their_targets_in_any_order(void **state)
{
    outcome result;

    (void)state;
    run("--track|t.csv|--offset|-137|--set|channel.noise=3dB|--to|b.wav|--on-air|--from|a.cf32|--rate|240000|"
        "--seed|7|--look-ahead|all|--repeats=3|--set|channel.noise=15 dB|--json",
        &result);
    assert_string_equal(result.output,
                        "from a.cf32 to b.wav rate 240000 track t.csv air 1 repeats 3 look all "
                        "offset -137 noise 15 dB seed 7 json 1\n");
    assert_string_equal(result.errors, "mb-sample: a remark\n");
    assert_int_equal(result.status, WENT_ON);
}

static void quantities_carry_units_and_bare_numbers_are_base_units(void **state)
{
    outcome result;

    (void)state;
    run("--from|a|--to|b|--rate|2.4 MHz|--look-ahead|300ms|--offset|0.2kHz", &result);
    assert_non_null(strstr(result.output, "rate 2.4e+06 "));
    assert_non_null(strstr(result.output, "look 300ms offset 200 "));
    run("--from|a|--to|b|--look-ahead|0.3", &result);
    assert_non_null(strstr(result.output, "look 0.3 s offset 0 "));
}

static void an_option_stands_over_the_config_file(void **state)
{
    outcome result;

    (void)state;
    run("--from|a|--to|b|--look-ahead|off|--config|" MB_TEST_SOURCE_DIR "/configs/bench-clean.conf", &result);
    assert_non_null(strstr(result.output, "look off "));
    run("--from|a|--to|b|--config|" MB_TEST_SOURCE_DIR "/configs/snow-report.conf|--quiet", &result);
    assert_non_null(strstr(result.output, "noise 15 dB "));
    assert_string_equal(result.errors, "");
}

static void a_wrong_command_line_gets_one_sentence_and_status_2(void **state)
{
    (void)state;
    assert_refused("--from|a", "--to is missing: where the output goes");
    assert_refused("--to|a", "--from is missing: where the input comes from");
    assert_refused("--from|a|--to|b|--sped|3",
                   "--sped is not an option of mb-sample, or the beginning of several");
    assert_refused("--quiet|-xy",
                   "-x is not an option of mb-sample; options are written out, such as --from");
    assert_refused("--from|a|--to", "--to needs an argument");
    assert_refused("--json=3", "--json takes no argument");
    assert_refused("--from|a|--to|b|c.wav",
                   "\"c.wav\" is not an option; files are named with options such as --from");
    assert_refused("--from|a|--from|b", "--from is given twice");
    assert_refused(
        "--rate|3 s",
        "--rate: \"3 s\" must be a number with one of the units Hz, kHz, MHz, GHz, such as \"1 Hz\"");
    assert_refused("--rate|999", "--rate: \"999\" is out of range; allowed: 1 kHz to 20 MHz");
    assert_refused("--repeats|101", "--repeats: \"101\" must be a whole number from 1 to 100");
    assert_refused("--seed|-1", "--seed: \"-1\" must be a whole number from 0 to 18446744073709551615");
    assert_refused("--seed|18446744073709551616",
                   "--seed: \"18446744073709551616\" must be a whole number from 0 to 18446744073709551615");
    assert_refused("--from|a|--to|-|--json",
                   "--json and --to - would both write to standard output; give --to a file");
}

static void endpoints_of_later_versions_and_dangerous_ones_are_refused(void **state)
{
    (void)state;
    assert_refused("--from|audio:hw0|--to|b",
                   "--from audio:hw0: sound devices come with a later version; give a file, or - for a pipe");
    assert_refused("--from|a|--to|radio:driver=x",
                   "--to radio:driver=x: radios come with a later version; give a file, or - for a pipe");
    assert_refused("--from=|--to|b", "--from is empty; give a file name, or - for a pipe");
    assert_refused("--from|same.wav|--to|same.wav",
                   "--from and --to are the same file same.wav; give the output another name");
    assert_refused("--from|a|--to|b|--report|./b",
                   "--to and --report are the same file ./b; give the output another name");
}

static void every_error_of_config_and_options_is_told_at_once(void **state)
{
    outcome result;

    (void)state;
    run("--from|a|--to|b|--set|channel.ofset=3Hz|--set|channel.noise=x|--look-ahead|7", &result);
    assert_int_equal(result.status, APP_USAGE);
    assert_string_equal(
        result.errors,
        "mb-sample: --set: channel.ofset: there is no such key; nearest key: channel.offset\n"
        "mb-sample: --set: channel.noise: \"x\" is not a value of this key; allowed: off, or -20 dB to "
        "100 dB\n"
        "mb-sample: --set: receive.look_ahead: \"7 s\" is out of range; allowed: off, all, or 0 s to 5 "
        "s\n");
    assert_refused("--from|a|--to|b|--config|no/file",
                   "config file no/file cannot be read: No such file or directory");
}

static void help_version_and_keys_go_to_standard_output(void **state)
{
    outcome result;

    (void)state;
    run("--help", &result);
    assert_int_equal(result.status, APP_OK);
    assert_string_equal(result.errors, "");
    for (size_t i = 0; i < sample.option_count; i++) {
        assert_non_null(strstr(result.output, options[i].name));
        assert_non_null(strstr(result.output, options[i].meaning));
    }
    assert_non_null(strstr(result.output, "Usage: mb-sample --from ENDPOINT --to ENDPOINT [OPTION]...\n"));
    assert_non_null(strstr(result.output, "  --from ENDPOINT         IQ samples\n"));
    run("--version", &result);
    assert_int_equal(result.status, APP_OK);
    assert_memory_equal(result.output, "mb-sample (Mirrorband) ", 23);
    run("--set|help", &result);
    assert_int_equal(result.status, APP_OK);
    assert_non_null(strstr(result.output, "\n  channel.offset "));
}

/* Two files of a program's own. */
static int check_two_pipes(void *user)
{
    const app_file files[] = {{"--truth", "-", true}, {"--to", NULL, true}, {"--track", "-", true}};

    (void)user;
    return app_files_check(&sample, files, 3);
}

static void standard_output_serves_one_only(void **state)
{
    outcome result;

    (void)state;
    outcome_of(check_two_pipes, NULL, &result);
    assert_int_equal(result.status, APP_USAGE);
    assert_memory_equal(result.errors, "mb-sample: --truth and --track are both -; standard output can serve",
                        60);
}

static int interrupt_once(void *user)
{
    (void)user;
    app_signals_install();
    (void)raise(SIGPIPE);
    if (app_interrupted() != 0 || raise(SIGTERM) != 0 || app_interrupted() != SIGTERM) {
        return 1;
    }
    return app_fail(&sample, MB_ERROR_INTERRUPTED);
}

static int interrupt_twice(void *user)
{
    (void)interrupt_once(user);
    (void)raise(SIGTERM);
    return 0;
}

static void an_interrupt_sets_a_flag_and_a_second_one_ends(void **state)
{
    outcome result;

    (void)state;
    outcome_of(interrupt_once, NULL, &result);
    assert_int_equal(result.status, 128 + SIGTERM);
    assert_string_equal(result.errors, "mb-sample: interrupted; what was written so far is valid\n");
    outcome_of(interrupt_twice, NULL, &result);
    assert_int_equal(result.status, 1000 + SIGTERM);
}

static int fail_with(void *user)
{
    mb_status status = *(const mb_status *)user;

    return app_fail(&sample, mb_fail(status, "x", "the sentence"));
}

static void the_exit_status_tells_the_kind_of_failure(void **state)
{
    static const struct {
        mb_status status;
        int exit_status;
    } cases[] = {{MB_ERROR_FILE, APP_FAILURE},   {MB_ERROR_FORMAT, APP_FAILURE},
                 {MB_ERROR_MEMORY, APP_FAILURE}, {MB_ERROR_ARGUMENT, APP_FAILURE},
                 {MB_ERROR_CONFIG, APP_USAGE},   {MB_ERROR_NO_SIGNAL, APP_NO_SIGNAL}};
    outcome result;

    (void)state;
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        mb_status status = cases[i].status;
        outcome_of(fail_with, &status, &result);
        assert_int_equal(result.status, cases[i].exit_status);
        assert_string_equal(result.errors, "mb-sample: the sentence\n");
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(options_fill_their_targets_in_any_order),
        cmocka_unit_test(quantities_carry_units_and_bare_numbers_are_base_units),
        cmocka_unit_test(an_option_stands_over_the_config_file),
        cmocka_unit_test(a_wrong_command_line_gets_one_sentence_and_status_2),
        cmocka_unit_test(endpoints_of_later_versions_and_dangerous_ones_are_refused),
        cmocka_unit_test(every_error_of_config_and_options_is_told_at_once),
        cmocka_unit_test(help_version_and_keys_go_to_standard_output),
        cmocka_unit_test(standard_output_serves_one_only),
        cmocka_unit_test(an_interrupt_sets_a_flag_and_a_second_one_ends),
        cmocka_unit_test(the_exit_status_tells_the_kind_of_failure),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
