#include "iq_writer.h"

#include "convert.h"
#include "path.h"

#include <stdio.h>
#include <string.h>

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
        size_t count = n < MB_IQ_WRITE_BLOCK ? n : MB_IQ_WRITE_BLOCK;
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

/* The metadata is written at once, too, so that a killed writer leaves a readable pair. */
mb_status mb_iq_write_meta(mb_iq_writer *writer)
{
    mb_status status = mb_sink_is_direct(writer->meta) ? MB_OK : mb_sink_truncate(writer->meta);

    if (status == MB_OK) {
        status = mb_sigmf_print(&writer->about, writer->state.samples, writer->meta);
    }
    return status == MB_OK ? mb_sink_flush(writer->meta) : status;
}

/* Data first: metadata never stands there without its samples. */
static mb_status commit_sigmf(mb_iq_writer *writer)
{
    if (writer->hashing) {
        mb_sha512_end(&writer->hash, writer->about.sha512);
    }
    mb_status status = mb_iq_write_meta(writer);
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
