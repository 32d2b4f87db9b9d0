/* Memory that cannot be had is a status, at whichever allocation it fails; nothing leaks, no partial file
 * stays. */
#include "samples.h"

typedef struct allowance {
    int left;
    bool refused;
} allowance;

static bool spend(void *user, size_t bytes)
{
    allowance *purse = user;

    (void)bytes;
    if (purse->left-- > 0) {
        return true;
    }
    purse->refused = true;
    return false;
}

static const char *path_in(const char *name)
{
    return path_of("memory", name);
}

static mb_status use_writer(const char *path)
{
    const mb_iq_annotation remark = {.label = "a"};
    const mb_cf32 samples[4] = {{0.5f, 0.5f}};
    mb_iq_writer_settings settings = mb_iq_writer_settings_default();
    mb_iq_writer *writer = NULL;

    settings.rate_hz = 8000.0;
    settings.annotations = &remark;
    settings.annotation_count = 1;
    mb_status status = mb_iq_writer_create(path, &settings, &writer);
    if (status == MB_OK) {
        status = mb_iq_writer_write(writer, samples, 4);
    }
    if (status == MB_OK) {
        status = mb_iq_writer_commit(writer);
    }
    mb_iq_writer_destroy(writer);
    return status;
}

static mb_status use_reader(const char *path)
{
    mb_iq_reader *reader = NULL;
    mb_cf32 block[8];
    size_t got = 0;
    mb_status status = mb_iq_reader_open(path, NULL, &reader);

    if (status == MB_OK) {
        status = mb_iq_read(reader, block, 8, &got);
    }
    mb_iq_reader_close(reader);
    return status;
}

static mb_status use_audio(const char *path)
{
    mb_audio_writer_settings settings = {.rate_hz = 8000.0};
    mb_audio_writer *writer = NULL;
    mb_audio_reader *reader = NULL;
    const float samples[4] = {0.5f};
    mb_status status = mb_audio_writer_create(path, &settings, &writer);

    if (status == MB_OK) {
        status = mb_audio_writer_write(writer, samples, 4);
    }
    if (status == MB_OK) {
        status = mb_audio_writer_commit(writer);
    }
    mb_audio_writer_destroy(writer);
    if (status == MB_OK) {
        status = mb_audio_reader_open(path, NULL, &reader);
    }
    mb_audio_reader_close(reader);
    return status;
}

static mb_status use_table(const char *path)
{
    mb_table_writer *writer = NULL;
    mb_table_reader *reader = NULL;
    const double row = 1.0;
    mb_status status = mb_table_writer_create(path, (const char *const[]){"a"}, 1, NULL, &writer);

    if (status == MB_OK) {
        status = mb_table_writer_row(writer, &row);
    }
    if (status == MB_OK) {
        status = mb_table_writer_commit(writer);
    }
    mb_table_writer_destroy(writer);
    if (status == MB_OK) {
        status = mb_table_reader_open(path, NULL, 0, &reader);
    }
    mb_table_reader_close(reader);
    return status;
}

static mb_status use_plot(const char *path)
{
    const double x[3] = {0.0, 1.0, 2.0};
    mb_plot_panel_settings panel = mb_plot_panel_settings_default();
    mb_plot_series series = mb_plot_series_default();
    mb_plot *plot = NULL;
    mb_status status = mb_plot_create(NULL, &plot);

    series.x = series.y = x;
    series.count = 3;
    if (status == MB_OK) {
        status = mb_plot_panel(plot, &panel);
    }
    if (status == MB_OK) {
        status = mb_plot_add(plot, &series);
    }
    if (status == MB_OK) {
        status = mb_plot_write(plot, path);
    }
    mb_plot_destroy(plot);
    return status;
}

/* Refuses the k-th allocation for k = 0, 1, ... until the job no longer asks for so many. */
static void refuse_each(mb_status (*job)(const char *path), const char *path, const char *partial, int least)
{
    int k = 0;

    for (;; k++) {
        allowance purse = {.left = k};
        mb_allocation_gate_set(spend, &purse);
        mb_status status = job(path);
        mb_allocation_gate_set(NULL, NULL);
        assert_int_equal(status, purse.refused ? MB_ERROR_MEMORY : MB_OK);
        assert_false(is_there(partial));
        if (!purse.refused) {
            break;
        }
    }
    assert_in_range(k, least, 100);
}

static void every_allocation_may_fail(void **state)
{
    (void)state;
    refuse_each(use_writer, path_in("a.sigmf-meta"), path_in("a.partial.sigmf-meta"), 10);
    refuse_each(use_reader, path_in("a.sigmf-meta"), path_in("none"), 8);
    refuse_each(use_writer, path_in("a.wav"), path_in("a.partial.wav"), 6);
    refuse_each(use_reader, path_in("a.wav"), path_in("none"), 4);
    refuse_each(use_audio, path_in("a.flac"), path_in("a.partial.flac"), 8);
    refuse_each(use_table, path_in("a.csv"), path_in("a.partial.csv"), 6);
    refuse_each(use_plot, path_in("a.svg"), path_in("a.partial.svg"), 8);
}

static void nothing_can_be_destroyed_too(void **state)
{
    (void)state;
    mb_iq_reader_close(NULL);
    mb_iq_writer_destroy(NULL);
    mb_audio_reader_close(NULL);
    mb_audio_writer_destroy(NULL);
    mb_table_reader_close(NULL);
    mb_table_writer_destroy(NULL);
    mb_plot_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_allocation_may_fail),
        cmocka_unit_test(nothing_can_be_destroyed_too),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
