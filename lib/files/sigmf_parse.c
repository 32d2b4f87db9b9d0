#include "sigmf.h"

#include "json_fields.h"
#include "path.h"

#include <ctype.h>
#include <string.h>

static const char *const DATATYPES[] = {NULL, "cf32_le", "ci16_le", "ci8", "cu8"};

const char *mb_sigmf_datatype(mb_iq_format format)
{
    return DATATYPES[format];
}

static mb_status check_version(const json_t *global, const mb_json_place *at)
{
    char version[32];
    mb_status status = mb_json_text(global, at, "core:version", version, sizeof version);

    if (status != MB_OK) {
        return status;
    }
    if (version[0] == '\0') {
        return mb_json_wrong(at, "core:version", "is missing");
    }
    if (!isdigit((unsigned char)version[0]) || strchr(version, '.') == NULL) {
        return mb_json_wrong(at, "core:version", "must be a version such as 1.2.5");
    }
    if ((version[0] != '0' && version[0] != '1') || version[1] != '.') {
        return mb_fail(MB_ERROR_UNSUPPORTED, at->name,
                       "%s: SigMF version %s cannot be read, only 1.x; convert it", at->name, version);
    }
    return MB_OK;
}

static mb_status check_datatype(const json_t *global, const mb_json_place *at, mb_iq_format *format)
{
    char datatype[32];
    mb_status status = mb_json_text(global, at, "core:datatype", datatype, sizeof datatype);

    if (status != MB_OK) {
        return status;
    }
    if (datatype[0] == '\0') {
        return mb_json_wrong(at, "core:datatype", "is missing");
    }
    for (int i = MB_IQ_CF32; i <= MB_IQ_CU8; i++) {
        if (strcmp(datatype, DATATYPES[i]) == 0) {
            *format = (mb_iq_format)i;
            return MB_OK;
        }
    }
    return mb_fail(
        MB_ERROR_UNSUPPORTED, at->name,
        "%s: core:datatype \"%s\" is not supported; convert the samples to one of cf32_le ci16_le ci8 cu8",
        at->name, datatype);
}

/* Refuses recordings whose samples are not simply those of the .sigmf-data file beside. */
static mb_status check_dataset(const json_t *global, const mb_json_place *at)
{
    if (json_is_true(json_object_get(global, "core:metadata_only"))) {
        return mb_fail(MB_ERROR_UNSUPPORTED, at->name,
                       "%s states that it comes without samples; get those too", at->name);
    }
    const char *dataset = json_string_value(json_object_get(global, "core:dataset"));
    if (dataset != NULL) {
        return mb_fail(
            MB_ERROR_UNSUPPORTED, at->name,
            "%s keeps its samples in another file, %s; rename that to .sigmf-data or read it as raw samples",
            at->name, dataset);
    }
    return MB_OK;
}

static mb_status parse_global(const json_t *global, const mb_json_place *at, mb_sigmf *out)
{
    mb_status status = MB_OK;
    uint64_t channels = 1;
    bool there = false;

    (void)((status = check_version(global, at)) == MB_OK &&
           (status = check_datatype(global, at, &out->format)) == MB_OK &&
           (status = check_dataset(global, at)) == MB_OK &&
           (status = mb_json_number(global, at, "core:sample_rate", 1.0, 1e12, &out->rate_hz, &there)) ==
               MB_OK &&
           (status = mb_json_whole(global, at, "core:num_channels", &channels, &there)) == MB_OK &&
           (status = mb_json_text(global, at, "core:description", out->description,
                                  sizeof out->description)) == MB_OK &&
           (status = mb_json_text(global, at, "core:author", out->author, sizeof out->author)) == MB_OK &&
           (status = mb_json_text(global, at, "core:sha512", out->sha512, sizeof out->sha512)) == MB_OK);
    if (status == MB_OK && (channels < 1 || channels > 64)) {
        return mb_json_wrong(at, "core:num_channels", "must be 1 to 64");
    }
    if (status == MB_OK && out->sha512[0] != '\0' && strspn(out->sha512, "0123456789abcdefABCDEF") != 128) {
        return mb_json_wrong(at, "core:sha512", "must be 128 hexadecimal digits");
    }
    out->channels = (size_t)channels;
    return status;
}

static mb_status parse_capture(const json_t *item, const mb_json_place *at, mb_iq_capture *out)
{
    uint64_t header = 0;
    bool there = false;
    mb_status status = mb_json_whole(item, at, "core:sample_start", &out->sample_start, &there);

    if (status == MB_OK && !there) {
        return mb_json_wrong(at, "core:sample_start", "is missing");
    }
    if (status == MB_OK) {
        status =
            mb_json_number(item, at, "core:frequency", -1e12, 1e12, &out->frequency_hz, &out->has_frequency);
    }
    if (status == MB_OK) {
        status = mb_json_text(item, at, "core:datetime", out->datetime, sizeof out->datetime);
    }
    if (status == MB_OK) {
        status = mb_json_whole(item, at, "core:header_bytes", &header, &there);
    }
    if (status == MB_OK && header > 0) {
        return mb_fail(
            MB_ERROR_UNSUPPORTED, at->name,
            "%s: captures[%zu] has core:header_bytes in the midst of the samples, which is not supported; "
            "convert the recording",
            at->name, at->index);
    }
    return status;
}

static bool says(const json_t *object, const char *key, const char *word)
{
    const char *value = json_string_value(json_object_get(object, key));

    return value != NULL && strcmp(value, word) == 0;
}

static mb_status parse_annotation(const json_t *item, const mb_json_place *at, mb_iq_annotation *out)
{
    const json_t *detail = json_object_get(item, "signal:detail");
    bool there = false, has_low = false, has_high = false;
    mb_status status = mb_json_whole(item, at, "core:sample_start", &out->sample_start, &there);

    if (status == MB_OK && !there) {
        return mb_json_wrong(at, "core:sample_start", "is missing");
    }
    (void)(status == MB_OK &&
           (status = mb_json_whole(item, at, "core:sample_count", &out->sample_count, &there)) == MB_OK &&
           (status = mb_json_number(item, at, "core:freq_lower_edge", -1e12, 1e12, &out->low_hz, &has_low)) ==
               MB_OK &&
           (status = mb_json_number(item, at, "core:freq_upper_edge", -1e12, 1e12, &out->high_hz,
                                    &has_high)) == MB_OK &&
           (status = mb_json_text(item, at, "core:label", out->label, sizeof out->label)) == MB_OK &&
           (status = mb_json_text(item, at, "core:comment", out->comment, sizeof out->comment)) == MB_OK);
    if (status == MB_OK && has_low != has_high) {
        return mb_json_wrong(at, has_low ? "core:freq_upper_edge" : "core:freq_lower_edge", "is missing");
    }
    out->has_edges = has_low;
    out->suppressed_carrier_dsb = says(detail, "type", "analog") && says(detail, "mod_class", "dsb") &&
                                  says(detail, "carrier_variant", "suppressed_carrier");
    return status;
}

static mb_status parse_captures(const json_t *list, const char *name, mb_sigmf *out)
{
    size_t count = json_array_size(list);
    mb_status status = MB_OK;

    out->captures = mb_allocate(count, sizeof *out->captures);
    if (out->captures == NULL) {
        return mb_fail_memory("SigMF captures");
    }
    for (size_t i = 0; i < count && status == MB_OK; i++) {
        const mb_json_place at = {name, "captures", i};
        status =
            json_is_object(json_array_get(list, i)) ? MB_OK : mb_json_wrong(&at, "", "must be an object");
        if (status == MB_OK) {
            status = parse_capture(json_array_get(list, i), &at, &out->captures[i]);
        }
        if (status == MB_OK && i > 0 && out->captures[i].sample_start < out->captures[i - 1].sample_start) {
            status = mb_json_wrong(&at, "core:sample_start", "is less than that of the capture before");
        }
        out->capture_count = i + 1;
    }
    return status;
}

static mb_status parse_annotations(const json_t *list, const char *name, mb_sigmf *out)
{
    size_t count = json_array_size(list);
    mb_status status = MB_OK;

    out->annotations = mb_allocate(count, sizeof *out->annotations);
    if (out->annotations == NULL) {
        return mb_fail_memory("SigMF annotations");
    }
    for (size_t i = 0; i < count && status == MB_OK; i++) {
        const mb_json_place at = {name, "annotations", i};
        status =
            json_is_object(json_array_get(list, i)) ? MB_OK : mb_json_wrong(&at, "", "must be an object");
        if (status == MB_OK) {
            status = parse_annotation(json_array_get(list, i), &at, &out->annotations[i]);
        }
        out->annotation_count = i + 1;
    }
    return status;
}

static mb_status parse_root(const json_t *root, const char *name, mb_sigmf *out)
{
    const json_t *global = json_object_get(root, "global");
    const json_t *captures = json_object_get(root, "captures");
    const json_t *annotations = json_object_get(root, "annotations");
    const mb_json_place at = {name, "global", SIZE_MAX};

    if (!json_is_object(global) || !json_is_array(captures) || !json_is_array(annotations)) {
        const char *part = !json_is_object(global)    ? "global"
                           : !json_is_array(captures) ? "captures"
                                                      : "annotations";
        return mb_fail(MB_ERROR_FORMAT, name,
                       "%s is no SigMF metadata: its part \"%s\" is missing or of the wrong kind", name,
                       part);
    }
    mb_status status = parse_global(global, &at, out);
    if (status == MB_OK) {
        status = parse_captures(captures, name, out);
    }
    return status == MB_OK ? parse_annotations(annotations, name, out) : status;
}

mb_status mb_sigmf_parse(const char *text, size_t length, const char *name, mb_sigmf *out)
{
    json_error_t error;

    memset(out, 0, sizeof *out);
    json_t *root = json_loadb(text, length, JSON_REJECT_DUPLICATES, &error);
    if (root == NULL) {
        return mb_fail(MB_ERROR_FORMAT, name, "%s:%d:%d: damaged JSON: %s; correct the file or record again",
                       name, error.line, error.column, error.text);
    }
    mb_status status = parse_root(root, name, out);
    json_decref(root);
    return status;
}

static mb_status beyond(const char *list, size_t index, uint64_t reach, uint64_t samples,
                        const char *meta_name, const char *data_name)
{
    return mb_fail(
        MB_ERROR_FORMAT, data_name,
        "%s is truncated: it holds %llu samples, but %s[%zu] of %s reaches to sample %llu; copy or record it "
        "again",
        data_name, (unsigned long long)samples, list, index, meta_name, (unsigned long long)reach);
}

mb_status mb_sigmf_check_length(const mb_sigmf *meta, uint64_t samples, const char *meta_name,
                                const char *data_name)
{
    for (size_t i = 0; i < meta->capture_count; i++) {
        if (meta->captures[i].sample_start > samples) {
            return beyond("captures", i, meta->captures[i].sample_start, samples, meta_name, data_name);
        }
    }
    for (size_t i = 0; i < meta->annotation_count; i++) {
        const mb_iq_annotation *annotation = &meta->annotations[i];
        uint64_t start = annotation->sample_start, count = annotation->sample_count;
        if (start > samples || count > samples - start) {
            return beyond("annotations", i, start + count, samples, meta_name, data_name);
        }
    }
    return MB_OK;
}

void mb_sigmf_clear(mb_sigmf *meta)
{
    mb_release(meta->captures);
    mb_release(meta->annotations);
    memset(meta, 0, sizeof *meta);
}
