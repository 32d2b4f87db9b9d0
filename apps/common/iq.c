#include "iq.h"

#include <math.h>
#include <string.h>

bool app_is_pipe(const char *path)
{
    return path != NULL && mb_endpoint_kind(path) == MB_ENDPOINT_PIPE;
}

int app_refuse(const app_program *program, mb_status status)
{
    bool rate = status == MB_ERROR_ARGUMENT && strncmp(mb_last_fault()->text, "rate_hz", 7) == 0;

    if (rate) {
        app_error(program, "the sample rate does not do: %s", mb_last_fault()->text);
        return APP_USAGE;
    }
    int code = app_fail(program, status);
    return status == MB_ERROR_ARGUMENT ? APP_USAGE : code;
}

static int parse_format(const app_program *program, const char *word, mb_iq_format *format)
{
    *format = MB_IQ_BY_ENDING;
    if (word != NULL && mb_iq_format_parse(word, format) != MB_OK) {
        return app_usage_error(program, "--format: %s", mb_last_fault()->text);
    }
    return APP_CONTINUE;
}

/* Whether the text ends with one of the endings of a list such as ".wav .flac". */
static bool has_known_ending(const char *path, const char *endings)
{
    const char *dot = strrchr(path, '.');

    if (dot == NULL) {
        return false;
    }
    size_t length = strlen(dot);
    for (const char *at = strstr(endings, dot); at != NULL; at = strstr(at + 1, dot)) {
        if (at[length] == '\0' || at[length] == ' ') {
            return true;
        }
    }
    return false;
}

/* What the library calls a field is an option here. */
static int refuse_open(const app_program *program, mb_status status, const char *path)
{
    bool unnamed = status == MB_ERROR_ARGUMENT;
    const char *name = app_is_pipe(path) ? "a pipe" : path;

    if (unnamed && strcmp(mb_last_fault()->field, "rate_hz") == 0) {
        return app_usage_error(program,
                               "--rate is missing: %s holds samples that do not tell "
                               "their rate; give it, such as --rate 240000",
                               name);
    }
    if (unnamed && strcmp(mb_last_fault()->field, "format") == 0) {
        return app_usage_error(program,
                               "--format is missing: %s holds raw samples; it is one of cf32 ci16 "
                               "ci8 cu8",
                               name);
    }
    if (unnamed && strcmp(mb_last_fault()->field, "channel") == 0) {
        return app_usage_error(program, "--iq-channel: %s", mb_last_fault()->text);
    }
    return app_refuse(program, status);
}

static int check_format(const app_program *program, const app_iq_input *input, mb_iq_format stated,
                        const mb_iq_reader *reader)
{
    mb_iq_format stored = mb_iq_reader_info(reader).format;

    if (stated != MB_IQ_BY_ENDING && stated != stored && !input->format_of_both) {
        return app_usage_error(program, "--format %s does not fit %s, which holds %s; leave it out",
                               mb_iq_format_text(stated), input->path, mb_iq_format_text(stored));
    }
    return APP_CONTINUE;
}

static int check_rate(const app_program *program, const app_iq_input *input, const mb_iq_reader *reader)
{
    const double tolerance = 1e-9;
    double stated_hz = mb_iq_reader_info(reader).rate_hz;

    if (input->rate_hz > 0.0 && fabs(input->rate_hz - stated_hz) > tolerance * stated_hz) {
        return app_usage_error(program,
                               "--rate %.10g Hz does not fit %s, which states %.10g Hz; leave it out",
                               input->rate_hz, input->path, stated_hz);
    }
    return APP_CONTINUE;
}

int app_iq_open(const app_program *program, const app_iq_input *input, mb_iq_reader **out)
{
    mb_iq_open open = mb_iq_open_default();
    mb_iq_format stated = MB_IQ_BY_ENDING;
    int code = parse_format(program, input->format, &stated);

    *out = NULL;
    if (code != APP_CONTINUE) {
        return code;
    }
    open.format = has_known_ending(input->path, mb_iq_endings()) ? MB_IQ_BY_ENDING : stated;
    open.rate_hz = input->rate_hz;
    open.rewindable = input->rewindable;
    open.channel = (size_t)input->channel;
    mb_status status = mb_iq_reader_open(input->path, &open, out);
    if (status != MB_OK) {
        return refuse_open(program, status, input->path);
    }
    code = check_format(program, input, stated, *out);
    if (code == APP_CONTINUE) {
        code = check_rate(program, input, *out);
    }
    if (code != APP_CONTINUE) {
        mb_iq_reader_close(*out);
        *out = NULL;
    }
    return code;
}

int app_iq_create(const app_program *program, const char *path, const char *format,
                  const mb_iq_writer_settings *settings, mb_iq_writer **out)
{
    mb_iq_writer_settings made = *settings;
    int code = parse_format(program, format, &made.format);

    *out = NULL;
    if (code != APP_CONTINUE) {
        return code;
    }
    mb_status status = mb_iq_writer_create(path, &made, out);
    return status == MB_OK ? APP_CONTINUE : refuse_open(program, status, path);
}

void app_input_remarks(const app_program *program, const app_common *common, const char *path,
                       uint64_t samples, uint64_t non_finite, uint64_t at_full_scale)
{
    const char *name = app_is_pipe(path) ? "the input" : path;
    double total = samples > 0 ? (double)samples : 1.0;

    if (non_finite > 0) {
        app_note(program, common, "%s holds %llu samples that are no numbers; they were taken as zero", name,
                 (unsigned long long)non_finite);
    }
    if ((double)at_full_scale > APP_CLIPPED_SHARE * total) {
        app_note(program, common,
                 "%s was clipped when it was recorded: %.2g %% of its samples stand at full scale; record it "
                 "again at a lower level",
                 name, 100.0 * (double)at_full_scale / total);
    }
}

void app_iq_remarks(const app_program *program, const app_common *common, const char *path,
                    const mb_iq_reader *reader)
{
    mb_iq_reader_state state = mb_iq_reader_state_of(reader);

    app_input_remarks(program, common, path, state.samples, state.non_finite, state.at_full_scale);
}

mb_iq_annotation app_iq_annotation(double low_hz, double high_hz)
{
    return (mb_iq_annotation){.has_edges = true,
                              .low_hz = low_hz,
                              .high_hz = high_hz,
                              .suppressed_carrier_dsb = true,
                              .label = "DSB-SC voice"};
}
