/** plot_layout.h - where everything of a picture stands. Room-internal. */
#ifndef MIRRORBAND_FILES_PLOT_LAYOUT_H
#define MIRRORBAND_FILES_PLOT_LAYOUT_H

#include "plot.h"

enum {
    MB_PLOT_MARGIN_PX = 24,
    MB_PLOT_GAP_PX = 28,
    MB_PLOT_SWATCH_PX = 22,
    MB_PLOT_LEGEND_ROW_PX = 18,
    MB_PLOT_ENTRIES_MAX = MB_PLOT_SERIES_MAX + MB_PLOT_MARKS_MAX
};

/** One entry of a legend: a series or a mark, and where it stands. */
typedef struct plot_entry {
    const plot_series *series; /* or NULL: a mark */
    char text[MB_PLOT_TEXT];
    double width;
    double x, y; /* of the swatch; y is the middle of the line */
} plot_entry;

/** One panel: its cell, its plot area and its scales, all in px of the figure. */
typedef struct plot_box {
    size_t row, column;
    double cell_x, cell_y, cell_width, cell_height;
    double header;              /* height of title, note and legend */
    bool legend_beside;         /* the legend stands right of the title */
    double x, y, width, height; /* of the plot area */
    plot_scale x_scale, y_scale;
    plot_entry entries[MB_PLOT_ENTRIES_MAX];
    size_t entry_count;
} plot_box;

/** Size of the whole figure and its boxes, one a panel. */
typedef struct plot_layout {
    double width, height;
    double heading; /* height of title and subtitle */
    plot_box *boxes;
} plot_layout;

/** Places everything. boxes are to be released. Errors: MEMORY. */
mb_status mb_plot_arrange(const mb_plot *plot, plot_layout *layout);

#endif
