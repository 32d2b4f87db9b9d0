#include "source.h"

#include "path.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

enum { BUFFER_BYTES = 1 << 18, PEEK_BYTES = 4096 };

struct mb_source {
    int fd;
    bool owned;        /* close fd at the end */
    bool file;         /* known length, can seek */
    off_t base;        /* where the first byte lies in a file handed over half-read */
    uint64_t size;     /* of a file */
    int spool;         /* copy of a pipe, or -1 */
    uint64_t spooled;  /* bytes in the copy */
    uint64_t next;     /* offset of the byte behind the buffer */
    size_t begin, end; /* what is left in the buffer */
    unsigned char *buffer;
    char name[512];
};

static mb_status open_spool(mb_source *source)
{
    const char *folder = getenv("TMPDIR");
    char path[512];

    if (folder == NULL || folder[0] == '\0') {
        folder = "/tmp";
    }
    (void)snprintf(path, sizeof path, "%s/mirrorband-XXXXXX", folder);
    source->spool = mkstemp(path);
    if (source->spool < 0) {
        char words[96];
        mb_system_words(errno, words, sizeof words);
        return mb_fail(
            MB_ERROR_FILE, folder,
            "no temporary file can be made in %s for what comes from %s: %s; set TMPDIR to a folder with "
            "room for it",
            folder, source->name, words);
    }
    (void)unlink(path);
    return MB_OK;
}

static mb_status open_descriptor(mb_source *source, const char *path)
{
    struct stat about;

    source->owned = !mb_path_is_pipe(path);
    source->fd = source->owned ? open(path, O_RDONLY | O_CLOEXEC) : STDIN_FILENO;
    if (source->fd < 0 || fstat(source->fd, &about) != 0) {
        return mb_fail_reading(source->name, errno);
    }
    if (S_ISDIR(about.st_mode)) {
        return mb_fail_reading(source->name, EISDIR);
    }
    if (!S_ISREG(about.st_mode)) {
        return MB_OK;
    }
    source->file = true;
    source->base = source->owned ? 0 : lseek(source->fd, 0, SEEK_CUR);
    if (about.st_size <= source->base) {
        return mb_fail(MB_ERROR_FORMAT, source->name, "%s is empty; record or copy it again", source->name);
    }
    source->size = (uint64_t)(about.st_size - source->base);
    return MB_OK;
}

mb_status mb_source_open(const char *path, bool rewindable, mb_source **out)
{
    mb_source *source = mb_allocate(1, sizeof *source);

    *out = NULL;
    if (source == NULL) {
        return mb_fail_memory("an input");
    }
    source->fd = source->spool = -1;
    mb_text_copy(source->name, sizeof source->name, mb_path_is_pipe(path) ? "standard input" : path);
    source->buffer = mb_allocate(BUFFER_BYTES, 1);
    mb_status status = source->buffer != NULL ? open_descriptor(source, path) : mb_fail_memory("an input");
    if (status == MB_OK && rewindable && !source->file) {
        status = open_spool(source);
    }
    if (status != MB_OK) {
        mb_source_close(source);
        return status;
    }
    *out = source;
    return MB_OK;
}

const char *mb_source_name(const mb_source *source)
{
    return source->name;
}

bool mb_source_is_file(const mb_source *source)
{
    return source->file;
}

uint64_t mb_source_size(const mb_source *source)
{
    return source->size;
}

uint64_t mb_source_position(const mb_source *source)
{
    return source->next - (source->end - source->begin);
}

static mb_status append_to_spool(mb_source *source, const unsigned char *from, size_t bytes)
{
    while (bytes > 0) {
        ssize_t made = pwrite(source->spool, from, bytes, (off_t)source->spooled);
        if (made < 0 && errno == EINTR) {
            continue;
        }
        if (made < 0) {
            return mb_fail_writing("the temporary file in TMPDIR", errno, source->spooled);
        }
        from += made;
        bytes -= (size_t)made;
        source->spooled += (uint64_t)made;
    }
    return MB_OK;
}

/* One read of the system at source->next; 0 bytes = the end. */
static mb_status read_once(mb_source *source, unsigned char *to, size_t bytes, size_t *got)
{
    ssize_t made = 0;

    *got = 0;
    if (source->file) {
        made = pread(source->fd, to, bytes, source->base + (off_t)source->next);
    } else if (source->next < source->spooled) {
        uint64_t left = source->spooled - source->next;
        made = pread(source->spool, to, left < bytes ? (size_t)left : bytes, (off_t)source->next);
    } else {
        made = read(source->fd, to, bytes);
        if (made > 0 && source->spool >= 0) {
            mb_status status = append_to_spool(source, to, (size_t)made);
            if (status != MB_OK) {
                return status;
            }
        }
    }
    if (made < 0 && errno == EINTR) {
        return mb_fail(MB_ERROR_INTERRUPTED, source->name, "reading %s was interrupted", source->name);
    }
    if (made < 0) {
        return mb_fail_reading(source->name, errno);
    }
    source->next += (uint64_t)made;
    *got = (size_t)made;
    return MB_OK;
}

static mb_status refill(mb_source *source)
{
    size_t got = 0;

    source->begin = source->end = 0;
    mb_status status = read_once(source, source->buffer, BUFFER_BYTES, &got);
    source->end = got;
    return status;
}

mb_status mb_source_read(mb_source *source, void *to, size_t bytes, size_t *got)
{
    unsigned char *at = to;
    size_t done = 0, made = 0;
    mb_status status = MB_OK;

    while (done < bytes && status == MB_OK) {
        size_t ready = source->end - source->begin;
        size_t wanted = bytes - done;
        if (ready > 0) {
            made = ready < wanted ? ready : wanted;
            memcpy(at + done, source->buffer + source->begin, made);
            source->begin += made;
        } else if (wanted >= BUFFER_BYTES) {
            status = read_once(source, at + done, wanted, &made);
        } else {
            status = refill(source);
            made = 0;
            if (source->end == 0) {
                break;
            }
            continue;
        }
        if (made == 0) {
            break;
        }
        done += made;
    }
    *got = done;
    return status;
}

mb_status mb_source_peek(mb_source *source, size_t bytes, const unsigned char **from, size_t *got)
{
    mb_status status = MB_OK;

    bytes = bytes < PEEK_BYTES ? bytes : PEEK_BYTES;
    if (source->begin > 0 && source->end - source->begin < bytes) {
        memmove(source->buffer, source->buffer + source->begin, source->end - source->begin);
        source->end -= source->begin;
        source->begin = 0;
    }
    while (status == MB_OK && source->end - source->begin < bytes) {
        size_t made = 0;
        status = read_once(source, source->buffer + source->end, BUFFER_BYTES - source->end, &made);
        source->end += made;
        if (made == 0) {
            break;
        }
    }
    *from = source->buffer + source->begin;
    *got = source->end - source->begin < bytes ? source->end - source->begin : bytes;
    return status;
}

int mb_source_byte(mb_source *source, mb_status *status)
{
    *status = MB_OK;
    if (source->begin == source->end) {
        *status = refill(source);
        if (source->end == 0) {
            return -1;
        }
    }
    return source->buffer[source->begin++];
}

mb_status mb_source_seek(mb_source *source, uint64_t offset)
{
    uint64_t buffered = source->next - source->end;

    if (offset >= buffered && offset <= source->next) {
        source->begin = (size_t)(offset - buffered);
        return MB_OK;
    }
    if (!source->file && (source->spool < 0 || offset > source->spooled)) {
        return mb_fail(MB_ERROR_UNSUPPORTED, source->name,
                       "%s is a pipe and cannot be read twice; record it to a file first", source->name);
    }
    source->next = offset;
    source->begin = source->end = 0;
    return MB_OK;
}

void mb_source_close(mb_source *source)
{
    if (source == NULL) {
        return;
    }
    if (source->owned && source->fd >= 0) {
        (void)close(source->fd);
    }
    if (source->spool >= 0) {
        (void)close(source->spool);
    }
    mb_release(source->buffer);
    mb_release(source);
}
