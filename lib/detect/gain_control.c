#include "mirrorband/detect.h"

#include <math.h>

/* Power of a short time over the followed one that counts as a louder voice, not as a loud syllable: 9 dB. */
#define LOUDER 8.0

struct mb_gain_control {
    mb_gain_control_settings settings;
    double attack_keep, release_keep; /* per sample */
    double level;                     /* wanted root mean square */
    double least_power;               /* power at which the gain limit is reached */
    double brief;                     /* power of the input over the attack time */
    double power;                     /* its mean over the release time: what the gain goes by */
    double gain;
    bool hold;
};

mb_gain_control_settings mb_gain_control_settings_default(void)
{
    return (mb_gain_control_settings){
        .rate_hz = 16000.0, .level_dbfs = -20.0, .attack_s = 0.02, .release_s = 1.0, .gain_limit_db = 80.0};
}

mb_status mb_gain_control_create(const mb_gain_control_settings *settings, mb_gain_control **out)
{
    const mb_gain_control_settings *s = settings;

    *out = NULL;
    if (mb_check_range("rate_hz", s->rate_hz, 8000.0, 192000.0, "Hz") != MB_OK ||
        mb_check_range("level_dbfs", s->level_dbfs, -60.0, -6.0, "dBFS") != MB_OK ||
        mb_check_range("attack_s", s->attack_s, 1e-3, 1.0, "s") != MB_OK ||
        mb_check_range("release_s", s->release_s, 0.01, 20.0, "s") != MB_OK ||
        mb_check_range("gain_limit_db", s->gain_limit_db, 0.0, 120.0, "dB") != MB_OK) {
        return MB_ERROR_ARGUMENT;
    }
    mb_gain_control *control = mb_allocate(1, sizeof *control);
    if (control == NULL) {
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the gain control");
    }
    control->settings = *s;
    control->attack_keep = exp(-1.0 / (s->attack_s * s->rate_hz));
    control->release_keep = exp(-1.0 / (s->release_s * s->rate_hz));
    control->level = sqrt(mb_db_power(s->level_dbfs));
    control->least_power = mb_db_power(s->level_dbfs - s->gain_limit_db);
    mb_gain_control_reset(control);
    *out = control;
    return MB_OK;
}

void mb_gain_control_reset(mb_gain_control *control)
{
    control->power = mb_db_power(control->settings.level_dbfs);
    control->brief = 0.0;
    control->gain = 1.0;
    control->hold = false;
}

void mb_gain_control_destroy(mb_gain_control *control)
{
    mb_release(control);
}

void mb_gain_control_hold(mb_gain_control *control, bool hold)
{
    control->hold = hold;
}

double mb_gain_control_gain_db(const mb_gain_control *control)
{
    return 20.0 * log10(control->gain);
}

/* A mean of the power, so that the level comes out as root mean square; a louder voice is followed fast. */
static void follow_power(mb_gain_control *control, double power)
{
    control->brief += (1.0 - control->attack_keep) * (power - control->brief);
    if (control->brief > LOUDER * control->power) {
        control->power += (1.0 - control->attack_keep) * (control->brief - control->power);
    } else if (!control->hold) {
        control->power += (1.0 - control->release_keep) * (power - control->power);
    }
}

void mb_gain_control_process(mb_gain_control *control, const float *in, size_t n, float *out)
{
    for (size_t i = 0; i < n; i++) {
        double x = isfinite(in[i]) ? (double)in[i] : 0.0;
        follow_power(control, fmin(x * x, 1e12));
        control->gain = control->level / sqrt(fmax(control->power, control->least_power));
        out[i] = (float)fmax(-1.0, fmin(1.0, control->gain * x));
    }
}
