/* A spectrum put together from a fine and a wide one, as cells of frequency; internal to the measure room. */
#ifndef MIRRORBAND_MEASURE_CELLS_H
#define MIRRORBAND_MEASURE_CELLS_H

#include "mirrorband/measure.h"

typedef struct mb_cell {
    double low_hz, width_hz; /* relative to the missing carrier */
    double power;
} mb_cell;

typedef struct mb_cells {
    mb_cell *cell; /* in rising order of frequency, without overlap; release with mb_release */
    size_t count;
} mb_cells;

/* The fine spectrum within +-fine_edge_hz, beyond it the wide one (NULL: none) whose 0 Hz lies at
 * wide_centre_hz. */
mb_status mb_cells_join(const mb_spectrum *fine, double fine_edge_hz, const mb_spectrum *wide,
                        double wide_centre_hz, mb_cells *out);

/*
 * Mean density, per Hz, of the noise between inner_hz and outer_hz on both sides; averages: independent
 * stretches behind each cell. 0 when there are no cells.
 */
mb_status mb_cells_noise(const mb_cells *cells, double inner_hz, double outer_hz, double averages,
                         double *density);

/* The cells within +-half_hz less the noise; cells may become negative, so that sums stay true. */
mb_status mb_cells_above_noise(const mb_cells *cells, double half_hz, double density, mb_cells *out);

/* Power between two frequencies; cells cut by an end count in proportion. */
double mb_cells_between(const mb_cells *cells, double low_hz, double high_hz);

/* Frequency below which this share of all power lies. */
double mb_cells_quantile(const mb_cells *cells, double share);

/*
 * Highest power within any stretch of width_hz inside low_hz to high_hz, and the frequency of its middle. 0
 * when the range is empty; a range narrower than width_hz counts as a whole.
 */
double mb_cells_highest(const mb_cells *cells, double low_hz, double high_hz, double width_hz,
                        double *middle_hz);

#endif
