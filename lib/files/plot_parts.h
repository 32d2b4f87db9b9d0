/** plot_parts.h - pieces of SVG. Room-internal. */
#ifndef MIRRORBAND_FILES_PLOT_PARTS_H
#define MIRRORBAND_FILES_PLOT_PARTS_H

#include "plot_layout.h"
#include "sink.h"

/** A straight line of a class of the style sheet. */
mb_status mb_plot_put_line(mb_sink *sink, const char *kind, double x1, double y1, double x2, double y2);

/** Series and marks of a panel, cut at the edges of its plot area. Errors: FILE, MEMORY. */
mb_status mb_plot_put_data(mb_sink *sink, const plot_panel *panel, const plot_box *box);

#endif
