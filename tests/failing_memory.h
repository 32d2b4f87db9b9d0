/** failing_memory.h - lets the k-th allocation fail, for every k, until a creation succeeds. */
#ifndef TESTS_FAILING_MEMORY_H
#define TESTS_FAILING_MEMORY_H

#include "check.h"

static int allocations_left;

static inline bool refuse_when_spent(void *user, size_t bytes)
{
    (void)user;
    (void)bytes;
    return allocations_left-- > 0;
}

/** create: an expression giving mb_status, with no object left when it fails. Leaks show under the sanitizer.
 */
#define assert_survives_lack_of_memory(create)                                                               \
    do {                                                                                                     \
        mb_status memory_status = MB_ERROR_MEMORY;                                                           \
        for (int memory_k = 0; memory_k < 200 && memory_status != MB_OK; memory_k++) {                       \
            allocations_left = memory_k;                                                                     \
            mb_allocation_gate_set(refuse_when_spent, NULL);                                                 \
            memory_status = (create);                                                                        \
            mb_allocation_gate_set(NULL, NULL);                                                              \
            assert_true(memory_status == MB_OK || memory_status == MB_ERROR_MEMORY);                         \
        }                                                                                                    \
        assert_int_equal(memory_status, MB_OK);                                                              \
    } while (0)

#endif
