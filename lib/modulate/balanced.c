#include <math.h>

#include "checked.h"
#include "equivalent.h"

struct mb_balanced {
    mb_balanced_settings settings;
};

mb_balanced_settings mb_balanced_settings_default(void)
{
    const mb_square_law device = {.a = 0.0, .b = 1.0, .c = 0.5};

    return (mb_balanced_settings){.device = {device, device}, .message_offset_v = 0.0};
}

static mb_status check_settings(const mb_balanced_settings *settings)
{
    const mb_square_law *first = &settings->device[0], *second = &settings->device[1];
    const mb_checked_field fields[] = {
        {"device[0].a", first->a, -1e3, 1e3, "A"},
        {"device[1].a", second->a, -1e3, 1e3, "A"},
        {"device[0].b", first->b, -1e3, 1e3, "A/V"},
        {"device[1].b", second->b, -1e3, 1e3, "A/V"},
        {"device[0].c", first->c, -1e3, 1e3, "A/V^2"},
        {"device[1].c", second->c, -1e3, 1e3, "A/V^2"},
        {"c", first->c + second->c, 1e-12, 2e3, "A/V^2"},
        {"message_offset_v", settings->message_offset_v, -10.0, 10.0, "V"},
    };

    return mb_check_fields(fields, sizeof fields / sizeof fields[0]);
}

mb_status mb_balanced_create(const mb_balanced_settings *settings, mb_balanced **out)
{
    void *memory = NULL;

    *out = NULL;
    mb_status status = check_settings(settings);
    if (status == MB_OK) {
        status = mb_stage_allocate(sizeof **out, "balanced modulator", &memory);
    }
    if (status == MB_OK) {
        *out = memory;
        (*out)->settings = *settings;
    }
    return status;
}

static double current(const mb_square_law *device, double v)
{
    return device->a + v * (device->b + v * device->c);
}

void mb_balanced_process(mb_balanced *model, const double *message_v, const double *carrier_v, size_t count,
                         double *out)
{
    const mb_balanced_settings *settings = &model->settings;

    for (size_t i = 0; i < count; i++) {
        double message = mb_finite(message_v[i]) + settings->message_offset_v;
        double carrier = mb_finite(carrier_v[i]);
        out[i] = current(&settings->device[0], carrier + message) -
                 current(&settings->device[1], carrier - message);
    }
}

void mb_balanced_destroy(mb_balanced *model)
{
    mb_release(model);
}

mb_equivalent mb_balanced_equivalent(const mb_balanced_settings *settings, double message_peak_v,
                                     double carrier_peak_v)
{
    const mb_square_law *first = &settings->device[0], *second = &settings->device[1];
    double product = 2.0 * (first->c + second->c); /* of carrier times message */
    double offset = settings->message_offset_v;
    const double cosine[4] = {
        (first->b - second->b + product * offset) * carrier_peak_v,
        product * carrier_peak_v * message_peak_v,
        0.0,
        0.0,
    };
    double audio = (first->b + second->b + 2.0 * (first->c - second->c) * offset) * message_peak_v;

    return mb_equivalent_of_sine(cosine, audio, message_peak_v);
}
