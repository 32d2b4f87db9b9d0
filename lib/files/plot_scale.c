#include "plot.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

enum { LABEL_PX = 12 };

void mb_plot_scale_range(const plot_axis_texts *axis, double low, double high, plot_scale *scale)
{
    bool given = isfinite(axis->low) && isfinite(axis->high);

    scale->low = given ? axis->low : low;
    scale->high = given ? axis->high : high;
    if (!(scale->low <= scale->high)) {
        scale->low = 0.0;
        scale->high = 1.0;
    }
    double size = fmax(fabs(scale->low), fabs(scale->high));
    if (scale->high - scale->low <= 1e-12 * size || size == 0.0) {
        double half = size > 0.0 ? 0.05 * size : 1.0;
        scale->low -= half;
        scale->high += half;
    }
}

/* ---- units ---- */

typedef struct prefix {
    double from; /* largest magnitude from which it is used */
    double display;
    const char *text;
} prefix;

static bool takes_prefix(const char *unit)
{
    static const char *const units[] = {"Hz", "W", "V", "A", "m", "Hz/s", "s"};

    for (size_t i = 0; i < sizeof units / sizeof *units; i++) {
        if (strcmp(unit, units[i]) == 0) {
            return true;
        }
    }
    return false;
}

static const prefix *choose_prefix(double size, bool seconds)
{
    static const prefix prefixes[] = {{1e9, 1e-9, "G"}, {1e6, 1e-6, "M"}, {1e4, 1e-3, "k"},
                                      {0.1, 1.0, ""},   {1e-4, 1e3, "m"}, {0.0, 1e6, "\xc2\xb5"}};
    size_t i = seconds ? 3 : 0;

    while (size < prefixes[i].from) {
        i++;
    }
    return &prefixes[i];
}

/* Power of ten in steps of three for numbers too long to print as they are; 0 for most. */
static int exponent_of(double size)
{
    if (size == 0.0 || (size >= 1e-3 && size < 1e6)) {
        return 0;
    }
    return 3 * (int)floor(log10(size) / 3.0);
}

static void print_power(int exponent, char *out, size_t size)
{
    static const char *const digits[] = {"\xe2\x81\xb0", "\xc2\xb9",     "\xc2\xb2",     "\xc2\xb3",
                                         "\xe2\x81\xb4", "\xe2\x81\xb5", "\xe2\x81\xb6", "\xe2\x81\xb7",
                                         "\xe2\x81\xb8", "\xe2\x81\xb9"};
    char plain[16];
    size_t used = (size_t)snprintf(out, size, "10%s", exponent < 0 ? "\xe2\x81\xbb" : "");

    (void)snprintf(plain, sizeof plain, "%d", exponent < 0 ? -exponent : exponent);
    for (const char *at = plain; *at != '\0' && used + 4 < size; at++) {
        used += (size_t)snprintf(out + used, size - used, "%s", digits[*at - '0']);
    }
}

/* Settles in what unit the labels are printed, and the caption that says so. */
static void choose_unit(const plot_axis_texts *axis, plot_scale *scale)
{
    double size = fmax(fabs(scale->low), fabs(scale->high));
    char unit[96], power[48];

    scale->display = 1.0;
    (void)snprintf(unit, sizeof unit, "%s", axis->unit);
    if (takes_prefix(axis->unit)) {
        const prefix *chosen = choose_prefix(size, strcmp(axis->unit, "s") == 0);
        scale->display = chosen->display;
        (void)snprintf(unit, sizeof unit, "%s%s", chosen->text, axis->unit);
    } else if (exponent_of(size) != 0) {
        int exponent = exponent_of(size);
        scale->display = pow(10.0, -exponent);
        print_power(exponent, power, sizeof power);
        (void)snprintf(unit, sizeof unit, "%s%s%s", power, axis->unit[0] != '\0' ? " " : "", axis->unit);
    }
    if (unit[0] == '\0') {
        (void)snprintf(scale->caption, sizeof scale->caption, "%s", axis->label);
    } else if (axis->label[0] == '\0') {
        (void)snprintf(scale->caption, sizeof scale->caption, "%s", unit);
    } else {
        (void)snprintf(scale->caption, sizeof scale->caption, "%.*s (%s)", 90, axis->label, unit);
    }
}

/* ---- ticks ---- */

size_t mb_plot_scale_values(const plot_scale *scale, double *values)
{
    double first = ceil(scale->low / scale->step - 1e-6), last = floor(scale->high / scale->step + 1e-6);
    size_t count = 0;

    for (double k = first; k <= last && count < MB_PLOT_TICKS_MAX; k += 1.0) {
        values[count++] = k * scale->step;
    }
    return count;
}

void mb_plot_scale_label(const plot_scale *scale, double value, char *out)
{
    char plain[40];
    double shown = value * scale->display;

    if (fabs(shown) < 0.5 * pow(10.0, -scale->decimals)) {
        shown = 0.0;
    }
    (void)snprintf(plain, sizeof plain, "%.*f", scale->decimals, shown);
    (void)snprintf(out, 48, "%s%s", plain[0] == '-' ? "\xe2\x88\x92" : "",
                   plain[0] == '-' ? plain + 1 : plain);
}

static double widest_label(const plot_scale *scale)
{
    double values[MB_PLOT_TICKS_MAX], widest = 0.0;
    size_t count = mb_plot_scale_values(scale, values);

    for (size_t i = 0; i < count; i++) {
        char label[48];
        mb_plot_scale_label(scale, values[i], label);
        widest = fmax(widest, mb_plot_text_width(label, LABEL_PX));
    }
    return widest;
}

/* Sets the step to 1, 2 or 5 times a power of ten of the unit shown, with the decimals it needs. */
static void set_step(plot_scale *scale, int index)
{
    static const double factors[] = {1.0, 2.0, 5.0};
    int power = (int)floor(index / 3.0);
    double shown = factors[index - 3 * power] * pow(10.0, power);

    scale->step = shown / scale->display;
    scale->decimals = power < 0 ? (power < -9 ? 9 : -power) : 0;
}

/* Whether ticks of this step have room for their labels. */
static bool step_fits(const plot_scale *scale, double length_px, bool vertical)
{
    double gap_px = length_px * scale->step / (scale->high - scale->low);

    return gap_px >= (vertical ? 30.0 : fmax(40.0, widest_label(scale) + 16.0));
}

/* An x axis from the data that ends just short of a tick is drawn out to it. */
static void reach_ticks(plot_scale *scale)
{
    double slack = 0.03 * (scale->high - scale->low);
    double below = floor(scale->low / scale->step) * scale->step;
    double above = ceil(scale->high / scale->step) * scale->step;

    scale->low = scale->low - below <= slack ? below : scale->low;
    scale->high = above - scale->high <= slack ? above : scale->high;
}

void mb_plot_scale_ticks(const plot_axis_texts *axis, double length_px, bool vertical, plot_scale *scale)
{
    bool automatic = !(isfinite(axis->low) && isfinite(axis->high)), widen = automatic && vertical;
    plot_scale tried = *scale;

    choose_unit(axis, scale);
    int index =
        (int)floor(3.0 * log10((scale->high - scale->low) * scale->display / (MB_PLOT_TICKS_MAX - 4)));
    for (int last = index + 24; index < last; index++) {
        tried = *scale;
        set_step(&tried, index);
        if (widen) {
            tried.low = floor(tried.low / tried.step + 1e-9) * tried.step;
            tried.high = ceil(tried.high / tried.step - 1e-9) * tried.step;
        }
        if ((tried.high - tried.low) / tried.step <= MB_PLOT_TICKS_MAX - 1 &&
            step_fits(&tried, length_px, vertical)) {
            break;
        }
    }
    *scale = tried;
    if (automatic && !vertical) {
        reach_ticks(scale);
    }
}
