/* Pictures: ticks at round numbers, lines thinned without visible change, texts kept whole (and see
 * check_svg.py). */
#include "plot.h"
#include "samples.h"

enum { COUNT = 100000 };

static const char *path_in(const char *name)
{
    return path_of("plot", name);
}

static plot_scale scale_of(double low, double high, const char *unit, double length_px, bool vertical)
{
    plot_axis_texts axis = {.low = NAN, .high = NAN};
    plot_scale scale = {0};

    (void)snprintf(axis.label, sizeof axis.label, "x");
    (void)snprintf(axis.unit, sizeof axis.unit, "%s", unit);
    mb_plot_scale_range(&axis, low, high, &scale);
    mb_plot_scale_ticks(&axis, length_px, vertical, &scale);
    return scale;
}

static void check_labels(const plot_scale *scale, size_t count, const char *const *expected)
{
    double values[MB_PLOT_TICKS_MAX];
    char label[48];

    assert_int_equal(mb_plot_scale_values(scale, values), count);
    for (size_t i = 0; i < count; i++) {
        mb_plot_scale_label(scale, values[i], label);
        assert_string_equal(label, expected[i]);
    }
}

static void ticks_stand_at_round_numbers(void **state)
{
    (void)state;
    plot_scale scale = scale_of(-97.3, -2.0, "dB", 240.0, true);
    check_labels(&scale, 6,
                 (const char *const[]){"\xe2\x88\x92"
                                       "100",
                                       "\xe2\x88\x92"
                                       "80",
                                       "\xe2\x88\x92"
                                       "60",
                                       "\xe2\x88\x92"
                                       "40",
                                       "\xe2\x88\x92"
                                       "20",
                                       "0"});
    assert_string_equal(scale.caption, "x (dB)");
    scale = scale_of(0.0, 1.0, "", 400.0, false);
    assert_near(scale.step, 0.1, 1e-12);
    scale = scale_of(7.2800e6, 7.2900e6, "Hz", 300.0, false);
    check_labels(&scale, 6, (const char *const[]){"7.280", "7.282", "7.284", "7.286", "7.288", "7.290"});
    assert_string_equal(scale.caption, "x (MHz)");
    scale = scale_of(0.0, 2e-6, "", 200.0, true);
    assert_string_equal(scale.caption, "x (10\xe2\x81\xbb\xe2\x81\xb6)");
    scale = scale_of(137.0, 137.0, "Hz", 200.0, true); /* a constant still has an axis around it */
    assert_true(scale.low < 137.0 && scale.high > 137.0);
    scale = scale_of(INFINITY, -INFINITY, "", 200.0, true); /* no data */
    assert_near(scale.high - scale.low, 1.0, 1e-9);
}

static void any_range_gets_a_few_ticks(void **state)
{
    mb_random random;
    double values[MB_PLOT_TICKS_MAX];

    (void)state;
    mb_random_seed(&random, 21, 0);
    for (int i = 0; i < 20000; i++) {
        double size = pow(10.0, 30.0 * mb_random_uniform(&random) - 15.0);
        double low = size * mb_random_normal(&random);
        double high = low + size * (0.01 + mb_random_uniform(&random));
        plot_scale scale = scale_of(low, high, i % 2 == 0 ? "Hz" : "", 160.0 + (double)(i % 900), i % 3 == 0);
        size_t count = mb_plot_scale_values(&scale, values);
        assert_in_range(count, 1, 45);
        assert_true(scale.low <= low && scale.high >= high);
    }
}

static void a_long_line_keeps_its_extremes(void **state)
{
    double *x = mb_allocate(COUNT, sizeof *x), *y = mb_allocate(COUNT, sizeof *y);
    bool *keep = mb_allocate(COUNT, sizeof *keep);
    plot_series series = {.x = x, .y = y, .count = COUNT};
    plot_scale scale = {.low = 0.0, .high = COUNT};
    size_t kept = 0;
    mb_random random;

    (void)state;
    mb_random_seed(&random, 5, 0);
    for (size_t i = 0; i < COUNT; i++) {
        x[i] = (double)i;
        y[i] = mb_random_normal(&random);
    }
    y[31234] = 50.0;
    y[71234] = -50.0;
    y[500] = NAN;
    mb_plot_thin(&series, &scale, 400.0, keep);
    for (size_t i = 0; i < COUNT; i++) {
        kept += keep[i] ? 1 : 0;
    }
    assert_true(keep[31234] && keep[71234] && keep[500] && keep[0] && keep[COUNT - 1]);
    assert_in_range(kept, 800, 4 * 801 + 2);
    mb_release(x);
    mb_release(y);
    mb_release(keep);
}

static void texts_are_cut_whole_and_escaped(void **state)
{
    char out[MB_PLOT_TEXT];

    (void)state;
    mb_plot_text_escape("a<b & \"c\">\x01", out, sizeof out);
    assert_string_equal(out, "a&lt;b &amp; &quot;c&quot;&gt; ");
    mb_plot_text_fit("short", 12.0, 400.0, out);
    assert_string_equal(out, "short");
    mb_plot_text_fit("\xc2\xb5\xc2\xb5\xc2\xb5\xc2\xb5\xc2\xb5", 10.0, 30.0, out);
    assert_string_equal(out, "\xc2\xb5\xc2\xb5\xe2\x80\xa6");
    assert_at_most(mb_plot_text_width(out, 10.0), 30.0);
}

/* A panel of each kind, with texts too long for it if asked. */
static mb_plot *make_figure(size_t columns, double width_px, const char *title)
{
    static double x[1000], y[1000];
    mb_plot_settings settings = mb_plot_settings_default();
    mb_plot_panel_settings panel = mb_plot_panel_settings_default();
    mb_plot_series series = mb_plot_series_default();
    mb_plot *plot = NULL;

    settings.title = settings.subtitle = panel.title = title;
    settings.columns = columns;
    settings.panel_width_px = width_px;
    panel.x = (mb_plot_axis){.label = title, .unit = "Hz", .low = NAN, .high = NAN};
    panel.y = (mb_plot_axis){.label = title, .unit = "dB", .low = NAN, .high = NAN};
    series.x = x;
    series.y = y;
    series.count = 1000;
    series.label = title;
    assert_ok(mb_plot_create(&settings, &plot));
    for (int k = 0; k < 5; k++) {
        panel.equal_scale = k == 1;
        panel.column_span = k == 2 ? columns : 1;
        assert_ok(mb_plot_panel(plot, &panel));
        assert_ok(mb_plot_note(plot, title));
        for (int s = 0; s < k; s++) {
            for (int i = 0; i < 1000; i++) {
                x[i] = 1e4 * k + 10.0 * i;
                y[i] = i % 100 == 99 ? NAN : sin(0.01 * i + s) * pow(10.0, 2.0 * k - 4.0);
            }
            series.style = (mb_plot_style)(s % 3);
            assert_ok(mb_plot_add(plot, &series));
        }
        assert_ok(mb_plot_mark_y(plot, 0.5, title));
        assert_ok(mb_plot_mark_x(plot, 1e4, NULL));
    }
    return plot;
}

static void figures_are_written(void **state)
{
    static const char long_text[] =
        "A title that is much longer than any panel could ever be wide, so that it must be "
        "cut with a mark that shows where";
    static const struct {
        const char *name, *title;
        size_t columns;
        double width_px;
    } cases[] = {{"one.svg", "Offset", 1, 480.0},
                 {"two.svg", "Sidebands <upper & lower>", 2, 500.0},
                 {"narrow.svg", long_text, 3, 240.0},
                 {"wide.svg", long_text, 4, 900.0},
                 {"bare.svg", NULL, 2, 300.0}};

    (void)state;
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        mb_plot *plot =
            make_figure(cases[i].columns, cases[i].width_px, cases[i].title != NULL ? cases[i].title : "");
        assert_ok(mb_plot_write(plot, path_in(cases[i].name)));
        mb_plot_destroy(plot);
    }
    mb_plot_destroy(NULL);
}

static void a_long_legend_makes_its_panel_higher(void **state)
{
    mb_plot_settings settings = {
        .title = "All receivers", .columns = 1, .panel_width_px = 240, .panel_height_px = 160};
    mb_plot_panel_settings panel = mb_plot_panel_settings_default();
    mb_plot_series series = mb_plot_series_default();
    const double x[2] = {0.0, 1.0};
    mb_plot *plot = NULL;

    (void)state;
    assert_ok(mb_plot_create(&settings, &plot));
    assert_ok(mb_plot_panel(plot, &panel));
    series.label = "a receiver with a name";
    series.x = series.y = x;
    series.count = 2;
    for (int i = 0; i < MB_PLOT_SERIES_MAX; i++) {
        assert_ok(mb_plot_add(plot, &series));
    }
    assert_fault(mb_plot_add(plot, &series), MB_ERROR_ARGUMENT, "series");
    assert_ok(mb_plot_panel(plot, &panel));
    assert_ok(mb_plot_write(plot, path_in("legend.svg")));
    mb_plot_destroy(plot);
}

static void settings_are_checked(void **state)
{
    mb_plot_settings settings = mb_plot_settings_default();
    mb_plot_panel_settings panel = mb_plot_panel_settings_default();
    mb_plot_series series = mb_plot_series_default();
    mb_plot *plot = NULL;

    (void)state;
    settings.columns = 5;
    assert_fault(mb_plot_create(&settings, &plot), MB_ERROR_ARGUMENT, "columns");
    settings.columns = 2;
    settings.panel_width_px = 10.0;
    assert_fault(mb_plot_create(&settings, &plot), MB_ERROR_ARGUMENT, "panel_width_px");
    assert_ok(mb_plot_create(NULL, &plot));
    assert_fault(mb_plot_add(plot, &series), MB_ERROR_ARGUMENT, "plot");
    assert_fault(mb_plot_write(plot, path_in("never.svg")), MB_ERROR_ARGUMENT, "plot");
    panel.x.low = 3.0;
    assert_fault(mb_plot_panel(plot, &panel), MB_ERROR_ARGUMENT, "x");
    panel.x.high = 4.0;
    panel.column_span = 2;
    assert_fault(mb_plot_panel(plot, &panel), MB_ERROR_ARGUMENT, "column_span");
    panel.column_span = 1;
    assert_ok(mb_plot_panel(plot, &panel));
    series.colour = 8;
    assert_fault(mb_plot_add(plot, &series), MB_ERROR_ARGUMENT, "colour");
    series.colour = 0;
    series.count = 3;
    assert_fault(mb_plot_add(plot, &series), MB_ERROR_ARGUMENT, "x");
    assert_fault(mb_plot_mark_x(plot, NAN, NULL), MB_ERROR_ARGUMENT, "x");
    assert_int_equal(mb_plot_write(plot, path_in("nowhere/a.svg")), MB_ERROR_FILE);
    mb_plot_destroy(plot);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(ticks_stand_at_round_numbers),
        cmocka_unit_test(any_range_gets_a_few_ticks),
        cmocka_unit_test(a_long_line_keeps_its_extremes),
        cmocka_unit_test(texts_are_cut_whole_and_escaped),
        cmocka_unit_test(figures_are_written),
        cmocka_unit_test(a_long_legend_makes_its_panel_higher),
        cmocka_unit_test(settings_are_checked),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
