#include "mirrorband/core.h"

#include <math.h>

static uint64_t rotate_left(uint64_t word, int count)
{
    return (word << count) | (word >> (64 - count));
}

/* splitmix64 (Steele, Lea and Flood, 2014): spreads a seed over the state of another generator. */
static uint64_t split_mix(uint64_t *state)
{
    uint64_t word = (*state += UINT64_C(0x9e3779b97f4a7c15));

    word = (word ^ (word >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
    word = (word ^ (word >> 27)) * UINT64_C(0x94d049bb133111eb);
    return word ^ (word >> 31);
}

void mb_random_seed(mb_random *random, uint64_t seed, uint64_t stream)
{
    uint64_t state = seed;
    uint64_t mixed = split_mix(&state) ^ rotate_left(stream * UINT64_C(0xd1342543de82ef95), 32);

    for (int i = 0; i < 4; i++) {
        random->word[i] = split_mix(&mixed);
    }
    random->spare = 0.0;
    random->has_spare = false;
}

uint64_t mb_random_bits(mb_random *random)
{
    uint64_t *word = random->word;
    uint64_t result = rotate_left(word[0] + word[3], 23) + word[0];
    uint64_t shifted = word[1] << 17;

    word[2] ^= word[0];
    word[3] ^= word[1];
    word[1] ^= word[2];
    word[0] ^= word[3];
    word[2] ^= shifted;
    word[3] = rotate_left(word[3], 45);
    return result;
}

double mb_random_uniform(mb_random *random)
{
    return (double)(mb_random_bits(random) >> 11) * 0x1.0p-53;
}

double mb_random_normal(mb_random *random)
{
    double u, v, square;

    if (random->has_spare) {
        random->has_spare = false;
        return random->spare;
    }
    do {
        u = 2.0 * mb_random_uniform(random) - 1.0;
        v = 2.0 * mb_random_uniform(random) - 1.0;
        square = u * u + v * v;
    } while (square >= 1.0 || square == 0.0);
    double scale = sqrt(-2.0 * log(square) / square);
    random->spare = v * scale;
    random->has_spare = true;
    return u * scale;
}
