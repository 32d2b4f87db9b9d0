/** sha512.h - secure hash of 512 bits (FIPS 180-4), for core:sha512. Room-internal. */
#ifndef MIRRORBAND_FILES_SHA512_H
#define MIRRORBAND_FILES_SHA512_H

#include <stddef.h>
#include <stdint.h>

enum { MB_SHA512_TEXT = 129 };

typedef struct mb_sha512 {
    uint64_t word[8];
    uint64_t bytes;
    unsigned char block[128];
} mb_sha512;

void mb_sha512_start(mb_sha512 *hash);
void mb_sha512_add(mb_sha512 *hash, const void *from, size_t bytes);
/** Finishes and writes 128 lower-case hexadecimal digits and a zero. */
void mb_sha512_end(mb_sha512 *hash, char *text);

#endif
