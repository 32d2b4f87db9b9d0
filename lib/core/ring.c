#include "mirrorband/core.h"

#include <stdatomic.h>
#include <string.h>

struct mb_ring {
    unsigned char *items;
    size_t item_size;
    size_t mask; /* capacity - 1 */
    /* counters run freely and wrap; each on a cache line of its own */
    _Alignas(64) _Atomic size_t written;
    _Alignas(64) _Atomic size_t taken;
};

mb_status mb_ring_create(size_t capacity, size_t item_size, mb_ring **out)
{
    size_t rounded = 1;

    *out = NULL;
    if (capacity == 0 || capacity > SIZE_MAX / 4 || item_size == 0) {
        return mb_fail(MB_ERROR_ARGUMENT, "capacity", "capacity and item_size must be at least 1");
    }
    while (rounded < capacity) {
        rounded *= 2;
    }
    mb_ring *ring = mb_allocate(1, sizeof *ring);
    if (ring == NULL || (ring->items = mb_allocate(rounded, item_size)) == NULL) {
        mb_release(ring);
        return mb_fail(MB_ERROR_MEMORY, "capacity", "no memory for a ring of %zu items", rounded);
    }
    ring->item_size = item_size;
    ring->mask = rounded - 1;
    *out = ring;
    return MB_OK;
}

/* Length of the run from `counter` to the end of the buffer, at most count. */
static size_t run_length(const mb_ring *ring, size_t counter, size_t count)
{
    size_t to_end = ring->mask + 1 - (counter & ring->mask);

    return count < to_end ? count : to_end;
}

size_t mb_ring_write(mb_ring *ring, const void *items, size_t count)
{
    const unsigned char *from = items;
    size_t written = atomic_load_explicit(&ring->written, memory_order_relaxed);
    size_t room = ring->mask + 1 - (written - atomic_load_explicit(&ring->taken, memory_order_acquire));

    count = count < room ? count : room;
    size_t first = run_length(ring, written, count);
    memcpy(ring->items + (written & ring->mask) * ring->item_size, from, first * ring->item_size);
    memcpy(ring->items, from + first * ring->item_size, (count - first) * ring->item_size);
    atomic_store_explicit(&ring->written, written + count, memory_order_release);
    return count;
}

size_t mb_ring_read(mb_ring *ring, void *items, size_t count)
{
    unsigned char *to = items;
    size_t taken = atomic_load_explicit(&ring->taken, memory_order_relaxed);
    size_t fill = atomic_load_explicit(&ring->written, memory_order_acquire) - taken;

    count = count < fill ? count : fill;
    size_t first = run_length(ring, taken, count);
    memcpy(to, ring->items + (taken & ring->mask) * ring->item_size, first * ring->item_size);
    memcpy(to + first * ring->item_size, ring->items, (count - first) * ring->item_size);
    atomic_store_explicit(&ring->taken, taken + count, memory_order_release);
    return count;
}

size_t mb_ring_fill(const mb_ring *ring)
{
    size_t taken = atomic_load_explicit(&ring->taken, memory_order_acquire);

    return atomic_load_explicit(&ring->written, memory_order_acquire) - taken;
}

void mb_ring_destroy(mb_ring *ring)
{
    if (ring != NULL) {
        mb_release(ring->items);
        mb_release(ring);
    }
}
