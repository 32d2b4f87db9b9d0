#include "plot.h"

#include "path.h"

#include <string.h>

/* Width of a character in parts of the font size, as in the widest of the common sans-serif fonts. */
static double character_width(unsigned char first)
{
    if (first >= 0x80) {
        return 0.86;
    }
    if (strchr("ijl.,:;'|! ", first) != NULL) {
        return 0.36;
    }
    if (strchr("()[]/tfrI-\"", first) != NULL) {
        return 0.46;
    }
    if (strchr("mwMW@%", first) != NULL) {
        return 0.99;
    }
    return first >= 'A' && first <= 'Z' ? 0.76 : 0.65;
}

static size_t character_bytes(const char *at)
{
    size_t bytes = 1;

    while (((unsigned char)at[bytes] & 0xC0U) == 0x80U) {
        bytes++;
    }
    return bytes;
}

double mb_plot_text_width(const char *text, double size_px)
{
    double width = 0.0;

    for (const char *at = text; *at != '\0'; at += character_bytes(at)) {
        width += character_width((unsigned char)*at);
    }
    return width * size_px;
}

void mb_plot_text_fit(const char *text, double size_px, double width_px, char *out)
{
    static const char ellipsis[] = "\xe2\x80\xa6";
    double width = 0.86 * size_px;
    size_t kept = 0;

    mb_text_copy(out, MB_PLOT_TEXT, text);
    if (mb_plot_text_width(text, size_px) <= width_px) {
        return;
    }
    while (out[kept] != '\0') {
        size_t bytes = character_bytes(out + kept);
        width += character_width((unsigned char)out[kept]) * size_px;
        if (width > width_px || kept + bytes + sizeof ellipsis > MB_PLOT_TEXT) {
            break;
        }
        kept += bytes;
    }
    while (kept > 0 && out[kept - 1] == ' ') {
        kept--;
    }
    memcpy(out + kept, ellipsis, sizeof ellipsis);
}

static const char *entity(char sign)
{
    switch (sign) {
    case '&':
        return "&amp;";
    case '<':
        return "&lt;";
    case '>':
        return "&gt;";
    case '"':
        return "&quot;";
    default:
        return NULL;
    }
}

void mb_plot_text_escape(const char *text, char *out, size_t size)
{
    size_t used = 0;

    for (; *text != '\0'; text++) {
        const char *name = entity(*text);
        char plain[2] = {(unsigned char)*text < 0x20 ? ' ' : *text,
                         '\0'}; /* XML knows no control characters */
        const char *piece = name != NULL ? name : plain;
        size_t length = strlen(piece);
        if (used + length + 1 > size) {
            break;
        }
        memcpy(out + used, piece, length);
        used += length;
    }
    out[used] = '\0';
}
