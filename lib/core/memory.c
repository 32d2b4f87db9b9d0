#include "mirrorband/core.h"

#include <stdlib.h>
#include <string.h>

enum { ALIGNMENT_BYTES = 64 };

static bool (*allocation_gate)(void *user, size_t bytes);
static void *allocation_gate_user;

void mb_allocation_gate_set(bool (*gate)(void *user, size_t bytes), void *user)
{
    allocation_gate = gate;
    allocation_gate_user = user;
}

void *mb_allocate(size_t count, size_t size)
{
    if (count == 0 || size == 0) {
        count = size = 1;
    }
    if (count > (SIZE_MAX - ALIGNMENT_BYTES) / size) {
        return NULL;
    }
    size_t bytes = (count * size + ALIGNMENT_BYTES - 1) / ALIGNMENT_BYTES * ALIGNMENT_BYTES;
    if (allocation_gate != NULL && !allocation_gate(allocation_gate_user, bytes)) {
        return NULL;
    }
    void *memory = aligned_alloc(ALIGNMENT_BYTES, bytes);
    if (memory != NULL) {
        memset(memory, 0, bytes);
    }
    return memory;
}

void mb_release(void *memory)
{
    free(memory);
}
