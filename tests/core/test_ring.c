/* The ring hands every item over once and in order, also between two threads. */
#include <pthread.h>

#include "check.h"

enum { ITEMS = 200000 };

static void a_full_ring_takes_no_more_and_an_empty_one_gives_nothing(void **state)
{
    mb_ring *ring = NULL;
    int items[6] = {1, 2, 3, 4, 5, 6}, got[6] = {0};

    (void)state;
    assert_ok(mb_ring_create(4, sizeof(int), &ring));
    assert_int_equal(mb_ring_read(ring, got, 1), 0);
    assert_int_equal(mb_ring_write(ring, items, 6), 4);
    assert_int_equal(mb_ring_read(ring, got, 3), 3);
    assert_int_equal(mb_ring_write(ring, items + 4, 2), 2);
    assert_int_equal(mb_ring_read(ring, got + 3, 6), 3);
    assert_memory_equal(got, items, sizeof items);
    mb_ring_destroy(ring);
    mb_ring_destroy(NULL);
}

static void *produce(void *user)
{
    for (int i = 0; i < ITEMS;) {
        i += (int)mb_ring_write(user, &i, 1);
    }
    return NULL;
}

static void two_threads_lose_and_double_nothing(void **state)
{
    mb_ring *ring = NULL;
    pthread_t producer;
    int expected = 0, got[7];

    (void)state;
    assert_ok(mb_ring_create(64, sizeof(int), &ring));
    assert_int_equal(pthread_create(&producer, NULL, produce, ring), 0);
    while (expected < ITEMS) {
        size_t count = mb_ring_read(ring, got, 7);
        for (size_t i = 0; i < count; i++) {
            assert_int_equal(got[i], expected++);
        }
    }
    assert_int_equal(pthread_join(producer, NULL), 0);
    mb_ring_destroy(ring);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_full_ring_takes_no_more_and_an_empty_one_gives_nothing),
        cmocka_unit_test(two_threads_lose_and_double_nothing),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
