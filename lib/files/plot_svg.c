#include "plot_parts.h"

#include "path.h"

#include <locale.h>
#include <math.h>
#include <string.h>

/* Colours of Okabe and Ito, lightened for the dark scheme where they would drown; yellow darkened on white.
 */
static const char STYLE[] =
    "<style>\n"
    "text{font-family:'Helvetica Neue',Helvetica,Arial,'DejaVu "
    "Sans',sans-serif;font-size:12px;fill:#4b5563}\n"
    ".h1{font-size:19px;font-weight:600;fill:#111827}.h2{font-size:13px}\n"
    ".h3{font-size:14px;font-weight:600;fill:#111827}\n"
    ".end{text-anchor:end}.mid{text-anchor:middle}\n"
    ".page{fill:#ffffff}.area{fill:#f7f8fa}\n"
    ".grid{stroke:#e3e6eb;stroke-width:1;fill:none}.zero{stroke:#c3c9d2;stroke-width:1;fill:none}\n"
    ".axis{stroke:#9aa3af;stroke-width:1;fill:none}\n"
    ".mark{stroke:#6b7280;stroke-width:1.2;stroke-dasharray:5 4;fill:none}\n"
    ".line{fill:none;stroke-linejoin:round;stroke-linecap:round}.dash{stroke-dasharray:7 "
    "5;stroke-linecap:butt}\n"
    ".c0{stroke:#0072b2}.c1{stroke:#d55e00}.c2{stroke:#009e73}.c3{stroke:#cc79a7}\n"
    ".c4{stroke:#e69f00}.c5{stroke:#56b4e9}.c6{stroke:#1f2937}.c7{stroke:#a8960c}\n"
    "@media (prefers-color-scheme:dark){\n"
    "text{fill:#a9b1bd}.h1,.h3{fill:#f1f3f5}\n"
    ".page{fill:#14171c}.area{fill:#1b1f26}\n"
    ".grid{stroke:#2b313b}.zero{stroke:#454d5a}.axis{stroke:#626c7a}.mark{stroke:#98a1ae}\n"
    ".c0{stroke:#4aa8e0}.c1{stroke:#ff8a3c}.c2{stroke:#2cc79b}.c3{stroke:#e6a3cb}\n"
    ".c4{stroke:#f3b735}.c5{stroke:#93d0f5}.c6{stroke:#e5e7eb}.c7{stroke:#f0e442}\n"
    "}\n"
    "</style>\n";

static mb_status put_text(mb_sink *sink, const char *kind, double x, double y, const char *text)
{
    char escaped[6 * MB_PLOT_TEXT];

    mb_plot_text_escape(text, escaped, sizeof escaped);
    return mb_sink_print(sink, "<text class=\"%s\" x=\"%.1f\" y=\"%.1f\">%s</text>\n", kind, x, y, escaped);
}

static mb_status put_fitted(mb_sink *sink, const char *kind, double size_px, double x, double y, double width,
                            const char *text)
{
    char fitted[MB_PLOT_TEXT];

    if (text[0] == '\0') {
        return MB_OK;
    }
    mb_plot_text_fit(text, size_px, width, fitted);
    return put_text(sink, kind, x, y, fitted);
}

mb_status mb_plot_put_line(mb_sink *sink, const char *kind, double x1, double y1, double x2, double y2)
{
    return mb_sink_print(sink, "<path class=\"%s\" d=\"M%.1f %.1fL%.1f %.1f\"/>\n", kind, x1, y1, x2, y2);
}

/* A crisp line one pixel wide lies in the middle of a pixel. */
static double crisp(double position)
{
    return floor(position) + 0.5;
}

/* ---- frame --------------------------------------------------------------------------------------------- */

static mb_status put_x_ticks(mb_sink *sink, const plot_box *box, double right_end)
{
    double values[MB_PLOT_TICKS_MAX];
    size_t count = mb_plot_scale_values(&box->x_scale, values);
    mb_status status = MB_OK;

    for (size_t i = 0; i < count && status == MB_OK; i++) {
        double at = box->x + mb_plot_position(&box->x_scale, values[i], box->width);
        char label[48];
        mb_plot_scale_label(&box->x_scale, values[i], label);
        double half = 0.5 * mb_plot_text_width(label, 12.0);
        bool zero = fabs(values[i]) < 1e-9 * box->x_scale.step;
        status = mb_plot_put_line(sink, zero ? "zero" : "grid", crisp(at), box->y, crisp(at),
                                  box->y + box->height);
        if (status == MB_OK) {
            status = put_text(sink, "mid", fmin(at, right_end - half), box->y + box->height + 18.0, label);
        }
    }
    return status;
}

static mb_status put_y_ticks(mb_sink *sink, const plot_box *box)
{
    double values[MB_PLOT_TICKS_MAX];
    size_t count = mb_plot_scale_values(&box->y_scale, values);
    mb_status status = MB_OK;

    for (size_t i = 0; i < count && status == MB_OK; i++) {
        double at = box->y + box->height - mb_plot_position(&box->y_scale, values[i], box->height);
        char label[48];
        mb_plot_scale_label(&box->y_scale, values[i], label);
        bool zero = fabs(values[i]) < 1e-9 * box->y_scale.step;
        status =
            mb_plot_put_line(sink, zero ? "zero" : "grid", box->x, crisp(at), box->x + box->width, crisp(at));
        if (status == MB_OK) {
            status = put_text(sink, "end", box->x - 8.0, at + 4.2, label);
        }
    }
    return status;
}

static mb_status put_captions(mb_sink *sink, const plot_box *box)
{
    char fitted[MB_PLOT_TEXT], escaped[6 * MB_PLOT_TEXT];
    double middle = box->y + 0.5 * box->height, x = box->cell_x + 11.0;
    mb_status status = put_fitted(sink, "mid", 12.0, box->x + 0.5 * box->width, box->y + box->height + 37.0,
                                  box->width, box->x_scale.caption);

    if (status != MB_OK || box->y_scale.caption[0] == '\0') {
        return status;
    }
    mb_plot_text_fit(box->y_scale.caption, 12.0, box->height + 8.0, fitted);
    mb_plot_text_escape(fitted, escaped, sizeof escaped);
    return mb_sink_print(sink,
                         "<text class=\"mid\" transform=\"translate(%.1f %.1f) rotate(-90)\">%s</text>\n", x,
                         middle, escaped);
}

static mb_status put_frame(mb_sink *sink, const plot_box *box)
{
    double bottom = crisp(box->y + box->height), left = crisp(box->x);
    mb_status status =
        mb_sink_print(sink, "<rect class=\"area\" x=\"%.1f\" y=\"%.1f\" width=\"%.1f\" height=\"%.1f\"/>\n",
                      box->x, box->y, box->width, box->height);

    if (status == MB_OK) {
        status = put_x_ticks(sink, box, box->cell_x + box->cell_width + 10.0);
    }
    if (status == MB_OK) {
        status = put_y_ticks(sink, box);
    }
    if (status == MB_OK) {
        status = mb_sink_print(sink, "<path class=\"axis\" d=\"M%.1f %.1fV%.1fH%.1f\"/>\n", left, box->y,
                               bottom, box->x + box->width);
    }
    return status == MB_OK ? put_captions(sink, box) : status;
}

/* ---- header -------------------------------------------------------------------------------------------- */

static mb_status put_swatch(mb_sink *sink, const plot_entry *entry)
{
    const plot_series *series = entry->series;

    if (series == NULL) {
        return mb_plot_put_line(sink, "mark", entry->x, entry->y, entry->x + MB_PLOT_SWATCH_PX, entry->y);
    }
    if (series->style == MB_PLOT_POINTS) {
        return mb_sink_print(sink, "<path class=\"line c%d\" stroke-width=\"7\" d=\"M%.1f %.1fh.01\"/>\n",
                             series->colour, entry->x + 0.5 * MB_PLOT_SWATCH_PX, entry->y);
    }
    return mb_sink_print(sink, "<path class=\"line%s c%d\" stroke-width=\"%.2f\" d=\"M%.1f %.1fh%d\"/>\n",
                         series->style == MB_PLOT_DASHED ? " dash" : "", series->colour,
                         fmax(2.0, fmin(4.0, series->width_px)), entry->x, entry->y, MB_PLOT_SWATCH_PX);
}

static mb_status put_header(mb_sink *sink, const plot_panel *panel, const plot_box *box)
{
    mb_status status = put_fitted(sink, "h3", 14.0 * MB_PLOT_BOLD, box->cell_x, box->cell_y + 14.0,
                                  box->cell_width, panel->title);
    double title_height =
        panel->title[0] != '\0' || (box->legend_beside && box->entry_count > 0) ? 20.0 : 0.0;

    if (status == MB_OK) {
        status = put_fitted(sink, "note", 12.0, box->cell_x, box->cell_y + title_height + 11.0,
                            box->cell_width, panel->note);
    }
    for (size_t i = 0; i < box->entry_count && status == MB_OK; i++) {
        const plot_entry *entry = &box->entries[i];
        status = put_swatch(sink, entry);
        if (status == MB_OK) {
            status = put_text(sink, "note", entry->x + MB_PLOT_SWATCH_PX + 6.0, entry->y + 4.2, entry->text);
        }
    }
    return status;
}

/* ---- figure -------------------------------------------------------------------------------------------- */

static mb_status put_heading(mb_sink *sink, const mb_plot *plot, const plot_layout *layout)
{
    char escaped[6 * MB_PLOT_TEXT];
    double width = layout->width - 2.0 * MB_PLOT_MARGIN_PX, top = MB_PLOT_MARGIN_PX;

    mb_plot_text_escape(plot->title[0] != '\0' ? plot->title : "figure", escaped, sizeof escaped);
    mb_status status =
        mb_sink_print(sink,
                      "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"%.0f\" height=\"%.0f\" "
                      "viewBox=\"0 0 %.0f %.0f\" role=\"img\">\n<title>%s</title>\n",
                      layout->width, layout->height, layout->width, layout->height, escaped);
    if (status == MB_OK) {
        status = mb_sink_write(sink, STYLE, strlen(STYLE));
    }
    if (status == MB_OK) {
        status = mb_sink_print(sink, "<rect class=\"page\" width=\"%.0f\" height=\"%.0f\"/>\n", layout->width,
                               layout->height);
    }
    if (status == MB_OK) {
        status =
            put_fitted(sink, "h1", 19.0 * MB_PLOT_BOLD, MB_PLOT_MARGIN_PX, top + 17.0, width, plot->title);
    }
    top += plot->title[0] != '\0' ? 28.0 : 0.0;
    return status == MB_OK
               ? put_fitted(sink, "h2", 13.0, MB_PLOT_MARGIN_PX, top + 12.0, width, plot->subtitle)
               : status;
}

static mb_status put_figure(mb_sink *sink, const mb_plot *plot, const plot_layout *layout)
{
    mb_status status = put_heading(sink, plot, layout);

    for (size_t i = 0; i < plot->panel_count && status == MB_OK; i++) {
        status = put_header(sink, plot->panels[i], &layout->boxes[i]);
        if (status == MB_OK) {
            status = put_frame(sink, &layout->boxes[i]);
        }
        if (status == MB_OK) {
            status = mb_plot_put_data(sink, plot->panels[i], &layout->boxes[i]);
        }
    }
    return status == MB_OK ? mb_sink_print(sink, "</svg>\n") : status;
}

static mb_status write_with_point(const mb_plot *plot, mb_sink *sink)
{
    locale_t plain = newlocale(LC_NUMERIC_MASK, "C", (locale_t)0);
    plot_layout layout;

    if (plain == (locale_t)0) {
        return mb_fail_memory("a picture");
    }
    locale_t before = uselocale(plain);
    mb_status status = mb_plot_arrange(plot, &layout);
    if (status == MB_OK) {
        status = put_figure(sink, plot, &layout);
    }
    (void)uselocale(before);
    freelocale(plain);
    mb_release(layout.boxes);
    return status;
}

mb_status mb_plot_write(const mb_plot *plot, const char *path)
{
    mb_sink *sink = NULL;
    mb_status status = mb_path_check(path);

    if (status == MB_OK && plot->panel_count == 0) {
        status = mb_fail(MB_ERROR_ARGUMENT, "plot", "a picture without a panel cannot be written; add one");
    }
    if (status == MB_OK) {
        status = mb_sink_open(path, &sink);
    }
    if (status == MB_OK) {
        status = write_with_point(plot, sink);
    }
    if (status == MB_OK) {
        status = mb_sink_commit(sink);
    }
    mb_sink_destroy(sink);
    return status;
}
