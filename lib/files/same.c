#define _XOPEN_SOURCE 700 /* realpath */
#include "path.h"

#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

static bool same_file(const char *path_a, const char *path_b)
{
    struct stat a, b;

    if (strcmp(path_a, path_b) == 0) {
        return true;
    }
    if (stat(path_a, &a) != 0 || stat(path_b, &b) != 0) {
        return false;
    }
    return a.st_dev == b.st_dev && a.st_ino == b.st_ino;
}

/* Folder of a path as the system sees it, without links; to be freed; NULL if there is none. */
static char *real_folder(const char *path)
{
    const char *slash = strrchr(path, '/');

    if (slash == NULL) {
        return realpath(".", NULL);
    }
    if (slash == path) {
        return realpath("/", NULL);
    }
    char *folder = strndup(path, (size_t)(slash - path));
    char *real = folder != NULL ? realpath(folder, NULL) : NULL;
    free(folder);
    return real;
}

static const char *file_name(const char *path)
{
    const char *slash = strrchr(path, '/');

    return slash != NULL ? slash + 1 : path;
}

/* For files that may not exist yet: the same name in the same folder. */
static bool same_place(const char *path_a, const char *path_b)
{
    if (strcmp(file_name(path_a), file_name(path_b)) != 0) {
        return false;
    }
    char *folder_a = real_folder(path_a), *folder_b = real_folder(path_b);
    bool same = folder_a != NULL && folder_b != NULL && strcmp(folder_a, folder_b) == 0;
    free(folder_a);
    free(folder_b);
    return same;
}

/* Other part of a SigMF pair, or NULL. */
static char *other_part(const char *path)
{
    if (mb_path_has_ending(path, ".sigmf-meta")) {
        return mb_path_replace_ending(path, ".sigmf-meta", ".sigmf-data");
    }
    if (mb_path_has_ending(path, ".sigmf-data")) {
        return mb_path_replace_ending(path, ".sigmf-data", ".sigmf-meta");
    }
    return NULL;
}

bool mb_files_same(const char *path_a, const char *path_b)
{
    bool same = false;

    if (mb_path_is_pipe(path_a) || mb_path_is_pipe(path_b)) {
        return false;
    }
    const char *parts_a[2] = {path_a, NULL}, *parts_b[2] = {path_b, NULL};
    char *other_a = other_part(path_a), *other_b = other_part(path_b);
    parts_a[1] = other_a;
    parts_b[1] = other_b;
    for (int i = 0; i < 4 && !same; i++) {
        const char *a = parts_a[i / 2], *b = parts_b[i % 2];
        same = a != NULL && b != NULL && (same_file(a, b) || same_place(a, b));
    }
    mb_release(other_a);
    mb_release(other_b);
    return same;
}
