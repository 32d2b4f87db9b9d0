/* An output appears under its name when complete, else not at all; a killed writer leaves what it had,
 * readable. */
#include <fcntl.h>
#include <signal.h>
#include <sys/resource.h>
#include <sys/wait.h>

#include "samples.h"

static const char *path_in(const char *name)
{
    return path_of("output", name);
}

static mb_iq_writer *start(const char *path, mb_iq_format format)
{
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_writer *writer = NULL;

    settings.rate_hz = 8000.0;
    settings.format = format;
    settings.description = "test";
    assert_ok(mb_iq_writer_create(path, &settings, &writer));
    return writer;
}

static size_t samples_in(const char *path)
{
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_cf32 block[512];
    size_t count = 0, got = 0;

    options.rate_hz = 8000.0;
    assert_ok(mb_iq_reader_open(path, &options, &reader));
    do {
        assert_ok(mb_iq_read(reader, block, 512, &got));
        count += got;
    } while (got > 0);
    mb_iq_reader_close(reader);
    return count;
}

static void an_abandoned_output_leaves_what_was_there(void **state)
{
    const char *path = path_in("old.cf32");
    mb_cf32 *samples = make_samples(100, 1);
    char text[16] = "";

    (void)state;
    put_file(path, "12345678", 8);
    mb_iq_writer *writer = start(path, MB_IQ_BY_ENDING);
    assert_ok(mb_iq_writer_write(writer, samples, 100));
    assert_true(is_there(path_in("old.partial.cf32")));
    mb_iq_writer_abandon(writer);
    mb_iq_writer_destroy(writer);
    assert_false(is_there(path_in("old.partial.cf32")));
    assert_int_equal(get_file(path, text, sizeof text), 8);
    assert_string_equal(text, "12345678");
    mb_iq_writer_destroy(start(path, MB_IQ_BY_ENDING)); /* destroyed unfinished: the same */
    assert_int_equal(get_file(path, text, sizeof text), 8);
    mb_release(samples);
}

static void an_interrupted_output_is_kept_and_valid(void **state)
{
    static const char *const names[] = {"kept.cf32", "kept.wav", "kept.rf64", "kept.sigmf-meta"};
    mb_cf32 *samples = make_samples(1000, 1);
    char text[2000] = "";

    (void)state;
    for (size_t i = 0; i < 4; i++) {
        const char *path = path_in(names[i]);
        mb_iq_writer *writer = start(path, MB_IQ_BY_ENDING);
        assert_ok(mb_iq_writer_write(writer, samples, 1000));
        assert_ok(mb_iq_writer_keep_partial(writer));
        mb_iq_writer_destroy(writer);
        assert_int_equal(samples_in(path), 1000);
    }
    (void)get_file(path_in("kept.sigmf-meta"), text, sizeof text - 1);
    assert_non_null(strstr(text, "test (interrupted)"));
    mb_release(samples);
}

/* A child writes, then dies by SIGKILL without a chance to tidy up. */
static void a_killed_writer_leaves_a_readable_file(void **state)
{
    static const struct {
        const char *name, *partial;
    } cases[] = {{"killed.wav", "killed.partial.wav"},
                 {"killed.rf64", "killed.partial.rf64"},
                 {"killed.sigmf-meta", "killed.partial.sigmf-meta"},
                 {"killed.ci16", "killed.partial.ci16"}};

    (void)state;
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        (void)remove(path_in(cases[i].name));
        const char *path = path_in(cases[i].name);
        pid_t child = fork();
        if (child == 0) {
            mb_cf32 *samples = make_samples(100000, 1);
            mb_iq_writer *writer = start(path, MB_IQ_BY_ENDING);
            for (int k = 0; k < 5; k++) {
                (void)mb_iq_writer_write(writer, samples, 100000);
            }
            (void)kill(getpid(), SIGKILL);
        }
        int how = 0;
        assert_int_equal(waitpid(child, &how, 0), child);
        assert_true(WIFSIGNALED(how));
        assert_false(is_there(path));
        /* all but what a second of signal and one buffer may hold back */
        assert_at_least(samples_in(path_in(cases[i].partial)), 400000);
        (void)remove(path_in(cases[i].partial));
    }
    (void)remove(path_in("killed.partial.sigmf-data"));
}

static void a_killed_writer_of_flac_leaves_a_readable_file(void **state)
{
    const char *path = path_in("killed.flac");
    mb_audio_reader *reader = NULL;
    float block[1000];
    size_t got = 0, count = 0;
    pid_t child = fork();

    (void)state;
    if (child == 0) {
        mb_audio_writer_settings settings = {.rate_hz = 8000.0};
        mb_audio_writer *writer = NULL;
        mb_cf32 *samples = make_samples(40000, 1);
        assert_ok(mb_audio_writer_create(path, &settings, &writer));
        assert_ok(mb_audio_writer_write(writer, &samples->re, 80000));
        assert_ok(mb_audio_writer_write(writer, &samples->re, 80000));
        (void)kill(getpid(), SIGKILL);
    }
    assert_int_equal(waitpid(child, NULL, 0), child);
    assert_ok(mb_audio_reader_open(path_in("killed.partial.flac"), NULL, &reader));
    assert_int_equal(mb_audio_reader_info(reader).samples, 0); /* not known: the header was never finished */
    do {
        assert_ok(mb_audio_read(reader, block, 1000, &got));
        count += got;
    } while (got > 0);
    assert_in_range(count, 140000, 160000);
    mb_audio_reader_close(reader);
    (void)remove(path_in("killed.partial.flac"));
}

static void a_full_disk_is_one_sentence(void **state)
{
    const char *path = path_in("full.cf32");
    mb_cf32 *samples = make_samples(100000, 1);
    mb_table_writer *table = NULL;
    const char *columns[] = {"time_s"};
    const double row = 1.0;

    (void)state;
    (void)remove(path);
    assert_int_equal(symlink("/dev/full", path), 0);
    mb_iq_writer *writer = start(path, MB_IQ_BY_ENDING);
    assert_int_equal(mb_iq_writer_write(writer, samples, 100000), MB_ERROR_FILE);
    assert_non_null(
        strstr(mb_last_fault()->text, "the disk is full after 0 bytes; free some space or write elsewhere"));
    assert_int_equal(mb_iq_writer_commit(writer), MB_ERROR_FILE);
    mb_iq_writer_destroy(writer);
    assert_ok(mb_table_writer_create("/dev/full", columns, 1, NULL, &table));
    assert_int_equal(mb_table_writer_row(table, &row), MB_ERROR_FILE);
    assert_int_equal(mb_table_writer_commit(table), MB_ERROR_FILE);
    mb_table_writer_destroy(table);
    mb_release(samples);
}

/* The largest file size allowed stands in for a disk that fills up in the middle. */
static void an_output_that_grows_too_large_is_removed(void **state)
{
    static const char *const names[] = {"large.wav", "large.rf64", "large.sigmf-meta", "large.cu8",
                                        "large.flac"};
    struct rlimit before, small;
    mb_cf32 *samples = make_samples(300000, 1);

    (void)state;
    assert_int_equal(getrlimit(RLIMIT_FSIZE, &before), 0);
    small = before;
    small.rlim_cur = 100000;
    (void)signal(SIGXFSZ, SIG_IGN);
    for (size_t i = 0; i < 5; i++) {
        const char *path = path_in(names[i]);
        mb_audio_writer_settings settings = {.rate_hz = 8000.0};
        mb_audio_writer *audio = NULL;
        mb_iq_writer *writer = NULL;
        mb_status status = MB_OK;
        (void)remove(path);
        if (i == 4) {
            assert_ok(mb_audio_writer_create(path, &settings, &audio));
        } else {
            writer = start(path, MB_IQ_BY_ENDING);
        }
        assert_int_equal(setrlimit(RLIMIT_FSIZE, &small), 0);
        for (int k = 0; k < 3 && status == MB_OK; k++) {
            status = i == 4 ? mb_audio_writer_write(audio, &samples->re, 300000)
                            : mb_iq_writer_write(writer, samples, 300000);
        }
        assert_int_equal(setrlimit(RLIMIT_FSIZE, &before), 0);
        assert_int_equal(status, MB_ERROR_FILE);
        assert_non_null(strstr(mb_last_fault()->text, "largest file size allowed is reached after"));
        assert_int_equal(i == 4 ? mb_audio_writer_commit(audio) : mb_iq_writer_commit(writer), MB_ERROR_FILE);
        assert_false(is_there(path));
        mb_iq_writer_destroy(writer);
        mb_audio_writer_destroy(audio);
    }
    assert_false(is_there(path_in("large.partial.wav")));
    assert_false(is_there(path_in("large.partial.sigmf-data")));
    assert_false(is_there(path_in("large.partial.flac")));
    (void)signal(SIGXFSZ, SIG_DFL);
    mb_release(samples);
}

static void refuse(const char *path, const char *sentence)
{
    mb_iq_writer_settings settings = {.rate_hz = 8000.0};
    mb_iq_writer *writer = NULL;
    char expected[1200];

    (void)snprintf(expected, sizeof expected, "%s%s", path, sentence);
    assert_fault(mb_iq_writer_create(path, &settings, &writer), MB_ERROR_FILE, mb_last_fault()->field);
    assert_string_equal(mb_last_fault()->text, expected);
    assert_null(writer);
}

static void a_place_that_cannot_be_written_to_is_told_at_once(void **state)
{
    const char *path = path_in("locked.cf32");

    (void)state;
    refuse(path_in("nowhere/a.cf32"), " cannot be written: its folder does not exist; make it first");
    (void)mkdir(path_in("folder.cf32"), 0777);
    refuse(path_in("folder.cf32"), " cannot be written: it is a folder; name a file in it");
    (void)remove(path);
    put_file(path, "1", 1);
    assert_int_equal(chmod(path, 0444), 0);
    refuse(path, " cannot be written: it is there and write-protected; remove it or choose another name");
    assert_int_equal(chmod(path, 0644), 0);
    (void)mkdir(path_in("shut"), 0777);
    assert_int_equal(chmod(path_in("shut"), 0555), 0);
    if (geteuid() != 0) { /* root may write everywhere */
        refuse(
            path_in("shut/a.cf32"),
            " cannot be written: no file may be made in its folder; choose a folder that may be written to");
    }
}

static void a_link_is_followed_and_stays_a_link(void **state)
{
    struct stat about;
    mb_cf32 *samples = make_samples(10, 1);

    (void)state;
    (void)remove(path_in("link.cf32"));
    put_file(path_in("target.cf32"), "12345678", 8);
    assert_int_equal(symlink("target.cf32", path_in("link.cf32")), 0);
    mb_iq_writer *writer = start(path_in("link.cf32"), MB_IQ_BY_ENDING);
    assert_ok(mb_iq_writer_write(writer, samples, 10));
    assert_ok(mb_iq_writer_commit(writer));
    mb_iq_writer_destroy(writer);
    assert_int_equal(lstat(path_in("link.cf32"), &about), 0);
    assert_true(S_ISLNK(about.st_mode));
    assert_int_equal(samples_in(path_in("target.cf32")), 10);
    mb_release(samples);
}

static void the_same_file_is_recognised(void **state)
{
    char longer[600];

    (void)state;
    put_file(path_in("same.sigmf-meta"), "{}", 2);
    put_file(path_in("same.sigmf-data"), "12345678", 8);
    (void)remove(path_in("hard.cf32"));
    assert_int_equal(link(path_in("same.sigmf-data"), path_in("hard.cf32")), 0);
    (void)snprintf(longer, sizeof longer, "%s/../files_output/new.wav", path_in(""));
    assert_true(mb_files_same("a.wav", "a.wav"));
    assert_true(mb_files_same("./a.wav", "a.wav"));
    assert_true(mb_files_same(path_in("same.sigmf-meta"), path_in("same.sigmf-data")));
    assert_true(mb_files_same(path_in("same.sigmf-meta"), path_in("hard.cf32")));
    assert_true(mb_files_same(path_in("new.wav"), longer)); /* neither exists */
    assert_true(mb_files_same("new.sigmf-meta", "./new.sigmf-data"));
    assert_false(mb_files_same(path_in("same.sigmf-meta"), path_in("other.sigmf-meta")));
    assert_false(mb_files_same("a.wav", "b/a.wav"));
    assert_false(mb_files_same("-", "-"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(an_abandoned_output_leaves_what_was_there),
        cmocka_unit_test(an_interrupted_output_is_kept_and_valid),
        cmocka_unit_test(a_killed_writer_leaves_a_readable_file),
        cmocka_unit_test(a_killed_writer_of_flac_leaves_a_readable_file),
        cmocka_unit_test(a_full_disk_is_one_sentence),
        cmocka_unit_test(an_output_that_grows_too_large_is_removed),
        cmocka_unit_test(a_place_that_cannot_be_written_to_is_told_at_once),
        cmocka_unit_test(a_link_is_followed_and_stays_a_link),
        cmocka_unit_test(the_same_file_is_recognised),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
