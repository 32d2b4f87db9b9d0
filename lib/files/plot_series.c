#include "plot_parts.h"

#include "path.h"

#include <math.h>

static mb_status put_points(mb_sink *sink, const plot_series *series, const plot_box *box)
{
    mb_status status = MB_OK;

    for (size_t i = 0; i < series->count && status == MB_OK; i++) {
        if (isfinite(series->x[i]) && isfinite(series->y[i])) {
            status = mb_sink_print(sink, "M%.1f %.1fh.01",
                                   mb_plot_position(&box->x_scale, series->x[i], box->width),
                                   box->height - mb_plot_position(&box->y_scale, series->y[i], box->height));
        }
    }
    return status;
}

static mb_status put_polyline(mb_sink *sink, const plot_series *series, const plot_box *box)
{
    bool *keep = mb_allocate(series->count, sizeof *keep);
    bool drawing = false;
    mb_status status = MB_OK;

    if (keep == NULL) {
        return mb_fail_memory("a picture");
    }
    mb_plot_thin(series, &box->x_scale, box->width, keep);
    for (size_t i = 0; i < series->count && status == MB_OK; i++) {
        if (!isfinite(series->x[i]) || !isfinite(series->y[i])) {
            drawing = false;
        } else if (keep[i]) {
            status = mb_sink_print(sink, "%s%.2f %.2f", drawing ? "L" : "M",
                                   mb_plot_position(&box->x_scale, series->x[i], box->width),
                                   box->height - mb_plot_position(&box->y_scale, series->y[i], box->height));
            drawing = true;
        }
    }
    mb_release(keep);
    return status;
}

static mb_status put_series(mb_sink *sink, const plot_series *series, const plot_box *box)
{
    mb_status status = mb_sink_print(
        sink, "<path class=\"line%s c%d\" stroke-width=\"%.2f\" stroke-opacity=\"%.2f\" d=\"",
        series->style == MB_PLOT_DASHED ? " dash" : "", series->colour, series->width_px, series->opacity);

    if (status == MB_OK) {
        status =
            series->style == MB_PLOT_POINTS ? put_points(sink, series, box) : put_polyline(sink, series, box);
    }
    return status == MB_OK ? mb_sink_print(sink, "\"/>\n") : status;
}

static mb_status put_mark(mb_sink *sink, const plot_mark *mark, const plot_box *box)
{
    if (mark->vertical) {
        double x = mb_plot_position(&box->x_scale, mark->value, box->width);
        return mb_plot_put_line(sink, "mark", x, 0.0, x, box->height);
    }
    double y = box->height - mb_plot_position(&box->y_scale, mark->value, box->height);
    return mb_plot_put_line(sink, "mark", 0.0, y, box->width, y);
}

/* An inner svg element clips what lies outside the plot area. */
mb_status mb_plot_put_data(mb_sink *sink, const plot_panel *panel, const plot_box *box)
{
    mb_status status = mb_sink_print(
        sink, "<svg x=\"%.1f\" y=\"%.1f\" width=\"%.1f\" height=\"%.1f\" overflow=\"hidden\">\n", box->x,
        box->y, box->width, box->height);

    for (size_t i = 0; i < panel->mark_count && status == MB_OK; i++) {
        status = put_mark(sink, &panel->marks[i], box);
    }
    for (size_t i = 0; i < panel->series_count && status == MB_OK; i++) {
        status = put_series(sink, &panel->series[i], box);
    }
    return status == MB_OK ? mb_sink_print(sink, "</svg>\n") : status;
}
