#include "plot_layout.h"

#include "path.h"

#include <math.h>
#include <string.h>

enum { LABEL_PX = 12, TITLE_PX = 14, RIGHT_PX = 18, LEAST_AREA_PX = 130 };

/* ---- cells --------------------------------------------------------------------------------------------- */

/* Row by row; a panel too wide for what is left of a row begins the next. Returns the number of rows. */
static size_t place_cells(const mb_plot *plot, plot_layout *layout)
{
    size_t row = 0, column = 0;

    for (size_t i = 0; i < plot->panel_count; i++) {
        size_t span = plot->panels[i]->column_span;
        plot_box *box = &layout->boxes[i];
        if (column + span > plot->columns) {
            row++;
            column = 0;
        }
        box->row = row;
        box->column = column;
        box->cell_width = (double)span * plot->panel_width_px + (double)(span - 1) * MB_PLOT_GAP_PX;
        box->cell_x = MB_PLOT_MARGIN_PX + (double)column * (plot->panel_width_px + MB_PLOT_GAP_PX);
        column += span;
    }
    return row + 1;
}

/* ---- legend -------------------------------------------------------------------------------------------- */

static void add_entry(plot_box *box, const plot_series *series, const char *label)
{
    if (label[0] == '\0') {
        return;
    }
    plot_entry *entry = &box->entries[box->entry_count++];
    entry->series = series;
    mb_plot_text_fit(label, LABEL_PX, box->cell_width - 3 * MB_PLOT_SWATCH_PX, entry->text);
    entry->width = MB_PLOT_SWATCH_PX + 6.0 + mb_plot_text_width(entry->text, LABEL_PX);
}

static void collect_entries(const plot_panel *panel, plot_box *box)
{
    for (size_t i = 0; i < panel->series_count; i++) {
        add_entry(box, &panel->series[i], panel->series[i].label);
    }
    for (size_t i = 0; i < panel->mark_count; i++) {
        add_entry(box, NULL, panel->marks[i].label);
    }
}

/* Lines of the legend from left at the given top; returns their number. */
static size_t flow_entries(plot_box *box, double left, double top)
{
    double x = left;
    size_t rows = box->entry_count > 0 ? 1 : 0;

    for (size_t i = 0; i < box->entry_count; i++) {
        plot_entry *entry = &box->entries[i];
        if (x > left && x + entry->width > box->cell_x + box->cell_width - RIGHT_PX + 0.5) {
            x = left;
            rows++;
        }
        entry->x = x;
        entry->y = top + ((double)rows - 0.5) * MB_PLOT_LEGEND_ROW_PX;
        x += entry->width + 16.0;
    }
    return rows;
}

/* Title, note and legend from top to bottom; the legend beside the title if there is room for it. */
static void place_header(const plot_panel *panel, plot_box *box)
{
    box->entry_count = 0;
    double title_width = mb_plot_text_width(panel->title, TITLE_PX * MB_PLOT_BOLD), legend_width = 0.0;

    collect_entries(panel, box);
    for (size_t i = 0; i < box->entry_count; i++) {
        legend_width += box->entries[i].width + (i > 0 ? 16.0 : 0.0);
    }
    box->legend_beside = title_width + 24.0 + legend_width <= box->cell_width - RIGHT_PX;
    double top = box->cell_y;
    bool title_line = panel->title[0] != '\0' || (box->legend_beside && box->entry_count > 0);
    if (box->legend_beside) {
        (void)flow_entries(box, box->cell_x + box->cell_width - RIGHT_PX - legend_width, top + 1.0);
    }
    top += title_line ? 20.0 : 0.0;
    top += panel->note[0] != '\0' ? 17.0 : 0.0;
    if (!box->legend_beside) {
        top += (double)flow_entries(box, box->cell_x, top) * MB_PLOT_LEGEND_ROW_PX;
    }
    box->header = top - box->cell_y + 8.0;
}

/* ---- scales -------------------------------------------------------------------------------------------- */

static void take_in(double value, double *low, double *high)
{
    if (isfinite(value)) {
        *low = value < *low ? value : *low;
        *high = value > *high ? value : *high;
    }
}

static void data_ranges(const plot_panel *panel, double *x, double *y)
{
    x[0] = y[0] = INFINITY;
    x[1] = y[1] = -INFINITY;
    for (size_t i = 0; i < panel->series_count; i++) {
        for (size_t k = 0; k < panel->series[i].count; k++) {
            if (isfinite(panel->series[i].x[k]) && isfinite(panel->series[i].y[k])) {
                take_in(panel->series[i].x[k], &x[0], &x[1]);
                take_in(panel->series[i].y[k], &y[0], &y[1]);
            }
        }
    }
    for (size_t i = 0; i < panel->mark_count; i++) {
        double *range = panel->marks[i].vertical ? x : y;
        take_in(panel->marks[i].value, &range[0], &range[1]);
    }
}

static void stretch(plot_scale *scale, double wanted)
{
    double more = 0.5 * (wanted - (scale->high - scale->low));

    scale->low -= more;
    scale->high += more;
}

/* Dots at the edge are to be seen whole. */
static bool has_points(const plot_panel *panel)
{
    bool points = false;

    for (size_t i = 0; i < panel->series_count; i++) {
        points = points || panel->series[i].style == MB_PLOT_POINTS;
    }
    return points;
}

static double tick_width(const plot_scale *scale)
{
    double values[MB_PLOT_TICKS_MAX], widest = 0.0;
    size_t count = mb_plot_scale_values(scale, values);

    for (size_t i = 0; i < count; i++) {
        char label[48];
        mb_plot_scale_label(scale, values[i], label);
        widest = fmax(widest, mb_plot_text_width(label, LABEL_PX));
    }
    return widest;
}

/* Left margin: labels of the ticks, and the caption that stands on end. */
static double left_margin(const plot_scale *scale)
{
    return ceil(tick_width(scale)) + 10.0 + (scale->caption[0] != '\0' ? 20.0 : 0.0);
}

/* Widens the axis that shows too little, so that one unit is equally long on both. */
static void equalise(const plot_panel *panel, plot_box *box)
{
    plot_axis_texts x = panel->x, y = panel->y;
    double range_x = box->x_scale.high - box->x_scale.low, range_y = box->y_scale.high - box->y_scale.low;
    double per_px = fmax(range_x / box->width, range_y / box->height);

    stretch(&box->x_scale, per_px * box->width);
    stretch(&box->y_scale, per_px * box->height);
    x.low = box->x_scale.low;
    x.high = box->x_scale.high;
    y.low = box->y_scale.low;
    y.high = box->y_scale.high;
    mb_plot_scale_ticks(&x, box->width, false, &box->x_scale);
    mb_plot_scale_ticks(&y, box->height, true, &box->y_scale);
}

static void scale_y(const plot_panel *panel, plot_box *box, double header)
{
    double x[2], y[2];
    bool caption = panel->x.label[0] != '\0' || panel->x.unit[0] != '\0';

    data_ranges(panel, x, y);
    mb_plot_scale_range(&panel->x, x[0], x[1], &box->x_scale);
    mb_plot_scale_range(&panel->y, y[0], y[1], &box->y_scale);
    if (has_points(panel) && !(isfinite(panel->x.low) && isfinite(panel->x.high))) {
        stretch(&box->x_scale, 1.05 * (box->x_scale.high - box->x_scale.low));
    }
    box->y = box->cell_y + header;
    box->height = box->cell_height - header - (caption ? 42.0 : 24.0);
    mb_plot_scale_ticks(&panel->y, box->height, true, &box->y_scale);
}

static void scale_x(const plot_panel *panel, plot_box *box, double left)
{
    box->x = box->cell_x + left;
    box->width = box->cell_width - left - RIGHT_PX;
    mb_plot_scale_ticks(&panel->x, box->width, false, &box->x_scale);
    if (panel->equal_scale) {
        equalise(panel, box);
    }
}

/* Headers of a row are made equally high; a row is higher than asked for if a long legend needs it. */
static double stack_rows(const mb_plot *plot, plot_layout *layout, size_t rows)
{
    double top = MB_PLOT_MARGIN_PX + layout->heading;

    for (size_t row = 0; row < rows; row++) {
        double header = 0.0;
        for (size_t i = 0; i < plot->panel_count; i++) {
            if (layout->boxes[i].row == row) {
                layout->boxes[i].cell_y = top;
                place_header(plot->panels[i], &layout->boxes[i]);
                header = fmax(header, layout->boxes[i].header);
            }
        }
        double height = fmax(plot->panel_height_px, header + LEAST_AREA_PX);
        for (size_t i = 0; i < plot->panel_count; i++) {
            if (layout->boxes[i].row == row) {
                layout->boxes[i].cell_height = height;
                scale_y(plot->panels[i], &layout->boxes[i], header);
            }
        }
        top += height + (row + 1 < rows ? MB_PLOT_GAP_PX : 0.0);
    }
    return top;
}

/* Margins of a column are made equally wide, so that plot areas line up. */
static void line_up_columns(const mb_plot *plot, plot_layout *layout)
{
    for (size_t i = 0; i < plot->panel_count; i++) {
        double left = 0.0;
        for (size_t k = 0; k < plot->panel_count; k++) {
            bool same = layout->boxes[k].column == layout->boxes[i].column;
            left = same ? fmax(left, left_margin(&layout->boxes[k].y_scale)) : left;
        }
        scale_x(plot->panels[i], &layout->boxes[i], left);
    }
}

mb_status mb_plot_arrange(const mb_plot *plot, plot_layout *layout)
{
    memset(layout, 0, sizeof *layout);
    layout->boxes = mb_allocate(plot->panel_count, sizeof *layout->boxes);
    if (layout->boxes == NULL) {
        return mb_fail_memory("a picture");
    }
    layout->heading = (plot->title[0] != '\0' ? 28.0 : 0.0) + (plot->subtitle[0] != '\0' ? 20.0 : 0.0);
    layout->heading += layout->heading > 0.0 ? 10.0 : 0.0;
    double columns = (double)plot->columns;
    layout->width =
        2.0 * MB_PLOT_MARGIN_PX + columns * plot->panel_width_px + (columns - 1.0) * MB_PLOT_GAP_PX;
    layout->height = stack_rows(plot, layout, place_cells(plot, layout)) + MB_PLOT_MARGIN_PX;
    line_up_columns(plot, layout);
    return MB_OK;
}
