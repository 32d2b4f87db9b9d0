/* SigMF: what is said about a recording comes back, and the files stand up to the schema (check_sigmf.py). */
#include "samples.h"

enum { COUNT = 4800 };

static const char *path_in(const char *name)
{
    return path_of("sigmf", name);
}

static const mb_iq_annotation REMARK = {.sample_start = 100,
                                        .sample_count = 0,
                                        .has_edges = true,
                                        .low_hz = 7282300.0,
                                        .high_hz = 7287700.0,
                                        .suppressed_carrier_dsb = true,
                                        .label = "QQ1RDG",
                                        .comment = "snow report, \"new\" snow \xc2\xb1 2 cm"};

static void write_recording(const char *path, mb_iq_format format, bool full)
{
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_annotation second = {.sample_start = 50, .sample_count = 10, .label = "first in time"};
    mb_iq_writer *writer = NULL;
    mb_cf32 *samples = make_samples(COUNT, 3);

    settings.rate_hz = full ? 48000.5 : 8000.0;
    settings.format = format;
    if (full) {
        settings.has_centre = true;
        settings.centre_hz = 7285000.0;
        settings.description = "Ridge Hut, transmitted";
        settings.author = "Snow Service <qq1rdg@example.org>";
        settings.datetime = "2026-12-01T15:00:00Z";
        settings.annotations = &REMARK;
        settings.annotation_count = 1;
        settings.sha512 = true;
    }
    assert_ok(mb_iq_writer_create(path, &settings, &writer));
    assert_ok(mb_iq_writer_write(writer, samples, COUNT));
    if (full) {
        assert_ok(mb_iq_writer_annotate(writer, &second));
    }
    assert_ok(mb_iq_writer_commit(writer));
    mb_iq_writer_destroy(writer);
    mb_release(samples);
}

static void what_is_said_about_a_recording_comes_back(void **state)
{
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_iq_annotation annotation;
    mb_iq_capture capture;

    (void)state;
    options.verify = true;
    write_recording(path_in("full.sigmf-meta"), MB_IQ_CI16, true);
    assert_ok(
        mb_iq_reader_open(path_in("full.sigmf-data"), &options, &reader)); /* either part may be named */
    mb_iq_info info = mb_iq_reader_info(reader);
    assert_int_equal(info.format, MB_IQ_CI16);
    assert_near(info.rate_hz, 48000.5, 0.0);
    assert_true(info.has_centre);
    assert_near(info.centre_hz, 7285000.0, 0.0);
    assert_int_equal(info.samples, COUNT);
    assert_string_equal(info.description, "Ridge Hut, transmitted");
    assert_string_equal(info.datetime, "2026-12-01T15:00:00Z");
    assert_int_equal(info.annotations, 2);
    assert_ok(mb_iq_reader_annotation(reader, 0, &annotation)); /* in order of time */
    assert_string_equal(annotation.label, "first in time");
    assert_false(annotation.suppressed_carrier_dsb || annotation.has_edges);
    assert_ok(mb_iq_reader_annotation(reader, 1, &annotation));
    assert_int_equal(annotation.sample_count, COUNT - 100);
    assert_true(annotation.suppressed_carrier_dsb && annotation.has_edges);
    assert_near(annotation.low_hz, 7282300.0, 0.0);
    assert_string_equal(annotation.comment, REMARK.comment);
    assert_ok(mb_iq_reader_capture(reader, 0, &capture));
    assert_true(capture.has_frequency && capture.sample_start == 0);
    assert_fault(mb_iq_reader_capture(reader, 1, &capture), MB_ERROR_ARGUMENT, "index");
    assert_fault(mb_iq_reader_annotation(reader, 2, &annotation), MB_ERROR_ARGUMENT, "index");
    mb_iq_reader_close(reader);
}

static void all_formats_are_written(void **state)
{
    (void)state;
    write_recording(path_in("cf32.sigmf-meta"), MB_IQ_BY_ENDING, false);
    write_recording(path_in("ci8.sigmf-meta"), MB_IQ_CI8, false);
    write_recording(path_in("cu8.sigmf-data"), MB_IQ_CU8, true);
    assert_true(is_there(path_in("cu8.sigmf-meta")));
}

static void recordings_of_others_are_read(void **state)
{
    /* unknown names are ignored, a retuning is reported; SigMF additional_content.md */
    static const char meta[] =
        "{\"global\":{\"core:datatype\":\"cu8\",\"core:version\":\"1.0.0\",\"vendor:gain\":[1,2],"
        "\"core:extensions\":[{\"name\":\"vendor\",\"version\":\"0.1.0\",\"optional\":true}]},\"captures\":["
        "{\"core:sample_start\":0,\"core:frequency\":7e6},{\"core:sample_start\":3,\"core:frequency\":"
        "7100000.5,"
        "\"vendor:agc\":true}],\"annotations\":[],\"vendor\":{}}";
    mb_iq_open options = mb_iq_open_default();
    mb_iq_reader *reader = NULL;
    mb_iq_capture capture;

    (void)state;
    put_file(path_in("others.sigmf-meta"), meta, sizeof meta - 1);
    put_file(path_in("others.sigmf-data"), "\x00\xff\x80\x7f\x80\x80\x7f\x7f", 8);
    options.rate_hz = 2.4e6;
    assert_ok(mb_iq_reader_open(path_in("others.sigmf-meta"), &options, &reader));
    assert_near(mb_iq_reader_info(reader).rate_hz, 2.4e6, 0.0);
    assert_int_equal(mb_iq_reader_info(reader).captures, 2);
    assert_ok(mb_iq_reader_capture(reader, 1, &capture));
    assert_near(capture.frequency_hz, 7100000.5, 0.0);
    mb_iq_reader_close(reader);
    assert_int_equal(remove(path_in("others.sigmf-meta")), 0);
}

static void settings_are_checked(void **state)
{
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_annotation upside_down = {.has_edges = true, .low_hz = 2.0, .high_hz = 1.0};
    mb_iq_writer *writer = NULL;

    (void)state;
    assert_fault(mb_iq_writer_create("x.ci16", &settings, &writer), MB_ERROR_ARGUMENT, "rate_hz");
    settings.rate_hz = 1e6;
    settings.has_centre = true;
    settings.centre_hz = NAN;
    assert_fault(mb_iq_writer_create("x.ci16", &settings, &writer), MB_ERROR_ARGUMENT, "centre_hz");
    settings.centre_hz = 0.0;
    settings.format = MB_IQ_CF32;
    assert_fault(mb_iq_writer_create("x.ci16", &settings, &writer), MB_ERROR_ARGUMENT, "format");
    settings.format = MB_IQ_CU8;
    assert_fault(mb_iq_writer_create("x.wav", &settings, &writer), MB_ERROR_UNSUPPORTED, "format");
    settings.format = MB_IQ_BY_ENDING;
    assert_fault(mb_iq_writer_create("-", &settings, &writer), MB_ERROR_ARGUMENT, "format");
    assert_fault(mb_iq_writer_create("", &settings, &writer), MB_ERROR_ARGUMENT, "path");
    assert_fault(mb_iq_writer_create("radio:driver=x", &settings, &writer), MB_ERROR_UNSUPPORTED,
                 "radio:driver=x");
    settings.annotations = &upside_down;
    settings.annotation_count = 1;
    assert_fault(mb_iq_writer_create("x.ci16", &settings, &writer), MB_ERROR_ARGUMENT, "annotations");
    assert_int_equal(mb_iq_writer_create("x.iq", &(mb_iq_writer_settings){.rate_hz = 1.0}, &writer),
                     MB_ERROR_UNSUPPORTED);
    mb_iq_writer_destroy(NULL);
    mb_iq_writer_abandon(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(what_is_said_about_a_recording_comes_back),
        cmocka_unit_test(all_formats_are_written),
        cmocka_unit_test(recordings_of_others_are_read),
        cmocka_unit_test(settings_are_checked),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
