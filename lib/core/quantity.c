#include "mirrorband/core.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* One way to write a unit. Of the entries of a kind the first with scale 1 is its base unit. */
typedef struct unit_name {
    mb_unit unit;
    const char *name;
    double scale;
} unit_name;

static const unit_name unit_names[] = {
    {MB_UNIT_HZ, "Hz", 1.0},         {MB_UNIT_HZ, "kHz", 1e3},     {MB_UNIT_HZ, "MHz", 1e6},
    {MB_UNIT_HZ, "GHz", 1e9},        {MB_UNIT_S, "s", 1.0},        {MB_UNIT_S, "ms", 1e-3},
    {MB_UNIT_S, "us", 1e-6},         {MB_UNIT_S, "min", 60.0},     {MB_UNIT_S, "h", 3600.0},
    {MB_UNIT_DB, "dB", 1.0},         {MB_UNIT_DBC, "dBc", 1.0},    {MB_UNIT_DBFS, "dBFS", 1.0},
    {MB_UNIT_HZ_PER_S, "Hz/s", 1.0}, {MB_UNIT_DEGREE, "deg", 1.0}, {MB_UNIT_PERCENT, "%", 1.0},
    {MB_UNIT_PPM, "ppm", 1.0},       {MB_UNIT_W, "W", 1.0},        {MB_UNIT_W, "mW", 1e-3},
    {MB_UNIT_W, "kW", 1e3},          {MB_UNIT_V, "V", 1.0},        {MB_UNIT_V, "mV", 1e-3},
};
enum { UNIT_NAME_COUNT = sizeof unit_names / sizeof unit_names[0] };

const char *mb_unit_text(mb_unit unit)
{
    for (size_t i = 0; i < UNIT_NAME_COUNT; i++) {
        if (unit_names[i].unit == unit && unit_names[i].scale == 1.0) {
            return unit_names[i].name;
        }
    }
    return "";
}

/* Reads digits, point and exponent without regard to the locale; returns the first character behind. */
static const char *parse_number(const char *text, double *value)
{
    const char *at = text;
    double sign = 1.0, mantissa = 0.0;
    int digits = 0, exponent = 0;

    if (*at == '+' || *at == '-') {
        sign = *at++ == '-' ? -1.0 : 1.0;
    }
    for (; isdigit((unsigned char)*at); at++, digits++) {
        mantissa = 10.0 * mantissa + (*at - '0');
    }
    if (*at == '.') {
        for (at++; isdigit((unsigned char)*at); at++, digits++, exponent--) {
            mantissa = 10.0 * mantissa + (*at - '0');
        }
    }
    if (digits == 0) {
        return NULL;
    }
    if ((*at == 'e' || *at == 'E') && (isdigit((unsigned char)at[1]) ||
                                       ((at[1] == '-' || at[1] == '+') && isdigit((unsigned char)at[2])))) {
        char *end = NULL;
        long written = strtol(at + 1, &end, 10);
        exponent += (int)fmax(-400.0, fmin(400.0, (double)written));
        at = end;
    }
    /* dividing by an exact power of ten rounds once, multiplying by its inverse would round twice */
    *value = sign * (exponent < 0 ? mantissa / pow(10.0, -exponent) : mantissa * pow(10.0, exponent));
    return at;
}

static void accepted_units(mb_unit unit, char *out, size_t size)
{
    size_t used = 0;

    out[0] = '\0';
    for (size_t i = 0; i < UNIT_NAME_COUNT && used < size; i++) {
        if (unit_names[i].unit == unit) {
            int made = snprintf(out + used, size - used, "%s%s", used > 0 ? ", " : "", unit_names[i].name);
            used += made > 0 ? (size_t)made : 0;
        }
    }
}

static mb_status wrong_unit(const char *text, mb_unit unit)
{
    char names[64];

    if (unit == MB_UNIT_NUMBER) {
        return mb_fail(MB_ERROR_CONFIG, "", "\"%s\" must be a plain number without a unit", text);
    }
    accepted_units(unit, names, sizeof names);
    return mb_fail(MB_ERROR_CONFIG, "", "\"%s\" must be a number with one of the units %s, such as \"1 %s\"",
                   text, names, mb_unit_text(unit));
}

static bool same_text(const char *text, size_t length, const char *name)
{
    return strlen(name) == length && strncmp(text, name, length) == 0;
}

mb_status mb_quantity_parse(const char *text, mb_unit unit, double *value)
{
    const char *start = text;
    double number = 0.0;

    while (isspace((unsigned char)*start)) {
        start++;
    }
    const char *at = parse_number(start, &number);
    if (at == NULL) {
        return wrong_unit(text, unit);
    }
    while (isspace((unsigned char)*at)) {
        at++;
    }
    size_t length = strlen(at);
    while (length > 0 && isspace((unsigned char)at[length - 1])) {
        length--;
    }
    if (length == 0 && (unit == MB_UNIT_NUMBER || number == 0.0)) {
        *value = number;
        return MB_OK;
    }
    for (size_t i = 0; i < UNIT_NAME_COUNT; i++) {
        if (unit_names[i].unit == unit && same_text(at, length, unit_names[i].name)) {
            double scale = unit_names[i].scale;
            *value = scale < 1.0 ? number / (1.0 / scale) : number * scale;
            return MB_OK;
        }
    }
    return wrong_unit(text, unit);
}

void mb_quantity_print(double value, mb_unit unit, char *out, size_t size)
{
    const unit_name *chosen = NULL;

    for (size_t i = 0; i < UNIT_NAME_COUNT; i++) {
        const unit_name *name = &unit_names[i];
        if (name->unit != unit || strcmp(name->name, "min") == 0 || strcmp(name->name, "h") == 0) {
            continue;
        }
        bool fits = fabs(value) >= name->scale;
        if (chosen == NULL || (fits && (name->scale > chosen->scale || fabs(value) < chosen->scale)) ||
            (value != 0.0 && !fits && fabs(value) < chosen->scale && name->scale < chosen->scale)) {
            chosen = name;
        }
    }
    if (chosen == NULL) {
        (void)snprintf(out, size, "%.12g", value);
    } else {
        (void)snprintf(out, size, "%.12g %s", value / chosen->scale, chosen->name);
    }
}
