/** figures.h - results once: printed as a table, as JSON, or as a page. */
#ifndef APPS_COMMON_FIGURES_H
#define APPS_COMMON_FIGURES_H

#include <stdio.h>

#include "program.h"

enum { APP_FIGURES_MAX = 96, APP_FIGURE_TEXT = 512 };

typedef enum app_figure_kind {
    APP_FIGURE_HEADING,
    APP_FIGURE_NUMBER, /* NaN: null in JSON, left out elsewhere */
    APP_FIGURE_WHOLE,
    APP_FIGURE_TEXT_VALUE,
    APP_FIGURE_FLAG
} app_figure_kind;

/** One result; to be written with named fields. Texts are the caller's unless stated. */
typedef struct app_figure {
    app_figure_kind kind;
    const char *name;   /* in JSON, with the unit in it; NULL: not in JSON */
    const char *label;  /* for people; NULL: in JSON only */
    const char *unit;   /* behind the number; NULL = none */
    const char *remark; /* behind that; NULL = none */
    double number;
    int decimals;
    uint64_t whole;
    bool flag;
    const char *text;
} app_figure;

/** Results in the order of adding. Start with {0}. */
typedef struct app_figures {
    app_figure list[APP_FIGURES_MAX];
    size_t count;
} app_figures;

/** Appends one; what is beyond APP_FIGURES_MAX is dropped. */
void app_figures_add(app_figures *figures, app_figure figure);

/** A heading of the table. */
void app_figures_heading(app_figures *figures, const char *text);

/** A number with its unit; decimals as printed. */
void app_figures_number(app_figures *figures, const char *name, const char *label, const char *unit,
                        double value, int decimals, const char *remark);

/** The value as the table shows it, unit included; "" for what it does not show. */
void app_figure_text(const app_figure *figure, char *out, size_t size);

/** Writes the table for people. */
void app_figures_print(const app_figures *figures, FILE *stream);

/** Writes all that have a name as one JSON object to stdout. Returns APP_OK or APP_FAILURE, sentence written.
 */
int app_figures_json(const app_program *program, const app_figures *figures);

/**
 * Writes a page that needs no other file: heading, the table, and the picture (an SVG file; NULL = none)
 * within it. It appears under its name when complete. Returns APP_OK or APP_FAILURE, sentence written.
 */
int app_figures_page(const app_program *program, const app_figures *figures, const char *heading,
                     const char *picture_path, const char *path);

#endif
