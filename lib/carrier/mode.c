#include "mirrorband/carrier.h"

const char *mb_carrier_mode_text(mb_carrier_mode mode)
{
    switch (mode) {
    case MB_CARRIER_SEARCH:
        return "search";
    case MB_CARRIER_LOCKED:
        return "locked";
    case MB_CARRIER_HOLD:
        return "hold";
    case MB_CARRIER_LOST:
        return "lost";
    }
    return "unknown";
}
