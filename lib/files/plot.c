#include "plot.h"

#include "path.h"

#include <math.h>
#include <string.h>

mb_plot_settings mb_plot_settings_default(void)
{
    return (mb_plot_settings){.columns = 1, .panel_width_px = 480.0, .panel_height_px = 300.0};
}

mb_plot_panel_settings mb_plot_panel_settings_default(void)
{
    const mb_plot_axis automatic = {.low = NAN, .high = NAN};

    return (mb_plot_panel_settings){.x = automatic, .y = automatic, .column_span = 1};
}

mb_plot_series mb_plot_series_default(void)
{
    return (mb_plot_series){.style = MB_PLOT_LINE, .colour = -1};
}

static void copy_text(char *out, size_t size, const char *text)
{
    mb_text_copy(out, size, text != NULL ? text : "");
}

mb_status mb_plot_create(const mb_plot_settings *settings, mb_plot **out)
{
    const mb_plot_settings defaults = mb_plot_settings_default();

    *out = NULL;
    settings = settings != NULL ? settings : &defaults;
    mb_status status = mb_check_range("columns", (double)settings->columns, 1.0, 4.0, "");
    if (status == MB_OK) {
        status = mb_check_range("panel_width_px", settings->panel_width_px, 240.0, 2000.0, "px");
    }
    if (status == MB_OK) {
        status = mb_check_range("panel_height_px", settings->panel_height_px, 160.0, 2000.0, "px");
    }
    if (status != MB_OK) {
        return status;
    }
    mb_plot *plot = mb_allocate(1, sizeof *plot);
    if (plot == NULL) {
        return mb_fail_memory("a picture");
    }
    copy_text(plot->title, sizeof plot->title, settings->title);
    copy_text(plot->subtitle, sizeof plot->subtitle, settings->subtitle);
    plot->columns = settings->columns;
    plot->panel_width_px = settings->panel_width_px;
    plot->panel_height_px = settings->panel_height_px;
    *out = plot;
    return MB_OK;
}

static mb_status check_axis(const char *field, const mb_plot_axis *axis)
{
    bool automatic = isnan(axis->low) && isnan(axis->high);

    if (automatic || (isfinite(axis->low) && isfinite(axis->high) && axis->low < axis->high)) {
        return MB_OK;
    }
    return mb_fail(MB_ERROR_ARGUMENT, field, "%s must have low < high, or both nan; they are %g and %g",
                   field, axis->low, axis->high);
}

static void copy_axis(plot_axis_texts *out, const mb_plot_axis *axis)
{
    copy_text(out->label, sizeof out->label, axis->label);
    copy_text(out->unit, sizeof out->unit, axis->unit);
    out->low = axis->low;
    out->high = axis->high;
}

mb_status mb_plot_panel(mb_plot *plot, const mb_plot_panel_settings *settings)
{
    mb_status status =
        mb_check_range("column_span", (double)settings->column_span, 1.0, (double)plot->columns, "");

    if (status == MB_OK) {
        status = check_axis("x", &settings->x);
    }
    if (status == MB_OK) {
        status = check_axis("y", &settings->y);
    }
    if (status == MB_OK && plot->panel_count == MB_PLOT_PANELS_MAX) {
        status = mb_fail(MB_ERROR_ARGUMENT, "plot", "a picture holds at most %d panels", MB_PLOT_PANELS_MAX);
    }
    if (status != MB_OK) {
        return status;
    }
    plot_panel *panel = mb_allocate(1, sizeof *panel);
    plot_series *series = mb_allocate(MB_PLOT_SERIES_MAX, sizeof *series);
    if (panel == NULL || series == NULL) {
        mb_release(panel);
        mb_release(series);
        return mb_fail_memory("a picture");
    }
    panel->series = series;
    copy_text(panel->title, sizeof panel->title, settings->title);
    copy_axis(&panel->x, &settings->x);
    copy_axis(&panel->y, &settings->y);
    panel->column_span = settings->column_span;
    panel->equal_scale = settings->equal_scale;
    plot->panels[plot->panel_count++] = panel;
    return MB_OK;
}

/* The panel that series and marks go to; NULL, with a fault, when there is none. */
static plot_panel *last_panel(const mb_plot *plot)
{
    if (plot->panel_count == 0) {
        (void)mb_fail(MB_ERROR_ARGUMENT, "plot", "a picture needs a panel first; call mb_plot_panel");
        return NULL;
    }
    return plot->panels[plot->panel_count - 1];
}

static mb_status check_series(const plot_panel *panel, const mb_plot_series *series)
{
    mb_status status = mb_check_range("colour", series->colour, -1.0, 7.0, "");

    if (status == MB_OK) {
        status = mb_check_range("width_px", series->width_px, 0.0, 100.0, "px");
    }
    if (status == MB_OK) {
        status = mb_check_range("opacity", series->opacity, 0.0, 1.0, "");
    }
    if (status == MB_OK && series->count > 0 && (series->x == NULL || series->y == NULL)) {
        status = mb_fail(MB_ERROR_ARGUMENT, "x", "a series of %zu points needs both x and y", series->count);
    }
    if (status == MB_OK && panel->series_count == MB_PLOT_SERIES_MAX) {
        status = mb_fail(MB_ERROR_ARGUMENT, "series", "a panel holds at most %d series", MB_PLOT_SERIES_MAX);
    }
    return status;
}

static double choose(double wanted, double otherwise)
{
    return wanted > 0.0 ? wanted : otherwise;
}

mb_status mb_plot_add(mb_plot *plot, const mb_plot_series *series)
{
    plot_panel *panel = last_panel(plot);

    mb_status status = panel != NULL ? check_series(panel, series) : MB_ERROR_ARGUMENT;
    if (panel == NULL || status != MB_OK) {
        return status;
    }
    bool points = series->style == MB_PLOT_POINTS;
    plot_series added = {.style = series->style,
                         .width_px = choose(series->width_px, points ? 3.0 : 1.5),
                         .opacity = choose(series->opacity, points ? 0.5 : 1.0),
                         .count = series->count,
                         .x = mb_allocate(series->count, sizeof(double)),
                         .y = mb_allocate(series->count, sizeof(double))};
    if (added.x == NULL || added.y == NULL) {
        mb_release(added.x);
        mb_release(added.y);
        return mb_fail_memory("a picture");
    }
    if (series->count > 0) {
        memcpy(added.x, series->x, series->count * sizeof(double));
        memcpy(added.y, series->y, series->count * sizeof(double));
    }
    copy_text(added.label, sizeof added.label, series->label);
    added.colour = series->colour >= 0 ? series->colour : panel->next_colour % 8;
    panel->next_colour = added.colour + 1;
    panel->series[panel->series_count++] = added;
    return MB_OK;
}

static mb_status add_mark(mb_plot *plot, double value, const char *label, bool vertical)
{
    plot_panel *panel = last_panel(plot);

    if (panel == NULL) {
        return MB_ERROR_ARGUMENT;
    }
    if (!isfinite(value) || panel->mark_count == MB_PLOT_MARKS_MAX) {
        return mb_fail(MB_ERROR_ARGUMENT, vertical ? "x" : "y",
                       "a mark must be at a finite value, at most %d a panel", MB_PLOT_MARKS_MAX);
    }
    plot_mark *mark = &panel->marks[panel->mark_count++];
    mark->vertical = vertical;
    mark->value = value;
    copy_text(mark->label, sizeof mark->label, label);
    return MB_OK;
}

mb_status mb_plot_mark_y(mb_plot *plot, double y, const char *label)
{
    return add_mark(plot, y, label, false);
}

mb_status mb_plot_mark_x(mb_plot *plot, double x, const char *label)
{
    return add_mark(plot, x, label, true);
}

mb_status mb_plot_note(mb_plot *plot, const char *text)
{
    plot_panel *panel = last_panel(plot);

    if (panel == NULL) {
        return MB_ERROR_ARGUMENT;
    }
    copy_text(panel->note, sizeof panel->note, text);
    return MB_OK;
}

void mb_plot_destroy(mb_plot *plot)
{
    if (plot == NULL) {
        return;
    }
    for (size_t i = 0; i < plot->panel_count; i++) {
        plot_panel *panel = plot->panels[i];
        for (size_t k = 0; k < panel->series_count; k++) {
            mb_release(panel->series[k].x);
            mb_release(panel->series[k].y);
        }
        mb_release(panel->series);
        mb_release(panel);
    }
    mb_release(plot);
}
