#include "iq_reader.h"

#include "convert.h"
#include "sniff.h"

#include <string.h>

/* Whole instants of all pairs from raw bytes. */
static mb_status read_raw(mb_iq_reader *reader, void *to, size_t n, size_t *got)
{
    unsigned char *bytes = to;
    size_t wanted = n * reader->frame_bytes, kept = reader->carried, made = 0;
    mb_status status = MB_OK;

    *got = 0;
    if (!mb_source_is_file(reader->source) && mb_source_position(reader->source) == 0) {
        status = mb_sniff_raw(reader->source, mb_iq_format_text(reader->info.format));
    }
    if (status != MB_OK) {
        return status;
    }
    memcpy(bytes, reader->carry, kept);
    status = mb_source_read(reader->source, bytes + kept, wanted - kept, &made);
    *got = (kept + made) / reader->frame_bytes;
    reader->carried = (kept + made) % reader->frame_bytes;
    memcpy(reader->carry, bytes + *got * reader->frame_bytes, reader->carried);
    if (status == MB_OK && *got == 0 && reader->carried > 0) {
        return mb_iq_check_whole(reader, mb_source_name(reader->source), mb_source_position(reader->source));
    }
    return status;
}

static mb_status read_instants(mb_iq_reader *reader, void *to, size_t n, size_t *got)
{
    if (reader->sound == NULL) {
        return read_raw(reader, to, n, got);
    }
    if (reader->info.format == MB_IQ_CI16) {
        return mb_sound_read_s16(reader->sound, to, n, got);
    }
    return mb_sound_read_f32(reader->sound, to, n, got);
}

/* Up to n samples of the chosen pair, as stored; at most MB_IQ_BLOCK when there are several pairs. */
static mb_status read_stored(mb_iq_reader *reader, void *to, size_t n, size_t *got)
{
    size_t bytes = mb_iq_format_bytes(reader->info.format);
    unsigned char *out = to;

    if (reader->info.channels == 1) {
        return read_instants(reader, to, n, got);
    }
    mb_status status = read_instants(reader, reader->frames, n < MB_IQ_BLOCK ? n : MB_IQ_BLOCK, got);
    for (size_t i = 0; i < *got; i++) {
        memcpy(out + i * bytes, reader->frames + i * reader->frame_bytes + reader->pair * bytes, bytes);
    }
    return status;
}

static void add_tally(mb_iq_reader_state *state, const mb_tally *tally, size_t samples)
{
    state->samples += samples;
    state->non_finite += tally->non_finite;
    state->at_full_scale += tally->full_scale;
    state->peak = tally->peak > state->peak ? tally->peak : state->peak;
}

static void convert(mb_iq_reader *reader, size_t n, mb_cf32 *out, mb_tally *tally)
{
    float *parts = &out->re;
    void *stored = reader->stored;

    switch (reader->info.format) {
    case MB_IQ_CI16:
        mb_from_s16(stored, n, 2, parts, tally);
        break;
    case MB_IQ_CI8:
        mb_from_s8(stored, n, 2, parts, tally);
        break;
    case MB_IQ_CU8:
        mb_from_u8(stored, n, 2, parts, tally);
        break;
    default:
        mb_clean_f32(parts, n, 2, tally);
        break;
    }
}

mb_status mb_iq_read(mb_iq_reader *reader, mb_cf32 *out, size_t n, size_t *got)
{
    bool floats = reader->info.format == MB_IQ_CF32;
    mb_status status = MB_OK;

    *got = 0;
    while (*got < n && status == MB_OK) {
        size_t wanted = n - *got < MB_IQ_BLOCK ? n - *got : MB_IQ_BLOCK, made = 0;
        mb_tally tally = {0};
        status = read_stored(reader, floats ? (void *)(out + *got) : reader->stored, wanted, &made);
        convert(reader, made, out + *got, &tally);
        add_tally(&reader->state, &tally, made);
        *got += made;
        if (made == 0) {
            break;
        }
    }
    return status;
}

mb_status mb_iq_read_ci16(mb_iq_reader *reader, mb_ci16 *out, size_t n, size_t *got)
{
    mb_status status = MB_OK;

    *got = 0;
    if (reader->info.format != MB_IQ_CI16) {
        return mb_fail(MB_ERROR_UNSUPPORTED, "format", "the samples are %s, not ci16; read them as floats",
                       mb_iq_format_text(reader->info.format));
    }
    while (*got < n && status == MB_OK) {
        size_t wanted = n - *got < MB_IQ_BLOCK ? n - *got : MB_IQ_BLOCK, made = 0;
        mb_tally tally = {0};
        status = read_stored(reader, out + *got, wanted, &made);
        mb_look_s16(&out[*got].re, made, 2, &tally);
        add_tally(&reader->state, &tally, made);
        *got += made;
        if (made == 0) {
            break;
        }
    }
    return status;
}

mb_status mb_iq_rewind(mb_iq_reader *reader)
{
    mb_status status =
        reader->sound != NULL ? mb_sound_seek(reader->sound, 0) : mb_source_seek(reader->source, 0);

    if (status == MB_OK) {
        reader->state = (mb_iq_reader_state){0};
        reader->carried = 0;
    }
    return status;
}

/* ---- asking and closing -------------------------------------------------------------------------------- */

mb_iq_info mb_iq_reader_info(const mb_iq_reader *reader)
{
    return reader->info;
}

mb_iq_reader_state mb_iq_reader_state_of(const mb_iq_reader *reader)
{
    return reader->state;
}

static mb_status no_such(size_t index, const char *what, size_t count)
{
    return mb_fail(MB_ERROR_ARGUMENT, "index", "there is no %s %zu; the recording has %zu of them", what,
                   index, count);
}

mb_status mb_iq_reader_capture(const mb_iq_reader *reader, size_t index, mb_iq_capture *capture)
{
    if (index >= reader->meta.capture_count) {
        return no_such(index, "capture", reader->meta.capture_count);
    }
    *capture = reader->meta.captures[index];
    return MB_OK;
}

mb_status mb_iq_reader_annotation(const mb_iq_reader *reader, size_t index, mb_iq_annotation *annotation)
{
    if (index >= reader->meta.annotation_count) {
        return no_such(index, "annotation", reader->meta.annotation_count);
    }
    *annotation = reader->meta.annotations[index];
    return MB_OK;
}

void mb_iq_reader_close(mb_iq_reader *reader)
{
    if (reader == NULL) {
        return;
    }
    mb_sound_close(reader->sound);
    mb_source_close(reader->source);
    mb_sigmf_clear(&reader->meta);
    mb_release(reader->frames);
    mb_release(reader->stored);
    mb_release(reader);
}
