#include "json.h"

#include <errno.h>
#include <math.h>
#include <string.h>

/* A double holds 15 decimal digits exactly: a rounded number prints as it was rounded. */
enum { REAL_DIGITS = 15, DECIMALS_MAX = 12 };

json_t *app_json_number(double value, int decimals)
{
    double scale = pow(10.0, decimals < 0 ? 0 : decimals > DECIMALS_MAX ? DECIMALS_MAX : decimals);

    if (!isfinite(value)) {
        return json_null();
    }
    double rounded = round(value * scale) / scale;
    return json_real(isfinite(rounded) ? rounded + 0.0 : value); /* + 0.0: no minus before a zero */
}

/* Memory out is remembered in the object itself: app_json_print refuses one without "program" later. */
static void set(json_t *object, const char *name, json_t *value)
{
    if (object != NULL && json_object_set_new(object, name, value) != 0) {
        (void)json_object_clear(object);
    }
}

void app_json_set(json_t *object, const char *name, double value, int decimals)
{
    set(object, name, app_json_number(value, decimals));
}

void app_json_set_text(json_t *object, const char *name, const char *text)
{
    set(object, name, text == NULL ? json_null() : json_string(text));
}

void app_json_set_whole(json_t *object, const char *name, uint64_t value)
{
    set(object, name, json_integer((json_int_t)value));
}

void app_json_set_flag(json_t *object, const char *name, bool value)
{
    set(object, name, json_boolean(value));
}

json_t *app_json_begin(const app_program *program)
{
    json_t *object = json_object();

    app_json_set_text(object, "program", program->name);
    app_json_set_text(object, "version", mb_version());
    return object;
}

static int cannot_write(const app_program *program)
{
    app_error(program, "the result cannot be written to standard output: %s", strerror(errno));
    return APP_FAILURE;
}

int app_json_print(const app_program *program, json_t *object, FILE *stream)
{
    if (object == NULL || json_object_get(object, "program") == NULL) {
        json_decref(object);
        app_error(program, "no memory for the result");
        return APP_FAILURE;
    }
    int failed = json_dumpf(object, stream, JSON_INDENT(2) | JSON_REAL_PRECISION(REAL_DIGITS));
    json_decref(object);
    if (failed != 0 || fputc('\n', stream) == EOF || fflush(stream) != 0) {
        return cannot_write(program);
    }
    return APP_OK;
}

int app_flush(const app_program *program)
{
    if (fflush(stdout) != 0 || ferror(stdout)) {
        return cannot_write(program);
    }
    return APP_OK;
}
