#include "convert.h"
#include "path.h"
#include "sigmf.h"
#include "sink.h"
#include "sound.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

enum { BLOCK = 8192 };

struct mb_iq_writer {
    mb_iq_format format;
    mb_sink *data;   /* raw samples, or NULL */
    mb_sink *meta;   /* of a SigMF pair, or NULL */
    mb_sound *sound; /* .wav, .rf64, or NULL */
    mb_sigmf about;
    size_t annotation_room;
    bool hashing;
    mb_sha512 hash;
    mb_iq_writer_state state;
    mb_cf32 *clean;        /* BLOCK samples, made finite */
    unsigned char *stored; /* BLOCK samples as stored */
};

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

/* ---- SigMF --------------------------------------------------------------------------------------------- */

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

/* The metadata is written at once, too, so that a killed writer leaves a readable pair. */
static mb_status write_meta(mb_iq_writer *writer)
{
    mb_status status = mb_sink_is_direct(writer->meta) ? MB_OK : mb_sink_truncate(writer->meta);

    if (status == MB_OK) {
        status = mb_sigmf_print(&writer->about, writer->state.samples, writer->meta);
    }
    return status == MB_OK ? mb_sink_flush(writer->meta) : status;
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
        status = write_meta(writer);
    }
    writer->hashing = settings->sha512;
    mb_sha512_start(&writer->hash);
    mb_release(meta_path);
    mb_release(data_path);
    return status;
}

/* ---- creating ------------------------------------------------------------------------------------------ */

static mb_status start(mb_iq_writer *writer, const char *path, const mb_iq_writer_settings *settings)
{
    writer->clean = mb_allocate(BLOCK, sizeof *writer->clean);
    writer->stored = mb_allocate(BLOCK, mb_iq_format_bytes(writer->format));
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

/* ---- writing ------------------------------------------------------------------------------------------- */

static mb_status put(mb_iq_writer *writer, const void *stored, size_t n)
{
    size_t bytes = n * mb_iq_format_bytes(writer->format);

    writer->state.samples += n;
    if (writer->sound != NULL) {
        return writer->format == MB_IQ_CI16 ? mb_sound_write_s16(writer->sound, stored, n)
                                            : mb_sound_write_f32(writer->sound, stored, n);
    }
    if (writer->hashing) {
        mb_sha512_add(&writer->hash, stored, bytes);
    }
    return mb_sink_write(writer->data, stored, bytes);
}

static mb_status write_block(mb_iq_writer *writer, const mb_cf32 *samples, size_t n)
{
    float *parts = &writer->clean->re;
    void *stored = writer->stored;
    mb_tally tally = {0};

    memcpy(writer->clean, samples, n * sizeof *samples);
    mb_clean_f32(parts, n, 2, &tally);
    switch (writer->format) {
    case MB_IQ_CI16:
        mb_to_s16(parts, n, 2, stored, &tally);
        break;
    case MB_IQ_CI8:
        mb_to_s8(parts, n, 2, stored, &tally);
        break;
    case MB_IQ_CU8:
        mb_to_u8(parts, n, 2, stored, &tally);
        break;
    default:
        stored = parts;
        break;
    }
    writer->state.clipped += tally.full_scale;
    writer->state.non_finite += tally.non_finite;
    return put(writer, stored, n);
}

/* What goes down a pipe must not wait in a buffer. */
static mb_status finish_write(mb_iq_writer *writer, mb_status status)
{
    if (status == MB_OK && writer->data != NULL && mb_sink_is_direct(writer->data)) {
        return mb_sink_flush(writer->data);
    }
    return status;
}

mb_status mb_iq_writer_write(mb_iq_writer *writer, const mb_cf32 *samples, size_t n)
{
    mb_status status = MB_OK;

    while (n > 0 && status == MB_OK) {
        size_t count = n < BLOCK ? n : BLOCK;
        status = write_block(writer, samples, count);
        samples += count;
        n -= count;
    }
    return finish_write(writer, status);
}

mb_status mb_iq_writer_write_ci16(mb_iq_writer *writer, const mb_ci16 *samples, size_t n)
{
    mb_status status = MB_OK;

    if (writer->format == MB_IQ_CI16) {
        return n > 0 ? finish_write(writer, put(writer, samples, n)) : MB_OK;
    }
    while (n > 0 && status == MB_OK) {
        mb_cf32 block[256];
        size_t count = n < 256 ? n : 256;
        mb_tally tally = {0};
        mb_from_s16(&samples->re, count, 2, &block->re, &tally);
        status = write_block(writer, block, count);
        samples += count;
        n -= count;
    }
    return finish_write(writer, status);
}

mb_status mb_iq_writer_annotate(mb_iq_writer *writer, const mb_iq_annotation *annotation)
{
    mb_sigmf *about = &writer->about;

    if (writer->meta == NULL) {
        return MB_OK;
    }
    if (about->annotation_count == writer->annotation_room) {
        size_t room = writer->annotation_room > 0 ? 2 * writer->annotation_room : 8;
        mb_iq_annotation *grown = mb_allocate(room, sizeof *grown);
        if (grown == NULL) {
            return mb_fail_memory("an annotation");
        }
        if (about->annotation_count > 0) {
            memcpy(grown, about->annotations, about->annotation_count * sizeof *grown);
        }
        mb_release(about->annotations);
        about->annotations = grown;
        writer->annotation_room = room;
    }
    about->annotations[about->annotation_count++] = *annotation;
    return MB_OK;
}

mb_iq_writer_state mb_iq_writer_state_of(const mb_iq_writer *writer)
{
    return writer->state;
}

/* ---- ending -------------------------------------------------------------------------------------------- */

/* Data first: metadata never stands there without its samples. */
static mb_status commit_sigmf(mb_iq_writer *writer)
{
    if (writer->hashing) {
        mb_sha512_end(&writer->hash, writer->about.sha512);
    }
    mb_status status = write_meta(writer);
    if (status == MB_OK) {
        status = mb_sink_commit(writer->data);
    }
    if (status != MB_OK) {
        mb_iq_writer_abandon(writer);
        return status;
    }
    status = mb_sink_commit(writer->meta);
    if (status != MB_OK) {
        mb_sink_retract(writer->data);
    }
    return status;
}

mb_status mb_iq_writer_commit(mb_iq_writer *writer)
{
    if (writer->sound != NULL) {
        return mb_sound_commit(writer->sound);
    }
    return writer->meta != NULL ? commit_sigmf(writer) : mb_sink_commit(writer->data);
}

mb_status mb_iq_writer_keep_partial(mb_iq_writer *writer)
{
    static const char remark[] = "(interrupted)";
    char *text = writer->about.description;
    char kept[sizeof writer->about.description - sizeof remark];

    mb_text_copy(kept, sizeof kept, text);
    (void)snprintf(text, sizeof writer->about.description, "%s%s%s", kept, kept[0] != '\0' ? " " : "",
                   remark);
    return mb_iq_writer_commit(writer);
}

void mb_iq_writer_abandon(mb_iq_writer *writer)
{
    if (writer == NULL) {
        return;
    }
    mb_sound_close(writer->sound);
    writer->sound = NULL;
    mb_sink_abandon(writer->data);
    mb_sink_abandon(writer->meta);
}

void mb_iq_writer_destroy(mb_iq_writer *writer)
{
    if (writer == NULL) {
        return;
    }
    mb_iq_writer_abandon(writer);
    mb_sink_destroy(writer->data);
    mb_sink_destroy(writer->meta);
    mb_sigmf_clear(&writer->about);
    mb_release(writer->clean);
    mb_release(writer->stored);
    mb_release(writer);
}
