/**
 * stage_cuts.h - every stage gives the same samples however its input is cut into blocks: runs one with
 * blocks of 1, 7, 64, 1000 and of random lengths and compares bit for bit with one block.
 */
#ifndef TESTS_STAGE_CUTS_H
#define TESTS_STAGE_CUTS_H

#include "check.h"

enum { STAGE_CUTS_SEED = 5 };

/** A stage and what it is fed. */
typedef struct stage_cuts {
    void *stage;
    /* takes n inputs and returns how many outputs it made; wraps the stage's own function */
    size_t (*process)(void *stage, const void *in, size_t n, void *out);
    void (*reset)(void *stage);
    const void *in;
    size_t count;     /* of inputs */
    size_t in_size;   /* bytes of one */
    size_t out_size;  /* bytes of an output */
    size_t out_bound; /* most outputs of all inputs */
} stage_cuts;

/* Feeds all inputs in blocks of `block`, or of random lengths when it is 0. */
static inline size_t stage_cuts_run(const stage_cuts *c, size_t block, char *out)
{
    size_t done = 0, made = 0;
    mb_random random;

    mb_random_seed(&random, STAGE_CUTS_SEED, 0);
    c->reset(c->stage);
    while (done < c->count) {
        size_t run = block > 0 ? block : (size_t)(mb_random_bits(&random) % 1500);
        run = run < c->count - done ? run : c->count - done;
        made += c->process(c->stage, (const char *)c->in + done * c->in_size, run, out + made * c->out_size);
        done += run;
    }
    return made;
}

/** Fails unless all ways to cut the input give the same outputs. */
static inline void assert_cuts_do_not_matter(const stage_cuts *c)
{
    static const size_t blocks[] = {1, 7, 64, 1000, 0};
    char *whole = calloc(c->out_bound + 1, c->out_size), *cut = calloc(c->out_bound + 1, c->out_size);

    assert_non_null(whole);
    assert_non_null(cut);
    size_t made = stage_cuts_run(c, c->count, whole);
    assert_true(made > 0 && made <= c->out_bound);
    for (size_t i = 0; i < sizeof blocks / sizeof blocks[0]; i++) {
        memset(cut, 0, c->out_bound * c->out_size);
        size_t cut_made = stage_cuts_run(c, blocks[i], cut);
        if (cut_made != made || memcmp(whole, cut, made * c->out_size) != 0) {
            fail_msg("blocks of %zu (0: random, seed %d) give other samples than one block", blocks[i],
                     STAGE_CUTS_SEED);
        }
    }
    free(whole);
    free(cut);
}

#endif
