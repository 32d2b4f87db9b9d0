/* The line at the missing carrier, told apart from noise; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_CARRIER_LINE_H
#define MIRRORBAND_MEASURE_CARRIER_LINE_H

#include "mirrorband/measure.h"

typedef struct mb_carrier_line {
    bool found;
    double power;     /* of the line; an upper bound when it was not found */
    double offset_hz; /* from 0 Hz of the spectrum */
} mb_carrier_line;

/* spectrum: the neighbourhood of the carrier, flat to +-flat_hz. */
mb_status mb_carrier_line_find(const mb_spectrum *spectrum, double flat_hz, mb_carrier_line *line);

#endif
