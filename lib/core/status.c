#include "mirrorband/core.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static _Thread_local mb_fault last_fault;

const char *mb_status_text(mb_status status)
{
    switch (status) {
    case MB_OK:
        return "ok";
    case MB_ERROR_ARGUMENT:
        return "argument out of range";
    case MB_ERROR_MEMORY:
        return "out of memory";
    case MB_ERROR_FILE:
        return "file error";
    case MB_ERROR_FORMAT:
        return "wrong or damaged content";
    case MB_ERROR_CONFIG:
        return "wrong configuration";
    case MB_ERROR_UNSUPPORTED:
        return "not supported";
    case MB_ERROR_NO_SIGNAL:
        return "no suppressed-carrier signal";
    case MB_ERROR_INTERRUPTED:
        return "interrupted";
    }
    return "unknown status";
}

const mb_fault *mb_last_fault(void)
{
    return &last_fault;
}

mb_status mb_fail(mb_status status, const char *field, const char *format, ...)
{
    mb_fault fault = {.status = status};
    va_list arguments;

    (void)snprintf(fault.field, sizeof fault.field, "%s", field);
    va_start(arguments, format);
    (void)vsnprintf(fault.text, sizeof fault.text, format, arguments);
    va_end(arguments);
    last_fault = fault; /* last, so that the arguments may quote the fault before */
    return status;
}

mb_status mb_check_range(const char *field, double value, double low, double high, const char *unit)
{
    if (isfinite(value) && value >= low && value <= high) {
        return MB_OK;
    }
    const char *space = unit[0] != '\0' ? " " : "";
    return mb_fail(MB_ERROR_ARGUMENT, field, "%s must be between %g and %g%s%s; it is %g", field, low, high,
                   space, unit, value);
}
