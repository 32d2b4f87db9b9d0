/* The command line: options in any order, then the config file, --set, and options that stand for a key. */
#include "options.h"

#include <getopt.h>
#include <stdio.h>
#include <string.h>

#include "endpoint.h"
#include "signals.h"

/* One command line being read. */
typedef struct command_line {
    const app_program *program;
    app_common *common;
    option_table table;
    const char *config_path;
    bool list_keys; /* --set help */
    bool ended;     /* --help or --version was answered */
} command_line;

static void long_options(const option_table *table, struct option *out)
{
    for (size_t i = 0; i < table->count; i++) {
        const app_option *option = &table->entry[i].option;
        out[i] = (struct option){.name = option->name,
                                 .has_arg = option->argument != NULL ? required_argument : no_argument,
                                 .val = (int)i + 1000};
    }
    out[table->count] = (struct option){0};
}

/* getopt found something that is no option of ours, or an option without its argument. */
static int unknown_option(const command_line *line, char **argv, int code)
{
    const char *text = argv[optind - 1];

    if (code == ':') {
        return app_usage_error(line->program, "%s needs an argument", text);
    }
    if (optopt >= 1000 && (size_t)(optopt - 1000) < line->table.count) {
        return app_usage_error(line->program, "--%s takes no argument",
                               line->table.entry[optopt - 1000].option.name);
    }
    if (optopt == 0) {
        return app_usage_error(line->program, "%s is not an option of %s, or the beginning of several", text,
                               line->program->name);
    }
    return app_usage_error(line->program,
                           "-%c is not an option of %s; options are written out, such as --from", optopt,
                           line->program->name);
}

static int take_set(command_line *line, const char *text)
{
    if (strcmp(text, "help") == 0) {
        line->list_keys = true;
    }
    return APP_CONTINUE;
}

static int take_option(command_line *line, option_entry *entry, const char *text)
{
    if (entry->given && entry->role != ROLE_SET) {
        return app_usage_error(line->program, "--%s is given twice", entry->option.name);
    }
    entry->given = true;
    entry->text = text;
    switch (entry->role) {
    case ROLE_CONFIG:
        line->config_path = text;
        return APP_CONTINUE;
    case ROLE_SET:
        return take_set(line, text);
    case ROLE_SEED:
        line->common->has_seed = true;
        return option_fill(line->program,
                           &(app_option){.name = "seed", .kind = APP_WHOLE, .target = &line->common->seed},
                           text);
    case ROLE_HELP:
        options_help(line->program, &line->table);
        line->ended = true;
        return APP_OK;
    case ROLE_VERSION:
        (void)printf("%s (Mirrorband) %s\n", line->program->name, mb_version());
        line->ended = true;
        return APP_OK;
    case ROLE_OWN:
    case ROLE_FILL:
        break;
    }
    return option_fill(line->program, &entry->option, text);
}

static int read_options(command_line *line, int argc, char **argv)
{
    struct option options[OPTIONS_MAX + 1];

    long_options(&line->table, options);
    optind = 0; /* from the start, also when a test comes a second time */
    opterr = 0;
    for (;;) {
        int code = getopt_long(argc, argv, ":", options, NULL);
        if (code == -1) {
            break;
        }
        if (code == '?' || code == ':') {
            return unknown_option(line, argv, code);
        }
        int status = take_option(line, &line->table.entry[code - 1000], optarg);
        if (status != APP_CONTINUE) {
            return status;
        }
    }
    if (optind < argc) {
        return app_usage_error(line->program,
                               "\"%s\" is not an option; files are named with options such as --from",
                               argv[optind]);
    }
    return APP_CONTINUE;
}

/* Reads the options a second time for --set alone: order among several counts, and the config file goes
 * first. */
static void apply_sets(command_line *line, int argc, char **argv)
{
    struct option options[OPTIONS_MAX + 1];
    int code = 0;

    long_options(&line->table, options);
    optind = 0;
    while ((code = getopt_long(argc, argv, ":", options, NULL)) != -1) {
        if (code >= 1000 && line->table.entry[code - 1000].role == ROLE_SET) {
            (void)mb_config_set(line->common->config, optarg);
        }
    }
}

static void apply_keys(command_line *line)
{
    for (size_t i = 0; i < line->table.count; i++) {
        const option_entry *entry = &line->table.entry[i];
        char text[128], assignment[256];
        if (entry->role == ROLE_OWN && entry->option.kind == APP_KEY && entry->given) {
            option_key_text(entry->option.key, entry->text == NULL ? "on" : entry->text, text, sizeof text);
            (void)snprintf(assignment, sizeof assignment, "%s=%s", entry->option.key, text);
            (void)mb_config_set(line->common->config, assignment);
        }
    }
}

static int config_errors(const command_line *line, mb_status status)
{
    const mb_config *config = line->common->config;
    size_t count = mb_config_error_count(config);

    if (status != MB_ERROR_CONFIG || count == 0) {
        return app_fail(line->program, status);
    }
    for (size_t i = 0; i < count; i++) {
        app_error(line->program, "%s", mb_config_error(config, i));
    }
    return APP_USAGE;
}

static int read_config(command_line *line, int argc, char **argv)
{
    mb_status status = mb_config_create(&line->common->config);

    if (status == MB_OK && line->config_path != NULL) {
        status = mb_config_read_file(line->common->config, line->config_path);
    }
    if (status == MB_ERROR_FILE) {
        (void)app_fail(line->program, status);
        return APP_USAGE;
    }
    if (status != MB_OK && status != MB_ERROR_CONFIG) {
        return app_fail(line->program, status);
    }
    apply_sets(line, argc, argv);
    apply_keys(line);
    status = mb_config_check(line->common->config);
    return status == MB_OK ? APP_CONTINUE : config_errors(line, status);
}

static int check_endpoints(const command_line *line)
{
    const app_program *program = line->program;
    const app_common *common = line->common;

    if ((program->common & APP_FROM) != 0 && common->from == NULL) {
        return app_usage_error(program, "--from is missing: where the input comes from");
    }
    if ((program->common & APP_TO) != 0 && common->to == NULL) {
        return app_usage_error(program, "--to is missing: where the output goes");
    }
    if (common->json && common->to != NULL && strcmp(common->to, "-") == 0) {
        return app_usage_error(program,
                               "--json and --to - would both write to standard output; give --to a file");
    }
    int status = app_endpoint_check(program, "--from", common->from);
    if (status == APP_CONTINUE) {
        status = app_endpoint_check(program, "--to", common->to);
    }
    const app_file files[] = {
        {"--from", common->from, false}, {"--to", common->to, true}, {"--report", common->report, true}};
    return status == APP_CONTINUE ? app_files_check(program, files, 3) : status;
}

static int list_keys(const command_line *line)
{
    mb_status status = mb_config_help(stdout);

    return status == MB_OK ? APP_OK : app_fail(line->program, status);
}

int app_parse(const app_program *program, int argc, char **argv, app_common *common)
{
    command_line line = {.program = program, .common = common};

    *common = (app_common){.seed = 1};
    app_signals_install();
    options_collect(program, common, &line.table);
    int status = read_options(&line, argc, argv);
    if (line.ended) {
        return fflush(stdout) == 0 ? status : APP_FAILURE;
    }
    if (status != APP_CONTINUE) {
        return status;
    }
    if (line.list_keys) {
        return list_keys(&line);
    }
    status = check_endpoints(&line);
    status = status == APP_CONTINUE ? read_config(&line, argc, argv) : status;
    if (status == APP_CONTINUE) {
        app_log_begin(program, common);
    }
    return status;
}

void app_finish(app_common *common)
{
    app_log_end();
    mb_config_destroy(common->config);
    common->config = NULL;
}
