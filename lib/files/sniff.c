#include "sniff.h"

#include "path.h"

#include <string.h>

enum { LOOK_BYTES = 64 };

static bool is_text(const unsigned char *bytes, size_t count)
{
    size_t plain = 0;

    for (size_t i = 0; i < count; i++) {
        bool space = bytes[i] == '\n' || bytes[i] == '\r' || bytes[i] == '\t';
        if (!space && (bytes[i] < 0x20 || bytes[i] == 0x7f)) {
            return false;
        }
        plain += bytes[i] < 0x80 ? 1 : 0;
    }
    return count > 0 && 2 * plain > count;
}

static bool begins(const unsigned char *bytes, size_t count, const char *word)
{
    return count >= strlen(word) && memcmp(bytes, word, strlen(word)) == 0;
}

/* Kind of a file by its first bytes; NULL when they could be samples. */
static const char *known_kind(const unsigned char *bytes, size_t count)
{
    bool wave = count >= 12 && memcmp(bytes + 8, "WAVE", 4) == 0;

    if (wave && begins(bytes, count, "RIFF")) {
        return "WAV";
    }
    if (wave && (begins(bytes, count, "RF64") || begins(bytes, count, "BW64"))) {
        return "RF64";
    }
    if (begins(bytes, count, "fLaC")) {
        return "FLAC";
    }
    return begins(bytes, count, "{") && is_text(bytes, count) ? "JSON" : NULL;
}

mb_status mb_sniff_raw(mb_source *source, const char *kind)
{
    const unsigned char *bytes = NULL;
    size_t count = 0;
    mb_status status = mb_source_peek(source, LOOK_BYTES, &bytes, &count);
    const char *name = mb_source_name(source);
    const char *found = known_kind(bytes, count);

    if (status == MB_OK && found != NULL) {
        const char *remedy = strcmp(found, "JSON") == 0 ? "give the .sigmf-meta or the samples themselves"
                                                        : "give it the ending of its kind";
        return mb_fail(MB_ERROR_FORMAT, name, "%s is %s, not raw %s samples; %s", name, found, kind, remedy);
    }
    return status;
}

static uint64_t little_endian(const unsigned char *bytes, int count)
{
    uint64_t value = 0;

    for (int i = count - 1; i >= 0; i--) {
        value = (value << 8) | bytes[i];
    }
    return value;
}

static mb_status truncated(const char *name, uint64_t there, uint64_t stated)
{
    return mb_fail(
        MB_ERROR_FORMAT, name,
        "%s is truncated: its header states %llu bytes of samples and %llu are there; copy or record it "
        "again",
        name, (unsigned long long)stated, (unsigned long long)there);
}

/* Holds the stated length of the data chunk against the file. 0 and FFFFFFFF stand for "not known"
 * (streamed). */
static mb_status check_data_chunk(mb_source *source, uint64_t stated)
{
    uint64_t there = mb_source_size(source) - mb_source_position(source);

    return stated <= there ? MB_OK : truncated(mb_source_name(source), there, stated);
}

/* Walks the chunks up to the samples. */
static mb_status check_chunks(mb_source *source, bool wide)
{
    unsigned char head[8], sizes[24];
    const char *name = mb_source_name(source);
    uint64_t wide_size = 0;
    size_t got = 0;
    mb_status status = mb_source_seek(source, 12);

    while (status == MB_OK && (status = mb_source_read(source, head, 8, &got)) == MB_OK && got == 8) {
        uint64_t size = little_endian(head + 4, 4), start = mb_source_position(source);
        if (memcmp(head, "data", 4) == 0) {
            bool streamed = size == UINT32_MAX;
            return check_data_chunk(source, !streamed ? size : wide ? wide_size : 0);
        }
        if (wide && memcmp(head, "ds64", 4) == 0 && size >= sizeof sizes) {
            status = mb_source_read(source, sizes, sizeof sizes, &got);
            wide_size = got == sizeof sizes ? little_endian(sizes + 8, 8) : 0;
        }
        uint64_t next = start + size + (size & 1U);
        if (next > mb_source_size(source)) {
            break;
        }
        status = status == MB_OK ? mb_source_seek(source, next) : status;
    }
    return status != MB_OK
               ? status
               : mb_fail(MB_ERROR_FORMAT, name,
                         "%s is truncated: it ends before the samples begin; copy or record it again", name);
}

mb_status mb_sniff_sound(mb_source *source, bool flac)
{
    const unsigned char *bytes = NULL;
    const char *name = mb_source_name(source), *wanted = flac ? "FLAC" : "WAV or RF64";
    size_t count = 0;
    mb_status status = mb_source_peek(source, LOOK_BYTES, &bytes, &count);

    if (status != MB_OK) {
        return status;
    }
    const char *kind = known_kind(bytes, count);
    bool wide = kind != NULL && strcmp(kind, "RF64") == 0;
    bool wave = wide || (kind != NULL && strcmp(kind, "WAV") == 0);
    if (wave && !flac) {
        status = check_chunks(source, wide);
        return status == MB_OK ? mb_source_seek(source, 0) : status;
    }
    if (flac && kind != NULL && strcmp(kind, "FLAC") == 0) {
        return MB_OK;
    }
    if (kind == NULL) {
        kind = is_text(bytes, count) ? "text" : "of a kind not known here";
    }
    return mb_fail(MB_ERROR_FORMAT, name, "%s is not %s but %s; convert it or give it the ending of its kind",
                   name, wanted, kind);
}
