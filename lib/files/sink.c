#define _XOPEN_SOURCE 700 /* realpath */
#include "sink.h"

#include "path.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

enum { BUFFER_BYTES = 1 << 18 };

struct mb_sink {
    int fd;
    bool direct;
    bool closed;      /* committed or abandoned */
    mb_fault failure; /* the first one; later calls tell it again */
    char *path;       /* where it goes at last, links followed */
    char *partial;    /* where it grows */
    uint64_t offset;  /* of the first byte in the buffer */
    uint64_t size;
    size_t fill;
    unsigned char *buffer;
    char name[512];
};

/* The path itself, or what a link stands for: a link stays a link. NULL = no memory. */
static char *follow_link(const char *path)
{
    char *real = realpath(path, NULL);
    const char *from = real != NULL ? real : path;
    char *copy = mb_allocate(strlen(from) + 1, 1);

    if (copy != NULL) {
        memcpy(copy, from, strlen(from) + 1);
    }
    free(real);
    return copy;
}

/* Decides between direct and beside the name; refuses what may not be replaced. */
static mb_status look_at_target(mb_sink *sink, const char *path)
{
    struct stat about;

    if (mb_path_is_pipe(path)) {
        sink->direct = true;
        return MB_OK;
    }
    if (stat(path, &about) != 0) {
        return MB_OK; /* not there yet; what is wrong with its folder shows when it is made */
    }
    if (S_ISDIR(about.st_mode)) {
        return mb_fail(MB_ERROR_FILE, path, "%s cannot be written: it is a folder; name a file in it", path);
    }
    if ((about.st_mode & (S_IWUSR | S_IWGRP | S_IWOTH)) == 0 || access(path, W_OK) != 0) {
        return mb_fail(
            MB_ERROR_FILE, path,
            "%s cannot be written: it is there and write-protected; remove it or choose another name", path);
    }
    sink->direct = !S_ISREG(about.st_mode);
    return MB_OK;
}

static mb_status open_target(mb_sink *sink, const char *path)
{
    mb_status status = look_at_target(sink, path);

    if (status != MB_OK) {
        return status;
    }
    if (mb_path_is_pipe(path)) {
        sink->fd = STDOUT_FILENO;
        return MB_OK;
    }
    if (sink->direct) {
        sink->fd = open(path, O_WRONLY | O_CLOEXEC);
        return sink->fd >= 0 ? MB_OK : mb_fail_creating(path, errno);
    }
    sink->path = follow_link(path);
    sink->partial = sink->path != NULL ? mb_path_partial(sink->path) : NULL;
    if (sink->partial == NULL) {
        return mb_fail_memory("an output");
    }
    sink->fd = open(sink->partial, O_RDWR | O_CREAT | O_TRUNC | O_CLOEXEC, 0666);
    return sink->fd >= 0 ? MB_OK : mb_fail_creating(path, errno);
}

mb_status mb_sink_open(const char *path, mb_sink **out)
{
    mb_sink *sink = mb_allocate(1, sizeof *sink);

    *out = NULL;
    if (sink == NULL) {
        return mb_fail_memory("an output");
    }
    sink->fd = -1;
    mb_text_copy(sink->name, sizeof sink->name, mb_path_is_pipe(path) ? "standard output" : path);
    sink->buffer = mb_allocate(BUFFER_BYTES, 1);
    mb_status status = sink->buffer != NULL ? open_target(sink, path) : mb_fail_memory("an output");
    if (status != MB_OK) {
        mb_sink_destroy(sink);
        return status;
    }
    *out = sink;
    return MB_OK;
}

const char *mb_sink_name(const mb_sink *sink)
{
    return sink->name;
}

bool mb_sink_is_direct(const mb_sink *sink)
{
    return sink->direct;
}

mb_status mb_sink_status(const mb_sink *sink)
{
    return sink->failure.status;
}

uint64_t mb_sink_size(const mb_sink *sink)
{
    return sink->size;
}

uint64_t mb_sink_position(const mb_sink *sink)
{
    return sink->offset + sink->fill;
}

static mb_status note_failure(mb_sink *sink, mb_status status)
{
    sink->failure = *mb_last_fault();
    return status;
}

static mb_status write_through(mb_sink *sink, const unsigned char *from, size_t bytes)
{
    while (bytes > 0) {
        ssize_t made =
            sink->direct ? write(sink->fd, from, bytes) : pwrite(sink->fd, from, bytes, (off_t)sink->offset);
        if (made < 0 && errno == EINTR) {
            continue;
        }
        if (made < 0) {
            return note_failure(sink, mb_fail_writing(sink->name, errno, sink->offset));
        }
        from += made;
        bytes -= (size_t)made;
        sink->offset += (uint64_t)made;
    }
    return MB_OK;
}

static mb_status failed_before(const mb_sink *sink)
{
    return mb_fail(sink->failure.status, sink->failure.field, "%s", sink->failure.text);
}

mb_status mb_sink_flush(mb_sink *sink)
{
    size_t fill = sink->fill;

    if (sink->failure.status != MB_OK) {
        return failed_before(sink);
    }
    sink->fill = 0;
    return write_through(sink, sink->buffer, fill);
}

mb_status mb_sink_write(mb_sink *sink, const void *from, size_t bytes)
{
    mb_status status = MB_OK;

    if (sink->failure.status != MB_OK) {
        return failed_before(sink);
    }
    if (sink->fill + bytes > BUFFER_BYTES) {
        status = mb_sink_flush(sink);
    }
    if (status == MB_OK && bytes > BUFFER_BYTES) {
        status = write_through(sink, from, bytes);
    } else if (status == MB_OK && bytes > 0) {
        memcpy(sink->buffer + sink->fill, from, bytes);
        sink->fill += bytes;
    }
    if (mb_sink_position(sink) > sink->size) {
        sink->size = mb_sink_position(sink);
    }
    return status;
}

mb_status mb_sink_print(mb_sink *sink, const char *format, ...)
{
    char line[2048];
    va_list arguments;

    va_start(arguments, format);
    int length = vsnprintf(line, sizeof line, format, arguments);
    va_end(arguments);
    if (length < 0 || (size_t)length >= sizeof line) {
        return mb_fail(MB_ERROR_ARGUMENT, sink->name, "a text for %s is longer than %zu bytes", sink->name,
                       sizeof line - 1);
    }
    return mb_sink_write(sink, line, (size_t)length);
}

mb_status mb_sink_seek(mb_sink *sink, uint64_t offset)
{
    mb_status status = mb_sink_flush(sink);

    sink->offset = offset;
    return status;
}

mb_status mb_sink_truncate(mb_sink *sink)
{
    if (sink->failure.status != MB_OK) {
        return failed_before(sink);
    }
    sink->fill = 0;
    sink->offset = sink->size = 0;
    if (ftruncate(sink->fd, 0) != 0) {
        return note_failure(sink, mb_fail_writing(sink->name, errno, 0));
    }
    return MB_OK;
}

static int close_descriptor(mb_sink *sink)
{
    int result = sink->fd >= 0 && sink->fd != STDOUT_FILENO ? close(sink->fd) : 0;

    sink->fd = -1;
    sink->closed = true;
    return result;
}

mb_status mb_sink_commit(mb_sink *sink)
{
    mb_status status = mb_sink_flush(sink);

    if (status != MB_OK) {
        mb_sink_abandon(sink);
        return status;
    }
    if (close_descriptor(sink) != 0) {
        status = mb_fail_writing(sink->name, errno, sink->size);
    } else if (!sink->direct && rename(sink->partial, sink->path) != 0) {
        status = mb_fail_creating(sink->name, errno);
    }
    if (status != MB_OK && sink->partial != NULL) {
        (void)unlink(sink->partial);
    }
    return status;
}

void mb_sink_abandon(mb_sink *sink)
{
    if (sink == NULL || sink->closed) {
        return;
    }
    bool made = sink->fd >= 0 && sink->partial != NULL;
    (void)close_descriptor(sink);
    if (made) {
        (void)unlink(sink->partial);
    }
}

void mb_sink_retract(mb_sink *sink)
{
    if (sink->path != NULL) {
        (void)unlink(sink->path);
    }
}

void mb_sink_destroy(mb_sink *sink)
{
    if (sink == NULL) {
        return;
    }
    mb_sink_abandon(sink);
    mb_release(sink->path);
    mb_release(sink->partial);
    mb_release(sink->buffer);
    mb_release(sink);
}
