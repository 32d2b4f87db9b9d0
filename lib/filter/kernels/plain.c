/* Kernels for any machine: registers of four floats, which every 64-bit processor has. */
#define KERNEL_WIDTH 4
#define KERNEL_SET   mb_kernels_plain
#define KERNEL_NAME  "plain"
#include "kernels/body.h"
