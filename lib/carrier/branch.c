#include "branch.h"

#include <math.h>

#include "mirrorband/core.h"

double nearest_branch(double phase_rad, double target_rad)
{
    return phase_rad + MB_PI * nearbyint((target_rad - phase_rad) / MB_PI);
}
