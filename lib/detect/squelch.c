#include "mirrorband/detect.h"

#include <math.h>

struct mb_squelch {
    mb_squelch_settings settings;
    double step;      /* of the fade, per sample */
    double fade;      /* 0 closed to 1 open */
    uint64_t hang;    /* samples a pause may last */
    uint64_t waiting; /* samples since voice was last tracked */
    bool tracked;
    bool open;
};

mb_squelch_settings mb_squelch_settings_default(void)
{
    return (mb_squelch_settings){
        .rate_hz = 16000.0, .open_quality = 0.3, .close_quality = 0.2, .hang_s = 0.6, .fade_s = 0.01};
}

mb_status mb_squelch_create(const mb_squelch_settings *settings, mb_squelch **out)
{
    const mb_squelch_settings *s = settings;

    *out = NULL;
    if (mb_check_range("rate_hz", s->rate_hz, 8000.0, 192000.0, "Hz") != MB_OK ||
        mb_check_range("open_quality", s->open_quality, 0.0, 1.0, "") != MB_OK ||
        mb_check_range("close_quality", s->close_quality, 0.0, s->open_quality, "") != MB_OK ||
        mb_check_range("hang_s", s->hang_s, 0.0, 10.0, "s") != MB_OK ||
        mb_check_range("fade_s", s->fade_s, 1e-4, 1.0, "s") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_squelch *squelch = mb_allocate(1, sizeof *squelch);
    if (squelch == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the squelch");
    }
    squelch->settings = *s;
    squelch->step = 1.0 / (s->fade_s * s->rate_hz);
    squelch->hang = (uint64_t)(s->hang_s * s->rate_hz);
    *out = squelch;
    return MB_OK;
}

void mb_squelch_reset(mb_squelch *squelch)
{
    squelch->fade = 0.0;
    squelch->waiting = 0;
    squelch->tracked = squelch->open = false;
}

void mb_squelch_destroy(mb_squelch *squelch)
{
    mb_release(squelch);
}

bool mb_squelch_is_open(const mb_squelch *squelch)
{
    return squelch->open;
}

void mb_squelch_report(mb_squelch *squelch, bool tracked, double lock_quality)
{
    squelch->tracked = tracked && lock_quality >= squelch->settings.close_quality;
    if (tracked && lock_quality >= squelch->settings.open_quality) {
        squelch->open = true;
    }
    if (squelch->tracked) {
        squelch->waiting = 0;
    }
}

void mb_squelch_process(mb_squelch *squelch, const float *in, size_t n, float *out)
{
    for (size_t i = 0; i < n; i++) {
        if (!squelch->tracked && squelch->open && ++squelch->waiting > squelch->hang) {
            squelch->open = false;
        }
        double change = squelch->open ? squelch->step : -squelch->step;
        squelch->fade = fmax(0.0, fmin(1.0, squelch->fade + change));
        out[i] = isfinite(in[i]) ? (float)(squelch->fade * (double)in[i]) : 0.0f;
    }
}
