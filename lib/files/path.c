#include "path.h"

#include <errno.h>
#include <stdio.h>
#include <string.h>
#include <strings.h>

mb_endpoint mb_endpoint_kind(const char *text)
{
    if (strcmp(text, "-") == 0) {
        return MB_ENDPOINT_PIPE;
    }
    if (strncmp(text, "audio:", 6) == 0) {
        return MB_ENDPOINT_SOUND_DEVICE;
    }
    return strncmp(text, "radio:", 6) == 0 ? MB_ENDPOINT_RADIO : MB_ENDPOINT_PATH;
}

bool mb_path_is_pipe(const char *path)
{
    return strcmp(path, "-") == 0;
}

bool mb_path_has_ending(const char *path, const char *ending)
{
    size_t length = strlen(path), cut = strlen(ending);

    return length > cut && path[length - cut - 1] != '/' && strcasecmp(path + length - cut, ending) == 0;
}

char *mb_path_replace_ending(const char *path, const char *ending, const char *other)
{
    size_t kept = strlen(path) - strlen(ending);
    size_t size = kept + strlen(other) + 1;
    char *made = mb_allocate(size, 1);

    if (made != NULL) {
        (void)snprintf(made, size, "%.*s%s", (int)kept, path, other);
    }
    return made;
}

char *mb_path_partial(const char *path)
{
    static const char word[] = ".partial";
    const char *slash = strrchr(path, '/');
    const char *name = slash != NULL ? slash + 1 : path;
    const char *dot = strrchr(name, '.');
    size_t before = dot != NULL && dot != name ? (size_t)(dot - path) : strlen(path);
    size_t size = strlen(path) + sizeof word;
    char *made = mb_allocate(size, 1);

    if (made != NULL) {
        (void)snprintf(made, size, "%.*s%s%s", (int)before, path, word, path + before);
    }
    return made;
}

void mb_text_copy(char *out, size_t size, const char *text)
{
    size_t length = strlen(text);

    if (length >= size) {
        length = size - 1;
        while (length > 0 && ((unsigned char)text[length] & 0xC0U) == 0x80U) {
            length--;
        }
    }
    memcpy(out, text, length);
    out[length] = '\0';
}

void mb_system_words(int error, char *out, size_t size)
{
    if (strerror_r(error, out, size) != 0) {
        (void)snprintf(out, size, "error %d", error);
    }
    if (out[0] >= 'A' && out[0] <= 'Z' && out[1] >= 'a' && out[1] <= 'z') {
        out[0] = (char)(out[0] + ('a' - 'A'));
    }
}

mb_status mb_fail_reading(const char *name, int error)
{
    char words[96];

    mb_system_words(error, words, sizeof words);
    if (error == ENOENT || error == ENOTDIR) {
        return mb_fail(MB_ERROR_FILE, name, "%s does not exist; check the path", name);
    }
    if (error == EACCES || error == EPERM) {
        return mb_fail(MB_ERROR_FILE, name, "%s may not be read; change its permissions or copy it", name);
    }
    if (error == EISDIR) {
        return mb_fail(MB_ERROR_FILE, name, "%s is a folder; name a file in it", name);
    }
    return mb_fail(MB_ERROR_FILE, name, "%s cannot be read: %s", name, words);
}

mb_status mb_fail_writing(const char *name, int error, uint64_t bytes)
{
    char words[96];

    mb_system_words(error, words, sizeof words);
    if (error == ENOSPC || error == EDQUOT) {
        return mb_fail(
            MB_ERROR_FILE, name,
            "%s cannot be written: the disk is full after %llu bytes; free some space or write elsewhere",
            name, (unsigned long long)bytes);
    }
    if (error == EFBIG) {
        return mb_fail(
            MB_ERROR_FILE, name,
            "%s cannot be written: the largest file size allowed is reached after %llu bytes; raise the "
            "limit or write elsewhere",
            name, (unsigned long long)bytes);
    }
    if (error == EPIPE) {
        return mb_fail(MB_ERROR_FILE, name, "%s was closed by the program that reads it, after %llu bytes",
                       name, (unsigned long long)bytes);
    }
    return mb_fail(MB_ERROR_FILE, name, "%s cannot be written: %s", name, words);
}

mb_status mb_fail_creating(const char *path, int error)
{
    char words[96];

    mb_system_words(error, words, sizeof words);
    if (error == ENOENT || error == ENOTDIR) {
        return mb_fail(MB_ERROR_FILE, path, "%s cannot be written: its folder does not exist; make it first",
                       path);
    }
    if (error == EACCES || error == EPERM || error == EROFS) {
        return mb_fail(MB_ERROR_FILE, path,
                       "%s cannot be written: %s in its folder; choose a folder that may be written to", path,
                       error == EROFS ? "nothing can be stored" : "no file may be made");
    }
    return mb_fail(MB_ERROR_FILE, path, "%s cannot be written: %s", path, words);
}

mb_status mb_fail_memory(const char *what)
{
    return mb_fail(MB_ERROR_MEMORY, "", "no memory for %s", what);
}

mb_status mb_path_check(const char *path)
{
    if (path == NULL || path[0] == '\0') {
        return mb_fail(MB_ERROR_ARGUMENT, "path", "a path is missing; give a file or - for a pipe");
    }
    mb_endpoint kind = mb_endpoint_kind(path);
    if (kind == MB_ENDPOINT_SOUND_DEVICE || kind == MB_ENDPOINT_RADIO) {
        return mb_fail(MB_ERROR_UNSUPPORTED, path, "%s is a %s; a file or - for a pipe is needed here", path,
                       kind == MB_ENDPOINT_RADIO ? "radio" : "sound device");
    }
    return MB_OK;
}
