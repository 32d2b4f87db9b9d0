#include "figures.h"

#include <math.h>
#include <string.h>

#include "json.h"

void app_figures_add(app_figures *figures, app_figure figure)
{
    if (figures->count < APP_FIGURES_MAX) {
        figures->list[figures->count++] = figure;
    }
}

void app_figures_heading(app_figures *figures, const char *text)
{
    app_figures_add(figures, (app_figure){.kind = APP_FIGURE_HEADING, .label = text});
}

void app_figures_number(app_figures *figures, const char *name, const char *label, const char *unit,
                        double value, int decimals, const char *remark)
{
    app_figures_add(figures, (app_figure){.kind = APP_FIGURE_NUMBER,
                                          .name = name,
                                          .label = label,
                                          .unit = unit,
                                          .number = value,
                                          .decimals = decimals,
                                          .remark = remark});
}

void app_figure_text(const app_figure *figure, char *out, size_t size)
{
    const char *unit = figure->unit != NULL ? figure->unit : "";
    const char *space = figure->unit != NULL ? " " : "";
    double zero = 0.5 * pow(10.0, -figure->decimals);

    out[0] = '\0';
    switch (figure->kind) {
    case APP_FIGURE_HEADING:
        break;
    case APP_FIGURE_NUMBER:
        if (isfinite(figure->number)) {
            double shown = fabs(figure->number) < zero ? 0.0 : figure->number; /* no minus before a zero */
            (void)snprintf(out, size, "%.*f%s%s", figure->decimals, shown, space, unit);
        }
        break;
    case APP_FIGURE_WHOLE:
        (void)snprintf(out, size, "%llu%s%s", (unsigned long long)figure->whole, space, unit);
        break;
    case APP_FIGURE_TEXT_VALUE:
        (void)snprintf(out, size, "%s", figure->text != NULL ? figure->text : "");
        break;
    case APP_FIGURE_FLAG:
        (void)snprintf(out, size, "%s", figure->flag ? "yes" : "no");
        break;
    }
}

void app_figures_print(const app_figures *figures, FILE *stream)
{
    for (size_t i = 0; i < figures->count; i++) {
        const app_figure *figure = &figures->list[i];
        char value[APP_FIGURE_TEXT];
        app_figure_text(figure, value, sizeof value);
        if (figure->label != NULL && figure->kind == APP_FIGURE_HEADING) {
            (void)fprintf(stream, "%s%s\n", i > 0 ? "\n" : "", figure->label);
        } else if (figure->label != NULL && value[0] != '\0') {
            bool remark = figure->remark != NULL;
            (void)fprintf(stream, remark ? "  %-26s %-16s %s\n" : "  %-26s %s%s\n", figure->label, value,
                          remark ? figure->remark : "");
        }
    }
}

static void put(json_t *object, const app_figure *figure)
{
    switch (figure->kind) {
    case APP_FIGURE_HEADING:
        break;
    case APP_FIGURE_NUMBER:
        app_json_set(object, figure->name, figure->number, figure->decimals + 2);
        break;
    case APP_FIGURE_WHOLE:
        app_json_set_whole(object, figure->name, figure->whole);
        break;
    case APP_FIGURE_TEXT_VALUE:
        app_json_set_text(object, figure->name, figure->text);
        break;
    case APP_FIGURE_FLAG:
        app_json_set_flag(object, figure->name, figure->flag);
        break;
    }
}

int app_figures_json(const app_program *program, const app_figures *figures)
{
    json_t *object = app_json_begin(program);

    for (size_t i = 0; i < figures->count; i++) {
        if (figures->list[i].name != NULL) {
            put(object, &figures->list[i]);
        }
    }
    return app_json_print(program, object, stdout);
}
