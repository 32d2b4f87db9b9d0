#include "iq_writer.h"

#include "path.h"

#include <math.h>

mb_iq_writer_settings mb_iq_writer_settings_default(void)
{
    return (mb_iq_writer_settings){.format = MB_IQ_BY_ENDING};
}

/* Settles the format from ending and settings. */
static mb_status choose_format(const char *path, mb_iq_format wanted, mb_iq_format *format)
{
    bool sound = mb_sound_has_ending(path, false);
    mb_iq_format raw = mb_iq_format_by_ending(path);

    *format = wanted != MB_IQ_BY_ENDING ? wanted : raw;
    if (mb_path_is_pipe(path)) {
        return wanted != MB_IQ_BY_ENDING
                   ? MB_OK
                   : mb_fail(
                         MB_ERROR_ARGUMENT, "format",
                         "raw samples go to standard output; state their format, one of cf32 ci16 ci8 cu8");
    }
    if (raw != MB_IQ_BY_ENDING && raw != *format) {
        return mb_fail(MB_ERROR_ARGUMENT, "format",
                       "%s should hold %s samples by its ending, not %s; change one of them", path,
                       mb_iq_format_text(raw), mb_iq_format_text(*format));
    }
    if (sound || mb_path_has_ending(path, ".sigmf-meta") || mb_path_has_ending(path, ".sigmf-data")) {
        *format = wanted != MB_IQ_BY_ENDING ? wanted : MB_IQ_CF32;
        if (sound && *format != MB_IQ_CF32 && *format != MB_IQ_CI16) {
            return mb_fail(MB_ERROR_UNSUPPORTED, "format",
                           "%s can hold cf32 or ci16 samples, not %s; choose one of them", path,
                           mb_iq_format_text(*format));
        }
        return MB_OK;
    }
    if (raw != MB_IQ_BY_ENDING) {
        return MB_OK;
    }
    return mb_fail(MB_ERROR_UNSUPPORTED, path, "%s has no ending that is written as IQ; use one of %s", path,
                   mb_iq_endings());
}

static mb_status check_settings(const char *path, const mb_iq_writer_settings *settings, mb_iq_format *format)
{
    mb_status status = mb_path_check(path);

    if (status == MB_OK) {
        status = mb_check_range("rate_hz", settings->rate_hz, 1.0, 1e12, "Hz");
    }
    if (status == MB_OK && settings->has_centre) {
        status = mb_check_range("centre_hz", settings->centre_hz, -1e12, 1e12, "Hz");
    }
    for (size_t i = 0; i < settings->annotation_count && status == MB_OK; i++) {
        const mb_iq_annotation *annotation = &settings->annotations[i];
        if (annotation->has_edges &&
            !(isfinite(annotation->low_hz) && annotation->low_hz <= annotation->high_hz &&
              isfinite(annotation->high_hz))) {
            status = mb_fail(MB_ERROR_ARGUMENT, "annotations",
                             "low_hz of annotation %zu must not exceed high_hz", i);
        }
    }
    return status == MB_OK ? choose_format(path, settings->format, format) : status;
}

static void copy_or_empty(char *out, size_t size, const char *text)
{
    mb_text_copy(out, size, text != NULL ? text : "");
}

static mb_status describe(mb_iq_writer *writer, const mb_iq_writer_settings *settings)
{
    mb_sigmf *about = &writer->about;
    mb_status status = MB_OK;

    about->format = writer->format;
    about->rate_hz = settings->rate_hz;
    about->channels = 1;
    copy_or_empty(about->description, sizeof about->description, settings->description);
    copy_or_empty(about->author, sizeof about->author, settings->author);
    about->captures = mb_allocate(1, sizeof *about->captures);
    if (about->captures == NULL) {
        return mb_fail_memory("SigMF metadata");
    }
    about->capture_count = 1;
    about->captures[0].has_frequency = settings->has_centre;
    about->captures[0].frequency_hz = settings->centre_hz;
    copy_or_empty(about->captures[0].datetime, sizeof about->captures[0].datetime, settings->datetime);
    for (size_t i = 0; i < settings->annotation_count && status == MB_OK; i++) {
        status = mb_iq_writer_annotate(writer, &settings->annotations[i]);
    }
    return status;
}

static mb_status create_sigmf(mb_iq_writer *writer, const char *path, const mb_iq_writer_settings *settings)
{
    const char *ending = mb_path_has_ending(path, ".sigmf-meta") ? ".sigmf-meta" : ".sigmf-data";
    char *meta_path = mb_path_replace_ending(path, ending, ".sigmf-meta");
    char *data_path = mb_path_replace_ending(path, ending, ".sigmf-data");
    mb_status status = meta_path != NULL && data_path != NULL ? MB_OK : mb_fail_memory("an output");

    if (status == MB_OK) {
        status = mb_sink_open(meta_path, &writer->meta);
    }
    if (status == MB_OK) {
        status = mb_sink_open(data_path, &writer->data);
    }
    if (status == MB_OK) {
        status = describe(writer, settings);
    }
    if (status == MB_OK && !mb_sink_is_direct(writer->meta)) {
        status = mb_iq_write_meta(writer);
    }
    writer->hashing = settings->sha512;
    mb_sha512_start(&writer->hash);
    mb_release(meta_path);
    mb_release(data_path);
    return status;
}

static mb_status start(mb_iq_writer *writer, const char *path, const mb_iq_writer_settings *settings)
{
    writer->clean = mb_allocate(MB_IQ_WRITE_BLOCK, sizeof *writer->clean);
    writer->stored = mb_allocate(MB_IQ_WRITE_BLOCK, mb_iq_format_bytes(writer->format));
    if (writer->clean == NULL || writer->stored == NULL) {
        return mb_fail_memory("an IQ output");
    }
    if (mb_sound_has_ending(path, false)) {
        int kind = mb_path_has_ending(path, ".rf64") ? SF_FORMAT_RF64 : SF_FORMAT_WAV;
        int samples = writer->format == MB_IQ_CI16 ? SF_FORMAT_PCM_16 : SF_FORMAT_FLOAT;
        return mb_sound_create(path, kind | samples, settings->rate_hz, 2, &writer->sound);
    }
    if (mb_path_has_ending(path, ".sigmf-meta") || mb_path_has_ending(path, ".sigmf-data")) {
        return create_sigmf(writer, path, settings);
    }
    return mb_sink_open(path, &writer->data);
}

mb_status mb_iq_writer_create(const char *path, const mb_iq_writer_settings *settings, mb_iq_writer **out)
{
    mb_iq_format format = MB_IQ_BY_ENDING;
    mb_status status = check_settings(path, settings, &format);

    *out = NULL;
    if (status != MB_OK) {
        return status;
    }
    mb_iq_writer *writer = mb_allocate(1, sizeof *writer);
    if (writer == NULL) {
        return mb_fail_memory("an IQ output");
    }
    writer->format = format;
    status = start(writer, path, settings);
    if (status != MB_OK) {
        mb_iq_writer_destroy(writer);
        return status;
    }
    *out = writer;
    return MB_OK;
}
