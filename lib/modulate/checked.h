/** checked.h - settings checked row by row, and samples made finite (modulate room). */
#ifndef MB_MODULATE_CHECKED_H
#define MB_MODULATE_CHECKED_H

#include "mirrorband/core.h"

/** One field of a settings struct with its range. */
typedef struct mb_checked_field {
    const char *field;
    double value, low, high;
    const char *unit;
} mb_checked_field;

/** MB_OK, or the fault of the first field out of its range. */
mb_status mb_check_fields(const mb_checked_field *fields, size_t count);

/** Memory for a stage of size bytes, or the fault MEMORY with *out = NULL. */
mb_status mb_stage_allocate(size_t size, const char *what, void **out);

/** The value, or 0 when it is not finite. */
double mb_finite(double value);

#endif
