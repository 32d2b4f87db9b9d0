#include "progress.h"

#include <stdio.h>
#include <string.h>
#include <unistd.h>

static const double between_drawings_s = 0.2;

app_progress app_progress_begin(const app_program *program, const app_common *common, const char *doing,
                                double total_s)
{
    double now_s = mb_clock_s();

    return (app_progress){.program = program->name,
                          .doing = doing,
                          .total_s = total_s,
                          .begun_s = now_s,
                          .shown_s = now_s,
                          .visible = !common->quiet && isatty(STDERR_FILENO) == 1};
}

void app_progress_text(const app_progress *progress, double done_s, double elapsed_s, char *out, size_t size)
{
    char part[48], speed[48] = "";

    if (progress->total_s > 0.0) {
        double percent = 100.0 * done_s / progress->total_s;
        (void)snprintf(part, sizeof part, "%.0f %%", percent < 100.0 ? percent : 100.0);
    } else {
        (void)snprintf(part, sizeof part, "%.0f s", done_s);
    }
    if (elapsed_s > 0.0) {
        double times = done_s / elapsed_s;
        (void)snprintf(speed, sizeof speed, times < 10.0 ? ", %.1f x real time" : ", %.0f x real time",
                       times);
    }
    (void)snprintf(out, size, "%s: %s %s%s", progress->program, progress->doing, part, speed);
}

void app_progress_update(app_progress *progress, double done_s)
{
    char text[160];

    if (!progress->visible) {
        return;
    }
    double now_s = mb_clock_s();
    if (now_s - progress->shown_s < between_drawings_s) {
        return;
    }
    app_progress_text(progress, done_s, now_s - progress->begun_s, text, sizeof text);
    (void)fprintf(stderr, "\r%s\033[K", text);
    (void)fflush(stderr);
    progress->shown_s = now_s;
    progress->drawn = true;
}

void app_progress_end(app_progress *progress)
{
    if (progress->drawn) {
        (void)fputs("\r\033[K", stderr);
        (void)fflush(stderr);
        progress->drawn = false;
    }
}
