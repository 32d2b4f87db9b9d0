/* Results as a page that needs no other file. */
#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "figures.h"

static const char *const head =
    "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n"
    "<meta name=\"viewport\" content=\"width=device-width\">\n"
    "<style>\n"
    ":root { color-scheme: light dark; }\n"
    "body { font: 16px/1.5 system-ui, sans-serif; max-width: 62rem; margin: 2rem auto; padding: 0 1rem; }\n"
    "table { border-collapse: collapse; margin: 1rem 0; }\n"
    "th { text-align: left; padding: 1.2rem 1rem 0.3rem 0; }\n"
    "td { padding: 0.15rem 1.5rem 0.15rem 0; border-top: 1px solid rgba(128, 128, 128, 0.3); }\n"
    "td.value { font-variant-numeric: tabular-nums; white-space: nowrap; }\n"
    "td.remark { opacity: 0.7; }\n"
    "body > svg { max-width: 100%; height: auto; }\n"
    "</style>\n";

static void put_text(FILE *page, const char *text)
{
    for (; *text != '\0'; text++) {
        switch (*text) {
        case '<':
            (void)fputs("&lt;", page);
            break;
        case '>':
            (void)fputs("&gt;", page);
            break;
        case '&':
            (void)fputs("&amp;", page);
            break;
        default:
            (void)fputc(*text, page);
        }
    }
}

static void put_cell(FILE *page, const char *kind, const char *text)
{
    (void)fprintf(page, "<td%s>", kind);
    put_text(page, text);
    (void)fputs("</td>", page);
}

static void put_row(FILE *page, const app_figure *figure)
{
    char value[APP_FIGURE_TEXT];

    app_figure_text(figure, value, sizeof value);
    if (figure->label != NULL && figure->kind == APP_FIGURE_HEADING) {
        (void)fputs("<tr><th colspan=\"3\">", page);
        put_text(page, figure->label);
        (void)fputs("</th></tr>\n", page);
    } else if (figure->label != NULL && value[0] != '\0') {
        (void)fputs("<tr>", page);
        put_cell(page, "", figure->label);
        put_cell(page, " class=\"value\"", value);
        put_cell(page, " class=\"remark\"", figure->remark != NULL ? figure->remark : "");
        (void)fputs("</tr>\n", page);
    }
}

/* Copies an SVG file from its first <svg on; false when it cannot be read. */
static bool put_picture(FILE *page, const char *path)
{
    FILE *picture = fopen(path, "rb");
    char block[4096];
    bool begun = false;

    if (picture == NULL) {
        return false;
    }
    while (fgets(block, sizeof block, picture) != NULL) {
        const char *from = begun ? block : strstr(block, "<svg");
        begun = begun || from != NULL;
        if (from != NULL) {
            (void)fputs(from, page);
        }
    }
    bool good = ferror(picture) == 0;
    (void)fclose(picture);
    return good;
}

static bool put_page(FILE *page, const app_figures *figures, const char *heading, const char *picture_path)
{
    bool good = true;

    (void)fputs(head, page);
    (void)fputs("<title>", page);
    put_text(page, heading);
    (void)fputs("</title>\n</head>\n<body>\n<h1>", page);
    put_text(page, heading);
    (void)fputs("</h1>\n", page);
    if (picture_path != NULL) {
        good = put_picture(page, picture_path);
    }
    (void)fputs("<table>\n", page);
    for (size_t i = 0; i < figures->count; i++) {
        put_row(page, &figures->list[i]);
    }
    (void)fputs("</table>\n</body>\n</html>\n", page);
    return good && ferror(page) == 0;
}

int app_figures_page(const app_program *program, const app_figures *figures, const char *heading,
                     const char *picture_path, const char *path)
{
    size_t size = strlen(path) + sizeof ".partial";
    char *partial = malloc(size);
    int code = APP_FAILURE;

    if (partial == NULL) {
        app_error(program, "no memory for the page");
        return APP_FAILURE;
    }
    (void)snprintf(partial, size, "%s.partial", path);
    FILE *page = fopen(partial, "wb");
    bool good = page != NULL && put_page(page, figures, heading, picture_path);
    good = page != NULL && fclose(page) == 0 && good;
    if (good && rename(partial, path) == 0) {
        code = APP_OK;
    } else {
        app_error(program, "%s cannot be written: %s; give a name in a folder that can be written to", path,
                  strerror(errno));
        (void)unlink(partial);
    }
    free(partial);
    return code;
}
