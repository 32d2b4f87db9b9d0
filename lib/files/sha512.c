#include "sha512.h"

#include <stdio.h>
#include <string.h>

/* Fractional parts of the square roots of the first 8 primes and of the cube roots of the first 80. */
static const uint64_t START[8] = {
    0x6a09e667f3bcc908, 0xbb67ae8584caa73b, 0x3c6ef372fe94f82b, 0xa54ff53a5f1d36f1,
    0x510e527fade682d1, 0x9b05688c2b3e6c1f, 0x1f83d9abfb41bd6b, 0x5be0cd19137e2179,
};

static const uint64_t ROUND_KEYS[80] = {
    0x428a2f98d728ae22, 0x7137449123ef65cd, 0xb5c0fbcfec4d3b2f, 0xe9b5dba58189dbbc, 0x3956c25bf348b538,
    0x59f111f1b605d019, 0x923f82a4af194f9b, 0xab1c5ed5da6d8118, 0xd807aa98a3030242, 0x12835b0145706fbe,
    0x243185be4ee4b28c, 0x550c7dc3d5ffb4e2, 0x72be5d74f27b896f, 0x80deb1fe3b1696b1, 0x9bdc06a725c71235,
    0xc19bf174cf692694, 0xe49b69c19ef14ad2, 0xefbe4786384f25e3, 0x0fc19dc68b8cd5b5, 0x240ca1cc77ac9c65,
    0x2de92c6f592b0275, 0x4a7484aa6ea6e483, 0x5cb0a9dcbd41fbd4, 0x76f988da831153b5, 0x983e5152ee66dfab,
    0xa831c66d2db43210, 0xb00327c898fb213f, 0xbf597fc7beef0ee4, 0xc6e00bf33da88fc2, 0xd5a79147930aa725,
    0x06ca6351e003826f, 0x142929670a0e6e70, 0x27b70a8546d22ffc, 0x2e1b21385c26c926, 0x4d2c6dfc5ac42aed,
    0x53380d139d95b3df, 0x650a73548baf63de, 0x766a0abb3c77b2a8, 0x81c2c92e47edaee6, 0x92722c851482353b,
    0xa2bfe8a14cf10364, 0xa81a664bbc423001, 0xc24b8b70d0f89791, 0xc76c51a30654be30, 0xd192e819d6ef5218,
    0xd69906245565a910, 0xf40e35855771202a, 0x106aa07032bbd1b8, 0x19a4c116b8d2d0c8, 0x1e376c085141ab53,
    0x2748774cdf8eeb99, 0x34b0bcb5e19b48a8, 0x391c0cb3c5c95a63, 0x4ed8aa4ae3418acb, 0x5b9cca4f7763e373,
    0x682e6ff3d6b2b8a3, 0x748f82ee5defb2fc, 0x78a5636f43172f60, 0x84c87814a1f0ab72, 0x8cc702081a6439ec,
    0x90befffa23631e28, 0xa4506cebde82bde9, 0xbef9a3f7b2c67915, 0xc67178f2e372532b, 0xca273eceea26619c,
    0xd186b8c721c0c207, 0xeada7dd6cde0eb1e, 0xf57d4f7fee6ed178, 0x06f067aa72176fba, 0x0a637dc5a2c898a6,
    0x113f9804bef90dae, 0x1b710b35131c471b, 0x28db77f523047d84, 0x32caab7b40c72493, 0x3c9ebe0a15c9bebc,
    0x431d67c49c100d4c, 0x4cc5d4becb3e42b6, 0x597f299cfc657e2a, 0x5fcb6fab3ad6faec, 0x6c44198c4a475817,
};

static uint64_t turn_right(uint64_t word, int count)
{
    return (word >> count) | (word << (64 - count));
}

static uint64_t big_endian(const unsigned char *from)
{
    uint64_t word = 0;

    for (int i = 0; i < 8; i++) {
        word = (word << 8) | from[i];
    }
    return word;
}

static void expand(const unsigned char *block, uint64_t *schedule)
{
    for (int i = 0; i < 16; i++) {
        schedule[i] = big_endian(block + 8 * (size_t)i);
    }
    for (int i = 16; i < 80; i++) {
        uint64_t early = schedule[i - 15], late = schedule[i - 2];
        uint64_t sigma0 = turn_right(early, 1) ^ turn_right(early, 8) ^ (early >> 7);
        uint64_t sigma1 = turn_right(late, 19) ^ turn_right(late, 61) ^ (late >> 6);
        schedule[i] = schedule[i - 16] + sigma0 + schedule[i - 7] + sigma1;
    }
}

/* One round; the words move on by one place by renaming them in the call. */
static inline void turn(uint64_t a, uint64_t b, uint64_t c, uint64_t *d, uint64_t e, uint64_t f, uint64_t g,
                        uint64_t *h, uint64_t mixed)
{
    uint64_t sum1 = turn_right(e, 14) ^ turn_right(e, 18) ^ turn_right(e, 41);
    uint64_t sum0 = turn_right(a, 28) ^ turn_right(a, 34) ^ turn_right(a, 39);
    uint64_t first = *h + sum1 + ((e & f) ^ (~e & g)) + mixed;

    *d += first;
    *h = first + sum0 + ((a & b) ^ (a & c) ^ (b & c));
}

static void take_block(mb_sha512 *hash, const unsigned char *block)
{
    uint64_t schedule[80], s[8];

    expand(block, schedule);
    memcpy(s, hash->word, sizeof s);
    for (int i = 0; i < 80; i += 8) {
        const uint64_t *key = ROUND_KEYS + i, *word = schedule + i;
        turn(s[0], s[1], s[2], &s[3], s[4], s[5], s[6], &s[7], key[0] + word[0]);
        turn(s[7], s[0], s[1], &s[2], s[3], s[4], s[5], &s[6], key[1] + word[1]);
        turn(s[6], s[7], s[0], &s[1], s[2], s[3], s[4], &s[5], key[2] + word[2]);
        turn(s[5], s[6], s[7], &s[0], s[1], s[2], s[3], &s[4], key[3] + word[3]);
        turn(s[4], s[5], s[6], &s[7], s[0], s[1], s[2], &s[3], key[4] + word[4]);
        turn(s[3], s[4], s[5], &s[6], s[7], s[0], s[1], &s[2], key[5] + word[5]);
        turn(s[2], s[3], s[4], &s[5], s[6], s[7], s[0], &s[1], key[6] + word[6]);
        turn(s[1], s[2], s[3], &s[4], s[5], s[6], s[7], &s[0], key[7] + word[7]);
    }
    for (int i = 0; i < 8; i++) {
        hash->word[i] += s[i];
    }
}

void mb_sha512_start(mb_sha512 *hash)
{
    memset(hash, 0, sizeof *hash);
    memcpy(hash->word, START, sizeof START);
}

void mb_sha512_add(mb_sha512 *hash, const void *from, size_t bytes)
{
    const unsigned char *at = from;
    size_t fill = (size_t)(hash->bytes % sizeof hash->block);

    hash->bytes += bytes;
    while (bytes > 0) {
        size_t room = sizeof hash->block - fill;
        size_t taken = bytes < room ? bytes : room;
        memcpy(hash->block + fill, at, taken);
        fill += taken;
        at += taken;
        bytes -= taken;
        if (fill == sizeof hash->block) {
            take_block(hash, hash->block);
            fill = 0;
        }
    }
}

void mb_sha512_end(mb_sha512 *hash, char *text)
{
    static const unsigned char padding[128] = {0x80};
    uint64_t bits = hash->bytes * 8;
    size_t fill = (size_t)(hash->bytes % sizeof hash->block);
    unsigned char length[16] = {0};

    for (int i = 0; i < 8; i++) {
        length[15 - i] = (unsigned char)(bits >> (8 * i));
    }
    mb_sha512_add(hash, padding, fill < 112 ? 112 - fill : 240 - fill);
    mb_sha512_add(hash, length, sizeof length);
    for (int i = 0; i < 8; i++) {
        (void)snprintf(text + 16 * (size_t)i, 17, "%016llx", (unsigned long long)hash->word[i]);
    }
}
