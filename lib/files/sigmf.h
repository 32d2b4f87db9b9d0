/** sigmf.h - the metadata of a SigMF recording (version 1.2.5), to and from JSON. Room-internal. */
#ifndef MIRRORBAND_FILES_SIGMF_H
#define MIRRORBAND_FILES_SIGMF_H

#include "sha512.h"
#include "sink.h"

typedef struct mb_sigmf {
    mb_iq_format format;
    double rate_hz; /* 0 = not stated */
    size_t channels;
    char description[256];
    char author[256];
    char sha512[MB_SHA512_TEXT]; /* "" = not stated */
    mb_iq_capture *captures;
    size_t capture_count;
    mb_iq_annotation *annotations;
    size_t annotation_count;
} mb_sigmf;

/**
 * Reads the text of a .sigmf-meta file; name is for messages. *out is filled and owns memory, to be cleared,
 * also after a failure. Errors: FORMAT (damaged JSON with line and column, a field missing or wrong),
 * UNSUPPORTED (datatype, version), MEMORY.
 */
mb_status mb_sigmf_parse(const char *text, size_t length, const char *name, mb_sigmf *out);

/** Holds captures and annotations against the number of samples there. Errors: FORMAT (truncated). */
mb_status mb_sigmf_check_length(const mb_sigmf *meta, uint64_t samples, const char *meta_name,
                                const char *data_name);

/** Writes the JSON text; an annotation of sample_count 0 reaches to `samples`. Errors: FILE, MEMORY. */
mb_status mb_sigmf_print(const mb_sigmf *meta, uint64_t samples, mb_sink *sink);

/** Word of core:datatype, such as "ci16_le". */
const char *mb_sigmf_datatype(mb_iq_format format);

/** Gives the memory back. */
void mb_sigmf_clear(mb_sigmf *meta);

#endif
