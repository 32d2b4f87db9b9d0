#include "kernels/kernels.h"

#if defined(__x86_64__) || defined(__i386__)
static bool has_avx2(void)
{
    return __builtin_cpu_supports("avx2") != 0;
}
#endif

const mb_kernels *mb_kernels_at(size_t index)
{
    const mb_kernels *sets[2] = {&mb_kernels_plain, NULL};

#if defined(__x86_64__) || defined(__i386__)
    sets[1] = has_avx2() ? &mb_kernels_avx2 : NULL;
#endif
    return index < 2 ? sets[index] : NULL;
}

const mb_kernels *mb_kernels_best(void)
{
    const mb_kernels *best = mb_kernels_at(1);

    return best != NULL ? best : mb_kernels_at(0);
}
