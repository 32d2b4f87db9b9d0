/* The table of options, its help, and what their arguments mean. */
#include "options.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void add(option_table *table, app_option option, option_role role)
{
    if (table->count < OPTIONS_MAX) {
        table->entry[table->count++] = (option_entry){.option = option, .role = role};
    }
}

static app_option text_option(const char *name, const char *argument, const char *meaning,
                              const char **target)
{
    return (app_option){
        .name = name, .argument = argument, .meaning = meaning, .kind = APP_TEXT, .target = (void *)target};
}

static app_option flag_option(const char *name, const char *meaning, bool *target)
{
    return (app_option){.name = name, .meaning = meaning, .kind = APP_FLAG, .target = target};
}

static void add_endpoints(const app_program *program, app_common *common, option_table *table)
{
    if ((program->common & APP_FROM) != 0) {
        add(table, text_option("from", "ENDPOINT", program->from, &common->from), ROLE_FILL);
    }
    if ((program->common & (APP_TO | APP_TO_MAYBE)) != 0) {
        add(table, text_option("to", "ENDPOINT", program->to, &common->to), ROLE_FILL);
    }
}

static void add_common(const app_program *program, app_common *common, option_table *table)
{
    add(table, text_option("config", "FILE", "config file, see mirrorband(5)", NULL), ROLE_CONFIG);
    add(table,
        text_option("set", "KEY=VALUE",
                    "set section.key over the file; repeatable; --set help lists all keys", NULL),
        ROLE_SET);
    if ((program->common & APP_SEED) != 0) {
        add(table, text_option("seed", "N", "start of all random numbers (1)", NULL), ROLE_SEED);
    }
    if ((program->common & APP_JSON) != 0) {
        add(table, flag_option("json", "results as JSON on standard output", &common->json), ROLE_FILL);
    }
    if ((program->common & APP_REPORT) != 0) {
        add(table, text_option("report", "FILE.html", "results as a page", &common->report), ROLE_FILL);
    }
    add(table, flag_option("quiet", "no progress, no remarks; errors only", &common->quiet), ROLE_FILL);
    add(table, flag_option("help", "this text", NULL), ROLE_HELP);
    add(table, flag_option("version", "name and version", NULL), ROLE_VERSION);
}

void options_collect(const app_program *program, app_common *common, option_table *table)
{
    table->count = 0;
    add_endpoints(program, common, table);
    for (size_t i = 0; i < program->option_count; i++) {
        add(table, program->options[i], ROLE_OWN);
    }
    add_common(program, common, table);
}

void options_help(const app_program *program, const option_table *table)
{
    (void)printf("%s\n\nUsage: %s", program->summary, program->name);
    if ((program->common & APP_FROM) != 0) {
        (void)printf(" --from ENDPOINT");
    }
    if ((program->common & APP_TO) != 0) {
        (void)printf(" --to ENDPOINT");
    }
    (void)printf(" [OPTION]...\n\n");
    for (size_t i = 0; i < table->count; i++) {
        const app_option *option = &table->entry[i].option;
        char left[64];
        (void)snprintf(left, sizeof left, "--%s%s%s", option->name, option->argument != NULL ? " " : "",
                       option->argument != NULL ? option->argument : "");
        (void)printf("  %-24s%s%s\n", left, strlen(left) >= 24 ? "\n                          " : "",
                     option->meaning);
    }
    if (program->example != NULL) {
        (void)printf("\nExample: %s\n", program->example);
    }
    (void)printf(
        "\nExit status: 0 done, 1 failed, 2 wrong command line or config, 3 no suppressed-carrier signal.\n"
        "More: man %s, man mirrorband\n",
        program->name);
}

/* A number without unit gets the unit given. */
static void with_unit(const char *text, const char *unit, char *out, size_t size)
{
    char *end = NULL;

    (void)strtod(text, &end);
    bool bare = end != text && *end == '\0';
    (void)snprintf(out, size, "%s%s%s", text, bare && unit[0] != '\0' ? " " : "", bare ? unit : "");
}

void option_key_text(const char *key, const char *text, char *out, size_t size)
{
    with_unit(text, mb_config_unit(key), out, size);
}

static int fill_quantity(const app_program *program, const app_option *option, const char *text)
{
    char quantity[128], low[64], high[64];
    double value = 0.0;

    with_unit(text, mb_unit_text(option->unit), quantity, sizeof quantity);
    if (mb_quantity_parse(quantity, option->unit, &value) != MB_OK) {
        return app_usage_error(program, "--%s: %s", option->name, mb_last_fault()->text);
    }
    bool bounded = option->low < option->high;
    if (bounded && !(value >= option->low && value <= option->high)) {
        mb_quantity_print(option->low, option->unit, low, sizeof low);
        mb_quantity_print(option->high, option->unit, high, sizeof high);
        return app_usage_error(program, "--%s: \"%s\" is out of range; allowed: %s to %s", option->name, text,
                               low, high);
    }
    *(double *)option->target = value;
    return APP_CONTINUE;
}

static int fill_whole(const app_program *program, const app_option *option, const char *text)
{
    char *end = NULL;

    errno = 0;
    unsigned long long value = strtoull(text, &end, 10);
    bool bounded = option->low < option->high;
    bool inside = !bounded || ((double)value >= option->low && (double)value <= option->high);
    if (text[0] >= '0' && text[0] <= '9' && *end == '\0' && errno == 0 && inside) {
        *(uint64_t *)option->target = value;
        return APP_CONTINUE;
    }
    if (bounded) {
        return app_usage_error(program, "--%s: \"%s\" must be a whole number from %.0f to %.0f", option->name,
                               text, option->low, option->high);
    }
    return app_usage_error(program, "--%s: \"%s\" must be a whole number from 0 to 18446744073709551615",
                           option->name, text);
}

int option_fill(const app_program *program, const app_option *option, const char *text)
{
    switch (option->kind) {
    case APP_FLAG:
        *(bool *)option->target = true;
        return APP_CONTINUE;
    case APP_TEXT:
        *(const char **)option->target = text;
        return APP_CONTINUE;
    case APP_QUANTITY:
        return fill_quantity(program, option, text);
    case APP_WHOLE:
        return fill_whole(program, option, text);
    case APP_KEY:
        break;
    }
    return APP_CONTINUE;
}
