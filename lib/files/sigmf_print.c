#include "sigmf.h"

#include "path.h"

#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* A number as JSON: whole ones without a decimal point, as the schema and other readers like them. */
static json_t *number(double value)
{
    if (value == floor(value) && fabs(value) < 9e15) {
        return json_integer((json_int_t)value);
    }
    return json_real(value);
}

/* Text that is not UTF-8 cannot stand in JSON: then without it. */
static int set_text(json_t *object, const char *key, const char *text)
{
    if (text[0] == '\0') {
        return 0;
    }
    json_t *value = json_string(text);
    return json_object_set_new(object, key, value != NULL ? value : json_string("(text was not UTF-8)"));
}

static json_t *global_part(const mb_sigmf *meta)
{
    char recorder[64];
    json_t *global = json_object();

    (void)snprintf(recorder, sizeof recorder, "Mirrorband %s", mb_version());
    int bad = json_object_set_new(global, "core:datatype", json_string(mb_sigmf_datatype(meta->format)));
    bad |= json_object_set_new(global, "core:sample_rate", number(meta->rate_hz));
    bad |= json_object_set_new(global, "core:version", json_string("1.2.5"));
    bad |= json_object_set_new(global, "core:num_channels", json_integer(1));
    bad |= json_object_set_new(global, "core:recorder", json_string(recorder));
    bad |= set_text(global, "core:description", meta->description);
    bad |= set_text(global, "core:author", meta->author);
    bad |= set_text(global, "core:sha512", meta->sha512);
    for (size_t i = 0; i < meta->annotation_count; i++) {
        if (meta->annotations[i].suppressed_carrier_dsb) {
            bad |= json_object_set_new(
                global, "core:extensions",
                json_pack("[{s:s, s:s, s:b}]", "name", "signal", "version", "1.0.0", "optional", 1));
            break;
        }
    }
    if (bad != 0) {
        json_decref(global);
        return NULL;
    }
    return global;
}

static int add_capture(json_t *list, const mb_iq_capture *capture)
{
    json_t *item = json_object();
    int bad = json_object_set_new(item, "core:sample_start", json_integer((json_int_t)capture->sample_start));

    if (capture->has_frequency) {
        bad |= json_object_set_new(item, "core:frequency", number(capture->frequency_hz));
    }
    bad |= set_text(item, "core:datetime", capture->datetime);
    return bad | json_array_append_new(list, item);
}

static int add_annotation(json_t *list, const mb_iq_annotation *annotation, uint64_t samples)
{
    uint64_t start = annotation->sample_start < samples ? annotation->sample_start : samples;
    uint64_t count = annotation->sample_count;
    json_t *item = json_object();

    if (count == 0 || count > samples - start) {
        count = samples - start;
    }
    int bad = json_object_set_new(item, "core:sample_start", json_integer((json_int_t)start));
    bad |= json_object_set_new(item, "core:sample_count", json_integer((json_int_t)count));
    if (annotation->has_edges) {
        bad |= json_object_set_new(item, "core:freq_lower_edge", number(annotation->low_hz));
        bad |= json_object_set_new(item, "core:freq_upper_edge", number(annotation->high_hz));
    }
    bad |= set_text(item, "core:label", annotation->label);
    bad |= set_text(item, "core:comment", annotation->comment);
    if (annotation->suppressed_carrier_dsb) {
        bad |= json_object_set_new(item, "signal:detail",
                                   json_pack("{s:s, s:s, s:s}", "type", "analog", "mod_class", "dsb",
                                             "carrier_variant", "suppressed_carrier"));
    }
    return bad | json_array_append_new(list, item);
}

static int compare_starts(const void *a, const void *b)
{
    const mb_iq_annotation *first = a, *second = b;

    return (first->sample_start > second->sample_start) - (first->sample_start < second->sample_start);
}

static int write_piece(const char *text, size_t length, void *user)
{
    return mb_sink_write(user, text, length) == MB_OK ? 0 : -1;
}

mb_status mb_sigmf_print(const mb_sigmf *meta, uint64_t samples, mb_sink *sink)
{
    json_t *global = global_part(meta), *captures = json_array(), *annotations = json_array();
    int bad = 0;

    if (meta->annotation_count > 1) {
        qsort(meta->annotations, meta->annotation_count, sizeof *meta->annotations, compare_starts);
    }
    for (size_t i = 0; i < meta->capture_count; i++) {
        bad |= add_capture(captures, &meta->captures[i]);
    }
    for (size_t i = 0; i < meta->annotation_count; i++) {
        bad |= add_annotation(annotations, &meta->annotations[i], samples);
    }
    json_t *root =
        json_pack("{s:o, s:o, s:o}", "global", global, "captures", captures, "annotations", annotations);
    if (root == NULL || bad != 0) {
        json_decref(root);
        return mb_fail_memory("SigMF metadata");
    }
    int result = json_dump_callback(root, write_piece, sink, JSON_INDENT(4));
    json_decref(root);
    if (result == 0) {
        return mb_sink_write(sink, "\n", 1);
    }
    return mb_sink_status(sink) != MB_OK ? mb_sink_status(sink) : mb_fail_memory("SigMF metadata");
}
