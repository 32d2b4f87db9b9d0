#include "cells.h"

#include "noise_floor.h"

#include <math.h>

static double middle_of(const mb_cell *cell)
{
    return cell->low_hz + cell->width_hz / 2.0;
}

static double high_of(const mb_cell *cell)
{
    return cell->low_hz + cell->width_hz;
}

/* Appends the bins of a spectrum whose middles satisfy low <= middle < high. */
static mb_status append(mb_cells *cells, const mb_spectrum *spectrum, double centre_hz, double low_hz,
                        double high_hz)
{
    mb_spectrum_info info = mb_spectrum_state(spectrum);
    double *power = mb_allocate(info.length, sizeof *power);

    if (power == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu bins", info.length);
    }
    mb_status status = mb_spectrum_power(spectrum, power);
    for (size_t i = 0; status == MB_OK && i < info.length; i++) {
        double middle = centre_hz + ((double)i - (double)info.length / 2.0) * info.step_hz;
        if (middle >= low_hz && middle < high_hz) {
            cells->cell[cells->count++] = (mb_cell){middle - info.step_hz / 2.0, info.step_hz, power[i]};
        }
    }
    mb_release(power);
    return status;
}

mb_status mb_cells_join(const mb_spectrum *fine, double fine_edge_hz, const mb_spectrum *wide,
                        double wide_centre_hz, mb_cells *out)
{
    size_t room = mb_spectrum_state(fine).length + (wide != NULL ? mb_spectrum_state(wide).length : 0);
    mb_status status = MB_OK;

    out->count = 0;
    out->cell = mb_allocate(room, sizeof *out->cell);
    if (out->cell == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu cells", room);
    }
    if (wide != NULL) {
        status = append(out, wide, wide_centre_hz, -INFINITY, -fine_edge_hz);
    }
    if (status == MB_OK) {
        status = append(out, fine, 0.0, -fine_edge_hz, fine_edge_hz);
    }
    if (status == MB_OK && wide != NULL) {
        status = append(out, wide, wide_centre_hz, fine_edge_hz, INFINITY);
    }
    if (status != MB_OK) {
        mb_release(out->cell);
        out->cell = NULL;
    }
    return status;
}

mb_status mb_cells_noise(const mb_cells *cells, double inner_hz, double outer_hz, double averages,
                         double *density)
{
    size_t count = 0;
    double *values = mb_allocate(cells->count, sizeof *values);

    if (values == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the noise of %zu cells", cells->count);
    }
    for (size_t i = 0; i < cells->count; i++) {
        double distance = fabs(middle_of(&cells->cell[i]));
        if (distance > inner_hz && distance < outer_hz) {
            values[count++] = cells->cell[i].power / cells->cell[i].width_hz;
        }
    }
    *density = mb_noise_floor(values, count, averages);
    mb_release(values);
    return MB_OK;
}

mb_status mb_cells_above_noise(const mb_cells *cells, double half_hz, double density, mb_cells *out)
{
    out->count = 0;
    out->cell = mb_allocate(cells->count, sizeof *out->cell);
    if (out->cell == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for %zu cells", cells->count);
    }
    for (size_t i = 0; i < cells->count; i++) {
        mb_cell cell = cells->cell[i];
        if (fabs(middle_of(&cell)) <= half_hz) {
            cell.power -= density * cell.width_hz;
            out->cell[out->count++] = cell;
        }
    }
    return MB_OK;
}

/* First cell that ends above a frequency. */
static size_t first_above(const mb_cells *cells, double low_hz)
{
    size_t low = 0, high = cells->count;

    while (low < high) {
        size_t middle = (low + high) / 2;
        if (high_of(&cells->cell[middle]) > low_hz) {
            high = middle;
        } else {
            low = middle + 1;
        }
    }
    return low;
}

double mb_cells_between(const mb_cells *cells, double low_hz, double high_hz)
{
    double sum = 0.0;

    for (size_t i = first_above(cells, low_hz); i < cells->count && cells->cell[i].low_hz < high_hz; i++) {
        const mb_cell *cell = &cells->cell[i];
        double inside = fmin(high_hz, high_of(cell)) - fmax(low_hz, cell->low_hz);
        sum += cell->power * fmin(1.0, inside / cell->width_hz);
    }
    return sum;
}

double mb_cells_quantile(const mb_cells *cells, double share)
{
    double total = mb_cells_between(cells, -INFINITY, INFINITY), below = 0.0;

    for (size_t i = 0; i < cells->count; i++) {
        const mb_cell *cell = &cells->cell[i];
        if (below + cell->power >= share * total && cell->power > 0.0) {
            return cell->low_hz + cell->width_hz * (share * total - below) / cell->power;
        }
        below += cell->power;
    }
    return cells->count > 0 ? high_of(&cells->cell[cells->count - 1]) : 0.0;
}

double mb_cells_highest(const mb_cells *cells, double low_hz, double high_hz, double width_hz,
                        double *middle_hz)
{
    double sum = 0.0, highest = 0.0;
    size_t first = 0;

    while (first < cells->count && middle_of(&cells->cell[first]) < low_hz) {
        first++;
    }
    for (size_t i = first; i < cells->count && middle_of(&cells->cell[i]) <= high_hz; i++) {
        sum += cells->cell[i].power;
        while (high_of(&cells->cell[i]) - cells->cell[first].low_hz > width_hz && first < i) {
            sum -= cells->cell[first++].power;
        }
        if (sum > highest) {
            highest = sum;
            *middle_hz = (cells->cell[first].low_hz + high_of(&cells->cell[i])) / 2.0;
        }
    }
    return highest;
}
