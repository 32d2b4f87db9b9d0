/** source.h - bytes from a file or a pipe, buffered, with a spool that lets a pipe be rewound. Room-internal.
 */
#ifndef MIRRORBAND_FILES_SOURCE_H
#define MIRRORBAND_FILES_SOURCE_H

#include "mirrorband/files.h"

typedef struct mb_source mb_source;

/**
 * Opens a file, a named pipe or "-" (standard input). rewindable: what comes from a pipe is copied to an
 * unlinked temporary file. Errors: FILE (missing, a folder, not readable, no room for a temporary file),
 * FORMAT (an empty file), MEMORY.
 */
mb_status mb_source_open(const char *path, bool rewindable, mb_source **out);

/** Path, or "standard input". */
const char *mb_source_name(const mb_source *source);

/** Whether the length is known and seeking possible. */
bool mb_source_is_file(const mb_source *source);

/** Length in bytes of a file; 0 for a pipe. */
uint64_t mb_source_size(const mb_source *source);

/** Bytes read since the start. */
uint64_t mb_source_position(const mb_source *source);

/** Reads up to `bytes`; *got is less only at the end. Errors: FILE, INTERRUPTED (by a signal; may be called
 * on). */
mb_status mb_source_read(mb_source *source, void *to, size_t bytes, size_t *got);

/** Shows up to 4096 bytes that come next without taking them. */
mb_status mb_source_peek(mb_source *source, size_t bytes, const unsigned char **from, size_t *got);

/** Next byte, or -1 at the end (*status MB_OK) or after an error (*status tells). */
int mb_source_byte(mb_source *source, mb_status *status);

/** Moves to a byte offset. Errors: UNSUPPORTED for a pipe, unless rewindable and already read so far. */
mb_status mb_source_seek(mb_source *source, uint64_t offset);

/** Accepts NULL. */
void mb_source_close(mb_source *source);

#endif
