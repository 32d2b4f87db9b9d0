/* Kernels for processors with AVX2, compiled with its flag by lib/kernels.cmake; empty elsewhere. */
#ifdef __AVX2__
#define KERNEL_WIDTH 8
#define KERNEL_SET   mb_kernels_avx2
#define KERNEL_NAME  "avx2"
#include "kernels/body.h"
#else
typedef int mb_kernels_avx2_not_here;
#endif
