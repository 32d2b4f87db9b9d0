#include "equivalent.h"

#include <math.h>

#include "checked.h"

struct mb_equivalent_modulator {
    mb_equivalent equivalent;
    double gain;
    mb_product_counts counts;
};

mb_equivalent mb_equivalent_of_sine(const double cosine[4], double audio, double message_peak_v)
{
    double leak = cosine[0] / cosine[1];

    return (mb_equivalent){
        .sideband_gain = cosine[1],
        .leak_re = leak,
        .leak_im = 0.0,
        .leak_dbc = mb_power_db(leak * leak / 0.5), /* a sine of amplitude 1 has the mean square 1/2 */
        .feedthrough = audio / (0.5 * cosine[1]),
        .second_order = 2.0 * cosine[2] / cosine[1],
        .third_order = 4.0 * cosine[3] / cosine[1],
        .conversion_loss_db = -20.0 * log10(fabs(0.5 * cosine[1] / message_peak_v)),
    };
}

mb_equivalent_modulator_settings mb_equivalent_modulator_settings_default(void)
{
    return (mb_equivalent_modulator_settings){
        .equivalent = {.sideband_gain = 1.0, .leak_dbc = -400.0},
        .gain = 1.0,
    };
}

static mb_status check_settings(const mb_equivalent_modulator_settings *settings)
{
    const mb_checked_field fields[] = {
        {"leak_re", settings->equivalent.leak_re, -10.0, 10.0, ""},
        {"leak_im", settings->equivalent.leak_im, -10.0, 10.0, ""},
        {"second_order", settings->equivalent.second_order, -10.0, 10.0, ""},
        {"third_order", settings->equivalent.third_order, -10.0, 10.0, ""},
        {"gain", settings->gain, 1e-6, 10.0, ""},
    };

    return mb_check_fields(fields, sizeof fields / sizeof fields[0]);
}

mb_status mb_equivalent_modulator_create(const mb_equivalent_modulator_settings *settings,
                                         mb_equivalent_modulator **out)
{
    void *memory = NULL;

    *out = NULL;
    mb_status status = check_settings(settings);
    if (status == MB_OK) {
        status = mb_stage_allocate(sizeof **out, "equivalent modulator", &memory);
    }
    if (status == MB_OK) {
        *out = memory;
        **out = (mb_equivalent_modulator){.equivalent = settings->equivalent, .gain = settings->gain};
    }
    return status;
}

void mb_equivalent_modulator_process(mb_equivalent_modulator *modulator, const float *message, size_t count,
                                     mb_cf32 *out)
{
    const mb_equivalent *equivalent = &modulator->equivalent;

    for (size_t i = 0; i < count; i++) {
        float sample = message[i];
        modulator->counts.non_finite += mb_scrub_f32(&sample, 1);
        double u = (double)sample;
        double re = u + equivalent->second_order * (u * u - 0.5) +
                    equivalent->third_order * u * (u * u - 0.75) + equivalent->leak_re;
        out[i] = (mb_cf32){(float)(modulator->gain * re), (float)(modulator->gain * equivalent->leak_im)};
    }
}

size_t mb_equivalent_modulator_delay_samples(const mb_equivalent_modulator *modulator)
{
    (void)modulator;
    return 0;
}

mb_product_counts mb_equivalent_modulator_state(const mb_equivalent_modulator *modulator)
{
    return modulator->counts;
}

void mb_equivalent_modulator_reset(mb_equivalent_modulator *modulator)
{
    modulator->counts = (mb_product_counts){0};
}

void mb_equivalent_modulator_destroy(mb_equivalent_modulator *modulator)
{
    mb_release(modulator);
}
