#include "iq_reader.h"

#include "path.h"
#include "sniff.h"

#include <stdio.h>
#include <string.h>
#include <strings.h>

mb_iq_open mb_iq_open_default(void)
{
    return (mb_iq_open){.format = MB_IQ_BY_ENDING};
}

/* A length that is no multiple of a sample is told with what to do about it. */
mb_status mb_iq_check_whole(const mb_iq_reader *reader, const char *name, uint64_t bytes)
{
    uint64_t odd = bytes % reader->frame_bytes;

    if (odd == 0) {
        return MB_OK;
    }
    return mb_fail(
        MB_ERROR_FORMAT, name,
        "%s holds %llu bytes, no multiple of the %zu of a %s sample: it is truncated or of another format; "
        "copy it again or cut the last %llu bytes off",
        name, (unsigned long long)bytes, reader->frame_bytes, mb_iq_format_text(reader->info.format),
        (unsigned long long)odd);
}

static mb_status measure_raw(mb_iq_reader *reader)
{
    const char *name = mb_source_name(reader->source);

    reader->frame_bytes = reader->info.channels * mb_iq_format_bytes(reader->info.format);
    if (!mb_source_is_file(reader->source)) {
        return MB_OK;
    }
    mb_status status = mb_sniff_raw(reader->source, mb_iq_format_text(reader->info.format));
    if (status == MB_OK) {
        status = mb_iq_check_whole(reader, name, mb_source_size(reader->source));
    }
    reader->info.samples = mb_source_size(reader->source) / reader->frame_bytes;
    return status;
}

static mb_status open_raw(mb_iq_reader *reader, const char *path, const mb_iq_open *options,
                          mb_iq_format format)
{
    const char *name = mb_path_is_pipe(path) ? "standard input" : path;

    if (options->rate_hz == 0.0) {
        return mb_fail(MB_ERROR_ARGUMENT, "rate_hz",
                       "%s holds raw samples, which do not tell their rate; state it", name);
    }
    mb_status status = mb_check_range("rate_hz", options->rate_hz, 1.0, 1e12, "Hz");
    if (status == MB_OK) {
        status = mb_source_open(path, options->rewindable, &reader->source);
    }
    reader->info.format = format;
    reader->info.rate_hz = options->rate_hz;
    reader->info.channels = 1;
    return status == MB_OK ? measure_raw(reader) : status;
}

static mb_status open_sound(mb_iq_reader *reader, const char *path, bool rewindable)
{
    mb_source *source = NULL;
    mb_status status = mb_source_open(path, rewindable, &source);

    if (status == MB_OK) {
        status = mb_sound_open(path, source, &reader->sound);
    }
    if (status != MB_OK) {
        return status;
    }
    SF_INFO info = mb_sound_info(reader->sound);
    if (info.channels % 2 != 0 || info.channels > 2 * MB_IQ_CHANNELS_MAX) {
        return mb_fail(MB_ERROR_FORMAT, path,
                       "%s has %d channel%s, but IQ needs two (I left, Q right); give a recording of a radio",
                       path, info.channels, info.channels == 1 ? "" : "s");
    }
    bool narrow = (info.format & SF_FORMAT_SUBMASK) == SF_FORMAT_PCM_16;
    reader->info.format = narrow ? MB_IQ_CI16 : MB_IQ_CF32;
    reader->info.rate_hz = info.samplerate;
    reader->info.samples = (uint64_t)info.frames;
    reader->info.channels = (size_t)info.channels / 2;
    reader->frame_bytes = reader->info.channels * mb_iq_format_bytes(reader->info.format);
    return MB_OK;
}

/* Reads all of a metadata file and parses it. */
static mb_status read_meta(mb_iq_reader *reader, const char *path)
{
    const uint64_t limit = UINT64_C(1) << 28;
    mb_source *source = NULL;
    size_t got = 0;
    mb_status status = mb_source_open(path, false, &source);

    if (status != MB_OK) {
        return status;
    }
    uint64_t size = mb_source_size(source);
    if (!mb_source_is_file(source) || size > limit) {
        mb_source_close(source);
        return mb_fail(MB_ERROR_UNSUPPORTED, path,
                       "%s is no ordinary file of at most 256 MiB; is it the samples?", path);
    }
    char *text = mb_allocate((size_t)size, 1);
    status =
        text != NULL ? mb_source_read(source, text, (size_t)size, &got) : mb_fail_memory("SigMF metadata");
    if (status == MB_OK) {
        status = mb_sigmf_parse(text, got, path, &reader->meta);
    }
    mb_release(text);
    mb_source_close(source);
    return status;
}

static void fill_info(mb_iq_reader *reader, const mb_iq_open *options)
{
    const mb_sigmf *meta = &reader->meta;
    mb_iq_info *info = &reader->info;

    info->format = meta->format;
    info->rate_hz = meta->rate_hz > 0.0 ? meta->rate_hz : options->rate_hz;
    info->channels = meta->channels;
    info->captures = meta->capture_count;
    info->annotations = meta->annotation_count;
    memcpy(info->description, meta->description, sizeof info->description);
    if (meta->capture_count > 0) {
        info->has_centre = meta->captures[0].has_frequency;
        info->centre_hz = meta->captures[0].frequency_hz;
        memcpy(info->datetime, meta->captures[0].datetime, sizeof info->datetime);
    }
}

/* Hashes the data and holds it against what the metadata states. */
static mb_status verify_hash(mb_iq_reader *reader)
{
    const char *name = mb_source_name(reader->source);
    unsigned char block[4096];
    char text[MB_SHA512_TEXT];
    size_t got = 0;
    mb_sha512 hash;
    mb_status status = MB_OK;

    mb_sha512_start(&hash);
    while ((status = mb_source_read(reader->source, block, sizeof block, &got)) == MB_OK && got > 0) {
        mb_sha512_add(&hash, block, got);
    }
    if (status != MB_OK) {
        return status;
    }
    mb_sha512_end(&hash, text);
    if (strcasecmp(text, reader->meta.sha512) != 0) {
        return mb_fail(MB_ERROR_FORMAT, name,
                       "%s is damaged: its content does not fit core:sha512; copy it again", name);
    }
    return mb_source_seek(reader->source, 0);
}

static mb_status open_data(mb_iq_reader *reader, const char *meta_path, const char *data_path, bool verify)
{
    mb_status status = mb_source_open(data_path, false, &reader->source);

    if (status == MB_OK) {
        status = measure_raw(reader);
    }
    if (status == MB_OK) {
        status = mb_sigmf_check_length(&reader->meta, reader->info.samples, meta_path, data_path);
    }
    if (status == MB_OK && verify && reader->meta.sha512[0] != '\0') {
        status = verify_hash(reader);
    }
    return status;
}

static mb_status open_sigmf(mb_iq_reader *reader, const char *path, const mb_iq_open *options,
                            const char *ending)
{
    char *meta_path = mb_path_replace_ending(path, ending, ".sigmf-meta");
    char *data_path = mb_path_replace_ending(path, ending, ".sigmf-data");
    mb_status status = MB_ERROR_MEMORY;

    if (meta_path == NULL || data_path == NULL) {
        (void)mb_fail_memory("an input");
    } else {
        status = read_meta(reader, meta_path);
    }
    if (status == MB_OK) {
        fill_info(reader, options);
        if (reader->info.rate_hz == 0.0) {
            status = mb_fail(MB_ERROR_ARGUMENT, "rate_hz",
                             "%s does not tell core:sample_rate; state the rate", path);
        }
    }
    if (status == MB_OK) {
        status = mb_check_range("rate_hz", reader->info.rate_hz, 1.0, 1e12, "Hz");
    }
    if (status == MB_OK) {
        status = open_data(reader, meta_path, data_path, options->verify);
    }
    mb_release(meta_path);
    mb_release(data_path);
    return status;
}

static mb_status open_by_kind(mb_iq_reader *reader, const char *path, const mb_iq_open *options)
{
    mb_iq_format raw = options->format != MB_IQ_BY_ENDING ? options->format : mb_iq_format_by_ending(path);

    if (mb_path_has_ending(path, ".sigmf-meta")) {
        return open_sigmf(reader, path, options, ".sigmf-meta");
    }
    if (mb_path_has_ending(path, ".sigmf-data") && options->format == MB_IQ_BY_ENDING) {
        return open_sigmf(reader, path, options, ".sigmf-data");
    }
    if (mb_sound_has_ending(path, false)) {
        return open_sound(reader, path, options->rewindable);
    }
    if (raw != MB_IQ_BY_ENDING) {
        return open_raw(reader, path, options, raw);
    }
    if (mb_path_is_pipe(path)) {
        return mb_fail(MB_ERROR_ARGUMENT, "format",
                       "standard input holds raw samples; state their format, one of cf32 ci16 ci8 cu8");
    }
    if (mb_path_has_ending(path, ".sigmf")) {
        return mb_fail(MB_ERROR_UNSUPPORTED, path,
                       "%s is a SigMF archive; unpack it with tar -xf and give its "
                       ".sigmf-meta",
                       path);
    }
    return mb_fail(MB_ERROR_UNSUPPORTED, path,
                   "%s has no ending that is read as IQ; use one of %s, or state a format", path,
                   mb_iq_endings());
}

/* Picks the pair asked for and makes room for blocks. */
static mb_status prepare(mb_iq_reader *reader, const char *path, size_t channel)
{
    size_t channels = reader->info.channels;

    if (channel > channels || (channel == 0 && channels > 1)) {
        return mb_fail(MB_ERROR_ARGUMENT, "channel", "%s has %zu I/Q channels; choose one of 1 to %zu", path,
                       channels, channels);
    }
    reader->pair = channel > 0 ? channel - 1 : 0;
    reader->stored = mb_allocate(MB_IQ_BLOCK, mb_iq_format_bytes(reader->info.format));
    reader->frames = channels > 1 ? mb_allocate(MB_IQ_BLOCK, reader->frame_bytes) : NULL;
    if (reader->stored == NULL || (channels > 1 && reader->frames == NULL)) {
        return mb_fail_memory("an IQ input");
    }
    return MB_OK;
}

mb_status mb_iq_reader_open(const char *path, const mb_iq_open *options, mb_iq_reader **out)
{
    const mb_iq_open defaults = mb_iq_open_default();

    *out = NULL;
    options = options != NULL ? options : &defaults;
    mb_status status = mb_path_check(path);
    if (status != MB_OK) {
        return status;
    }
    mb_iq_reader *reader = mb_allocate(1, sizeof *reader);
    if (reader == NULL) {
        return mb_fail_memory("an IQ input");
    }
    status = open_by_kind(reader, path, options);
    if (status == MB_OK) {
        status = prepare(reader, path, options->channel);
    }
    if (status != MB_OK) {
        mb_iq_reader_close(reader);
        return status;
    }
    *out = reader;
    return MB_OK;
}
