/* One picture of a suppressed-carrier signal: its two sidebands, its phase line, its carrier over time. */
#include "assess_iq.h"

#include <math.h>
#include <stdio.h>

#include "mirrorband/files.h"

enum { SPECTRUM_POINTS = 200, NOTE = 160 };

static const double panel_width_px = 480.0, panel_height_px = 330.0, deepest_db = 110.0, least_db = 40.0;

/* Power of the fine spectrum from low_hz to high_hz; whole bins, at least one. */
static double power_between(const mb_spectrum_info *info, const double *power, double low_hz, double high_hz)
{
    double middle = 0.5 * (double)info->length; /* a power of two */
    double from = ceil(low_hz / info->step_hz + middle), to = ceil(high_hz / info->step_hz + middle);
    double sum = 0.0;

    to = fmax(to, from + 1.0);
    for (double i = fmax(from, 0.0); i < to && i < (double)info->length; i += 1.0) {
        sum += power[(size_t)i];
    }
    return sum;
}

/* One side of the spectrum, counted away from the carrier, in dB of all that lies on both sides. */
typedef struct sidebands {
    double frequency_hz[SPECTRUM_POINTS], upper_db[SPECTRUM_POINTS], lower_db[SPECTRUM_POINTS];
    double step_hz, highest_db, lowest_db;
} sidebands;

static mb_status fill_sidebands(const mb_assess_iq *assess, sidebands *out)
{
    const mb_spectrum *spectrum = mb_emission_fine(assess->emission);
    mb_spectrum_info info = mb_spectrum_state(spectrum);
    double half_hz = assess->half_width_hz;
    double *power = mb_allocate(info.length, sizeof *power);
    mb_status status = power != NULL ? mb_spectrum_power(spectrum, power)
                                     : mb_fail(MB_ERROR_MEMORY, "", "no memory for the picture");

    out->step_hz = half_hz / SPECTRUM_POINTS;
    out->highest_db = -400.0;
    out->lowest_db = 0.0;
    if (status == MB_OK) {
        double whole = fmax(power_between(&info, power, -half_hz, half_hz), 1e-30);
        for (size_t i = 0; i < SPECTRUM_POINTS; i++) {
            double from_hz = (double)i * out->step_hz, to_hz = from_hz + out->step_hz;
            out->frequency_hz[i] = from_hz + 0.5 * out->step_hz;
            /* half a bin on: the bin at the carrier itself belongs to neither side */
            double after_hz = 0.5 * info.step_hz;
            out->upper_db[i] =
                mb_power_db(power_between(&info, power, from_hz + after_hz, to_hz + after_hz) / whole);
            out->lower_db[i] = mb_power_db(power_between(&info, power, -to_hz, -from_hz) / whole);
            out->highest_db = fmax(out->highest_db, fmax(out->upper_db[i], out->lower_db[i]));
            out->lowest_db = fmin(out->lowest_db, fmin(out->upper_db[i], out->lower_db[i]));
        }
    }
    mb_release(power);
    return status;
}

static mb_status add_line(mb_plot *plot, const char *label, mb_plot_style style, int colour, double width_px,
                          const double *x, const double *y, size_t count)
{
    mb_plot_series series = mb_plot_series_default();

    series.label = label;
    series.style = style;
    series.colour = colour;
    series.width_px = width_px;
    series.x = x;
    series.y = y;
    series.count = count;
    return mb_plot_add(plot, &series);
}

static mb_status draw_sidebands(mb_plot *plot, const mb_assess_iq *assess, const mb_assess_iq_result *result,
                                sidebands *work)
{
    mb_plot_panel_settings panel = mb_plot_panel_settings_default();
    char label[NOTE], note[NOTE];
    mb_status status = fill_sidebands(assess, work);

    if (status != MB_OK) {
        return status;
    }
    double top_db = 10.0 * ceil(work->highest_db / 10.0);
    double bottom_db = 10.0 * floor(work->lowest_db / 10.0);
    (void)snprintf(label, sizeof label, "power in %g Hz, of the whole", work->step_hz);
    panel.title = "Upper sideband and mirrored lower sideband";
    panel.column_span = assess->found ? 2 : 1;
    panel.x = (mb_plot_axis){.label = "distance from the missing carrier",
                             .unit = "Hz",
                             .low = 0.0,
                             .high = assess->half_width_hz};
    panel.y = (mb_plot_axis){.label = label,
                             .unit = "dB",
                             .low = fmin(fmax(bottom_db, top_db - deepest_db), top_db - least_db),
                             .high = top_db};
    if (!assess->found) {
        panel.title = "Both sides of where the carrier was looked for";
        panel.x.label = "distance from there";
    }
    if ((status = mb_plot_panel(plot, &panel)) == MB_OK && assess->found) {
        (void)snprintf(note, sizeof note, "balance %+.2f dB, carrier line %s%.1f dBc in active speech",
                       result->emission.balance_db, result->emission.carrier_found ? "" : "at most ",
                       result->carrier_dbc);
        status = mb_plot_note(plot, note);
    }
    if (status == MB_OK) {
        status = add_line(plot, "upper", MB_PLOT_LINE, 0, 2.2, work->frequency_hz, work->upper_db,
                          SPECTRUM_POINTS);
    }
    return status == MB_OK ? add_line(plot, "lower, mirrored", MB_PLOT_LINE, 1, 1.2, work->frequency_hz,
                                      work->lower_db, SPECTRUM_POINTS)
                           : status;
}

static double largest_of(const scatter *s)
{
    double largest = 1e-9;

    for (size_t i = 0; i < s->count; i++) {
        largest = fmax(largest, fmax(fabs(s->in_phase[i]), fabs(s->quadrature[i])));
    }
    return largest;
}

static mb_status draw_phase_line(mb_plot *plot, const scatter *s, const mb_assess_iq_result *result)
{
    mb_plot_panel_settings panel = mb_plot_panel_settings_default();
    mb_plot_series dots = mb_plot_series_default();
    char note[NOTE];
    double reach = 1.05 * largest_of(s);

    panel.title = "Phase line";
    panel.equal_scale = true;
    panel.x = (mb_plot_axis){.label = "in-phase", .unit = "full scale", .low = -reach, .high = reach};
    panel.y = (mb_plot_axis){.label = "quadrature", .unit = "full scale", .low = -reach, .high = reach};
    mb_status status = mb_plot_panel(plot, &panel);
    if (status == MB_OK) {
        (void)snprintf(note, sizeof note, "lock quality %.3f, SNR estimate %.1f dB", result->lock_quality,
                       result->snr_db);
        status = mb_plot_note(plot, note);
    }
    dots.style = MB_PLOT_POINTS;
    dots.colour = 0;
    dots.width_px = 2.4;
    dots.opacity = 0.6;
    dots.x = s->in_phase;
    dots.y = s->quadrature;
    dots.count = s->count;
    return status == MB_OK && s->count > 0 ? mb_plot_add(plot, &dots) : status;
}

typedef struct offsets {
    double time_s[ASSESS_TRACK], voice_hz[ASSESS_TRACK], pause_hz[ASSESS_TRACK];
    double low_hz, high_hz;
} offsets;

static void widen(offsets *o, double value)
{
    o->low_hz = isfinite(value) ? fmin(o->low_hz, value) : o->low_hz;
    o->high_hz = isfinite(value) ? fmax(o->high_hz, value) : o->high_hz;
}

/* Points with voice and points without are two lines; each reaches to the first point of the other. */
static void fill_offsets(const mb_assess_iq *assess, offsets *o)
{
    bool before = false;

    o->low_hz = INFINITY;
    o->high_hz = -INFINITY;
    for (size_t i = 0; i < assess->track_count; i++) {
        mb_track_point point = mb_recording_point(assess->recording, i * assess->track_stride);
        bool voice = point.mode == MB_CARRIER_LOCKED;
        o->time_s[i] = point.time_s;
        o->voice_hz[i] = voice || (i > 0 && before) ? point.carrier_offset_hz : NAN;
        o->pause_hz[i] = !voice || (i > 0 && !before) ? point.carrier_offset_hz : NAN;
        before = voice;
        if (voice) {
            widen(o, point.carrier_offset_hz);
        }
        widen(o, assess->truth_hz[i]);
    }
    double room_hz = fmax(0.08 * (o->high_hz - o->low_hz), 0.25);
    o->low_hz -= room_hz;
    o->high_hz += room_hz;
}

/* What prints as zero has no sign. */
static double without_minus_zero(double value)
{
    return fabs(value) < 0.0005 ? 0.0 : value;
}

static mb_status draw_offsets(mb_plot *plot, const mb_assess_iq *assess, const mb_assess_iq_result *result,
                              offsets *work)
{
    mb_plot_panel_settings panel = mb_plot_panel_settings_default();
    char note[NOTE];

    fill_offsets(assess, work);
    panel.title = "Carrier offset";
    panel.x = (mb_plot_axis){.label = "time", .unit = "s", .low = 0.0, .high = result->emission.duration_s};
    panel.y = (mb_plot_axis){.label = "offset", .unit = "Hz", .low = NAN, .high = NAN};
    if (work->low_hz < work->high_hz) {
        panel.y.low = work->low_hz;
        panel.y.high = work->high_hz;
    }
    if (result->has_truth) {
        (void)snprintf(note, sizeof note, "mean %.3f Hz, truth %.3f Hz, rms error %.3f Hz",
                       result->carrier_offset_hz, result->truth_offset_hz, result->offset_rms_error_hz);
    } else {
        (void)snprintf(note, sizeof note, "mean %.3f Hz, drift %+.3f Hz/s", result->carrier_offset_hz,
                       without_minus_zero(result->carrier_drift_hz_per_s));
    }
    mb_status status = mb_plot_panel(plot, &panel);
    if (status == MB_OK) {
        status = mb_plot_note(plot, note);
    }
    if (status == MB_OK) {
        status =
            add_line(plot, "found", MB_PLOT_LINE, 0, 2.2, work->time_s, work->voice_hz, assess->track_count);
    }
    if (status == MB_OK) {
        status = add_line(plot, "held in pauses", MB_PLOT_LINE, 2, 1.2, work->time_s, work->pause_hz,
                          assess->track_count);
    }
    return status == MB_OK && result->has_truth
               ? add_line(plot, "truth", MB_PLOT_DASHED, 1, 1.4, work->time_s, assess->truth_hz,
                          assess->track_count)
               : status;
}

/* Scratch of the panels. */
typedef struct picture_work {
    sidebands sidebands;
    offsets offsets;
} picture_work;

static mb_status draw(mb_plot *plot, const mb_assess_iq *assess, const mb_assess_iq_result *result,
                      picture_work *work)
{
    mb_status status = draw_sidebands(plot, assess, result, &work->sidebands);

    if (status == MB_OK && assess->found) {
        status = draw_phase_line(plot, assess->scatter, result);
    }
    return status == MB_OK && assess->found ? draw_offsets(plot, assess, result, &work->offsets) : status;
}

mb_status mb_assess_picture(const mb_assess_iq *assess, const mb_assess_iq_result *result,
                            const char *subtitle, const char *path)
{
    mb_plot_settings settings = mb_plot_settings_default();
    mb_plot *plot = NULL;

    if (!assess->settings.picture || !assess->resolved) {
        return mb_fail(MB_ERROR_ARGUMENT, "picture",
                       "a picture is drawn of an assessment made with .picture, "
                       "after its second pass");
    }
    settings.title = assess->found ? "Double sideband, suppressed carrier" : "No suppressed-carrier signal";
    settings.subtitle = subtitle;
    settings.columns = assess->found ? 2 : 1;
    settings.panel_width_px = assess->found ? panel_width_px : 2.0 * panel_width_px;
    settings.panel_height_px = panel_height_px;
    picture_work *work = mb_allocate(1, sizeof *work);
    if (work == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the picture");
    }
    mb_status status = mb_plot_create(&settings, &plot);
    if (status == MB_OK) {
        status = draw(plot, assess, result, work);
    }
    if (status == MB_OK) {
        status = mb_plot_write(plot, path);
    }
    mb_plot_destroy(plot);
    mb_release(work);
    return status;
}
