#include "checked.h"

#include <math.h>

mb_status mb_check_fields(const mb_checked_field *fields, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        mb_status status =
            mb_check_range(fields[i].field, fields[i].value, fields[i].low, fields[i].high, fields[i].unit);
        if (status != MB_OK) {
            return status;
        }
    }
    return MB_OK;
}

mb_status mb_stage_allocate(size_t size, const char *what, void **out)
{
    *out = mb_allocate(1, size);
    if (*out == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the %s", what);
    }
    return MB_OK;
}

double mb_finite(double value)
{
    return isfinite(value) ? value : 0.0;
}
