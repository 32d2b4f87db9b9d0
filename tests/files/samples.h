/** samples.h - what the tests of this room share: a folder of their own, test samples, files as bytes. */
#ifndef TESTS_FILES_SAMPLES_H
#define TESTS_FILES_SAMPLES_H

#include <errno.h>
#include <sys/stat.h>
#include <unistd.h>

#include "check.h"
#include "mirrorband/files.h"

/** Makes the folder of a test program below the build folder and returns the path of a file in it. */
static inline const char *path_of(const char *program, const char *name)
{
    static char paths[8][512];
    static int next;
    char *path = paths[next++ % 8];

    (void)snprintf(path, 512, "%s/files_%s", MB_TEST_BINARY_DIR, program);
    if (mkdir(path, 0777) != 0) {
        assert_int_equal(errno, EEXIST);
    }
    (void)snprintf(path, 512, "%s/files_%s/%s", MB_TEST_BINARY_DIR, program, name);
    return path;
}

/** n samples within +-0.9, different in each part, the same for the same seed. */
static inline mb_cf32 *make_samples(size_t n, uint64_t seed)
{
    mb_cf32 *samples = mb_allocate(n, sizeof *samples);
    mb_random random;

    assert_non_null(samples);
    mb_random_seed(&random, seed, 0);
    for (size_t i = 0; i < n; i++) {
        samples[i].re = (float)(1.8 * mb_random_uniform(&random) - 0.9);
        samples[i].im = (float)(1.8 * mb_random_uniform(&random) - 0.9);
    }
    return samples;
}

/** Writes bytes to a new file (writing over an old one makes some file systems wait for the disk). */
static inline void put_file(const char *path, const void *bytes, size_t count)
{
    (void)remove(path);
    FILE *file = fopen(path, "wb");

    assert_non_null(file);
    assert_int_equal(fwrite(bytes, 1, count, file), count);
    assert_int_equal(fclose(file), 0);
}

/** Reads up to size bytes of a file; returns how many. */
static inline size_t get_file(const char *path, void *bytes, size_t size)
{
    FILE *file = fopen(path, "rb");

    assert_non_null(file);
    size_t count = fread(bytes, 1, size, file);
    (void)fclose(file);
    return count;
}

static inline bool is_there(const char *path)
{
    return access(path, F_OK) == 0;
}

#endif
