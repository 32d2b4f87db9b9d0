#include <math.h>

#include "checked.h"
#include "equivalent.h"

struct mb_ring_modulator {
    mb_ring_modulator_settings settings;
    double message, carrier; /* the sample before */
};

mb_ring_modulator_settings mb_ring_modulator_settings_default(void)
{
    return (mb_ring_modulator_settings){.path_gain = {1.0, 1.0}};
}

double mb_ring_modulator_bias_v(double duty, double carrier_peak_v)
{
    return -carrier_peak_v * cos(MB_PI * duty);
}

static mb_status check_settings(const mb_ring_modulator_settings *settings)
{
    const mb_checked_field fields[] = {
        {"path_gain[0]", settings->path_gain[0], 0.0, 1.0, ""},
        {"path_gain[1]", settings->path_gain[1], 0.0, 1.0, ""},
        {"path_gain", settings->path_gain[0] + settings->path_gain[1], 1e-6, 2.0, "(sum of the two)"},
        {"path_offset_v[0]", settings->path_offset_v[0], -1.0, 1.0, "V"},
        {"path_offset_v[1]", settings->path_offset_v[1], -1.0, 1.0, "V"},
        {"bias_v", settings->bias_v, -100.0, 100.0, "V"},
        {"carrier_unbalance", settings->carrier_unbalance, -0.5, 0.5, ""},
    };

    return mb_check_fields(fields, sizeof fields / sizeof fields[0]);
}

mb_status mb_ring_modulator_create(const mb_ring_modulator_settings *settings, mb_ring_modulator **out)
{
    void *memory = NULL;

    *out = NULL;
    mb_status status = check_settings(settings);
    if (status == MB_OK) {
        status = mb_stage_allocate(sizeof **out, "ring modulator", &memory);
    }
    if (status == MB_OK) {
        *out = memory;
        (*out)->settings = *settings;
    }
    return status;
}

/* Share of the way from one value to the next, on a straight line, that is above zero. */
static double share_above_zero(double before, double now)
{
    if (before > 0.0 && now > 0.0) {
        return 1.0;
    }
    if (before <= 0.0 && now <= 0.0) {
        return 0.0;
    }
    return fmax(before, now) / fabs(now - before);
}

void mb_ring_modulator_process(mb_ring_modulator *model, const double *message_v, const double *carrier_v,
                               size_t count, double *out)
{
    const mb_ring_modulator_settings *settings = &model->settings;

    for (size_t i = 0; i < count; i++) {
        double message_now = mb_finite(message_v[i]), carrier_now = mb_finite(carrier_v[i]);
        double message = 0.5 * (model->message + message_now);
        double carrier = 0.5 * (model->carrier + carrier_now);
        double open = share_above_zero(model->carrier + settings->bias_v, carrier_now + settings->bias_v);
        double path_0 = settings->path_gain[0] * message + settings->path_offset_v[0];
        double path_1 = -settings->path_gain[1] * message + settings->path_offset_v[1];
        out[i] = open * path_0 + (1.0 - open) * path_1 + settings->carrier_unbalance * carrier;
        model->message = message_now;
        model->carrier = carrier_now;
    }
}

void mb_ring_modulator_reset(mb_ring_modulator *model)
{
    model->message = model->carrier = 0.0;
}

void mb_ring_modulator_destroy(mb_ring_modulator *model)
{
    mb_release(model);
}

mb_equivalent mb_ring_modulator_equivalent(const mb_ring_modulator_settings *settings, double message_peak_v,
                                           double carrier_peak_v)
{
    const double *gain = settings->path_gain, *offset = settings->path_offset_v;
    double duty = acos(fmax(-1.0, fmin(1.0, -settings->bias_v / carrier_peak_v))) / MB_PI;
    double line = 4.0 / MB_PI * sin(MB_PI * duty); /* of a switch between +1 and -1 */
    const double cosine[4] = {
        line * 0.5 * (offset[0] - offset[1]) + settings->carrier_unbalance * carrier_peak_v,
        line * 0.5 * (gain[0] + gain[1]) * message_peak_v,
        0.0,
        0.0,
    };
    double audio = (duty * gain[0] - (1.0 - duty) * gain[1]) * message_peak_v;

    return mb_equivalent_of_sine(cosine, audio, message_peak_v);
}
