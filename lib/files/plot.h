/** plot.h - what building, scaling and drawing of pictures share. Room-internal. */
#ifndef MIRRORBAND_FILES_PLOT_H
#define MIRRORBAND_FILES_PLOT_H

#include "mirrorband/files.h"

enum {
    MB_PLOT_PANELS_MAX = 64,
    MB_PLOT_SERIES_MAX = 32,
    MB_PLOT_MARKS_MAX = 16,
    MB_PLOT_TEXT = 192,
    MB_PLOT_TICKS_MAX = 64
};

typedef struct plot_series {
    char label[MB_PLOT_TEXT];
    mb_plot_style style;
    int colour;
    double width_px, opacity;
    double *x, *y;
    size_t count;
} plot_series;

typedef struct plot_mark {
    char label[MB_PLOT_TEXT];
    bool vertical; /* at one value of x */
    double value;
} plot_mark;

typedef struct plot_axis_texts {
    char label[MB_PLOT_TEXT], unit[32];
    double low, high;
} plot_axis_texts;

typedef struct plot_panel {
    char title[MB_PLOT_TEXT], note[MB_PLOT_TEXT];
    plot_axis_texts x, y;
    size_t column_span;
    bool equal_scale;
    plot_series *series; /* MB_PLOT_SERIES_MAX */
    size_t series_count;
    plot_mark marks[MB_PLOT_MARKS_MAX];
    size_t mark_count;
    int next_colour;
} plot_panel;

struct mb_plot {
    char title[MB_PLOT_TEXT], subtitle[MB_PLOT_TEXT];
    size_t columns;
    double panel_width_px, panel_height_px;
    plot_panel *panels[MB_PLOT_PANELS_MAX];
    size_t panel_count;
};

/* ---- text ---- */

/** How much wider bold text is. */
#define MB_PLOT_BOLD 1.12

/** Width in px that a text takes at most in the fonts named by the style sheet. */
double mb_plot_text_width(const char *text, double size_px);

/** Copies a text, cut with an ellipsis so that it is at most width_px wide. out: MB_PLOT_TEXT bytes. */
void mb_plot_text_fit(const char *text, double size_px, double width_px, char *out);

/** Copies a text with the signs of XML replaced. out: 6 bytes a character are enough. */
void mb_plot_text_escape(const char *text, char *out, size_t size);

/* ---- axes ---- */

/** A scaled axis: what is shown and where its ticks are. */
typedef struct plot_scale {
    double low, high;           /* in units of the data */
    double step;                /* from tick to tick */
    double display;             /* a label shows value * display */
    int decimals;               /* of the labels */
    char caption[MB_PLOT_TEXT]; /* "frequency (kHz)" or "" */
} plot_scale;

/** Range that the axis shows before ticks: as set, or of the data low..high (low > high: no data). */
void mb_plot_scale_range(const plot_axis_texts *axis, double low, double high, plot_scale *scale);

/** Chooses unit, ticks and labels for an axis of length_px; y axes from the data are widened to whole ticks.
 */
void mb_plot_scale_ticks(const plot_axis_texts *axis, double length_px, bool vertical, plot_scale *scale);

/** Values of the ticks, at most MB_PLOT_TICKS_MAX; returns how many. */
size_t mb_plot_scale_values(const plot_scale *scale, double *values);

/** Text of a tick, with a true minus sign. out: 48 bytes. */
void mb_plot_scale_label(const plot_scale *scale, double value, char *out);

/* ---- lines ---- */

/** Position in px of a value on an axis of length_px, kept within reach of the drawing. */
double mb_plot_position(const plot_scale *scale, double value, double length_px);

/**
 * Picks of a line the points worth drawing at width_px: first, lowest, highest and last within each half
 * pixel. keep: count flags. All are kept unless x never decreases and there are many.
 */
void mb_plot_thin(const plot_series *series, const plot_scale *x, double width_px, bool *keep);

#endif
