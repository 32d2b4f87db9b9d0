/** path.h - names of files: endings, partial names, the sentence for a refusal of the system. Room-internal.
 */
#ifndef MIRRORBAND_FILES_PATH_H
#define MIRRORBAND_FILES_PATH_H

#include "mirrorband/files.h"

/** Whether path is "-". */
bool mb_path_is_pipe(const char *path);

/** Whether path ends with ending, letters of either case, with something before it. */
bool mb_path_has_ending(const char *path, const char *ending);

/** Format of raw samples by the ending .cf32 .ci16 .ci8 .cu8; MB_IQ_BY_ENDING for any other. */
mb_iq_format mb_iq_format_by_ending(const char *path);

/** Path without its last strlen(ending) characters plus another ending; to be released; NULL = no memory. */
char *mb_path_replace_ending(const char *path, const char *ending, const char *other);

/** "folder/air.ci16" -> "folder/air.partial.ci16"; to be released; NULL = no memory. */
char *mb_path_partial(const char *path);

/** Copies text into out of size bytes, cut to fit at a whole UTF-8 character. */
void mb_text_copy(char *out, size_t size, const char *text);

/** What the system said, in lower-case words. out: 96 bytes or more. */
void mb_system_words(int error, char *out, size_t size);

/** Records that reading `name` failed, with the remedy, and returns MB_ERROR_FILE. */
mb_status mb_fail_reading(const char *name, int error);

/** Records that writing `name` failed after `bytes`, with the remedy, and returns MB_ERROR_FILE. */
mb_status mb_fail_writing(const char *name, int error, uint64_t bytes);

/** Records that no output can be started at `path`, with the remedy, and returns MB_ERROR_FILE. */
mb_status mb_fail_creating(const char *path, int error);

/** Records that the memory for `what` could not be had. */
mb_status mb_fail_memory(const char *what);

/** Refuses devices, empty paths and NULL where a file or "-" is wanted. */
mb_status mb_path_check(const char *path);

#endif
