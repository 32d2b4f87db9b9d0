/** sink.h - bytes to a file that appears under its name when complete, or to a pipe. Room-internal. */
#ifndef MIRRORBAND_FILES_SINK_H
#define MIRRORBAND_FILES_SINK_H

#include "mirrorband/files.h"

typedef struct mb_sink mb_sink;

/**
 * Starts NAME.partial.ENDING beside `path`; "-", named pipes and devices are written directly.
 * Errors: FILE (no folder, not writable, the target is write-protected or a folder), MEMORY.
 */
mb_status mb_sink_open(const char *path, mb_sink **out);

/** Path, or "standard output". */
const char *mb_sink_name(const mb_sink *sink);

/** Whether it is written directly: no seeking, nothing to commit. */
bool mb_sink_is_direct(const mb_sink *sink);

/** MB_OK, or the status of the first failure. */
mb_status mb_sink_status(const mb_sink *sink);

/** Bytes up to the furthest one written; and where the next one goes. */
uint64_t mb_sink_size(const mb_sink *sink);
uint64_t mb_sink_position(const mb_sink *sink);

/** Writes `bytes` at the position. Errors: FILE. After a failure every further write fails likewise. */
mb_status mb_sink_write(mb_sink *sink, const void *from, size_t bytes);

/** printf into the sink. Errors: FILE, MEMORY. */
mb_status mb_sink_print(mb_sink *sink, const char *format, ...) __attribute__((format(printf, 2, 3)));

/** Moves the position; not for direct sinks. */
mb_status mb_sink_seek(mb_sink *sink, uint64_t offset);

/** Hands buffered bytes to the system. */
mb_status mb_sink_flush(mb_sink *sink);

/** Empties a file, to write it anew; not for direct sinks. */
mb_status mb_sink_truncate(mb_sink *sink);

/** Flushes, closes and renames. On failure the partial file is removed. */
mb_status mb_sink_commit(mb_sink *sink);

/** Removes the partial file; accepts NULL. */
void mb_sink_abandon(mb_sink *sink);

/** Removes what was committed under the name: for a pair of which one part failed. */
void mb_sink_retract(mb_sink *sink);

/** Abandons what is not committed and frees; accepts NULL. */
void mb_sink_destroy(mb_sink *sink);

#endif
