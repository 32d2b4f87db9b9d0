#include "mirrorband/modulate.h"

#include <math.h>

#include "checked.h"

struct mb_product {
    double leak_re, leak_im;
    double im_from_re, im_from_im; /* the IQ error as a matrix; re is passed as it is */
    double dc_re, dc_im;
    mb_product_counts counts;
};

mb_product_settings mb_product_settings_default(void)
{
    return (mb_product_settings){.leak_dbc = -INFINITY, .message_power = 0.5};
}

static mb_status check_settings(const mb_product_settings *settings)
{
    const bool no_leak = isinf(settings->leak_dbc) && settings->leak_dbc < 0.0;
    const mb_checked_field fields[] = {
        {"leak_dbc", no_leak ? 0.0 : settings->leak_dbc, -200.0, 40.0, "dBc"},
        {"message_power", settings->message_power, 1e-12, 1.0, ""},
        {"leak_phase_rad", settings->leak_phase_rad, -2.0 * MB_PI, 2.0 * MB_PI, "rad"},
        {"iq_gain_db", settings->iq_gain_db, -20.0, 20.0, "dB"},
        {"iq_phase_deg", settings->iq_phase_deg, -80.0, 80.0, "degrees"},
        {"dc_re", settings->dc_re, -1.0, 1.0, ""},
        {"dc_im", settings->dc_im, -1.0, 1.0, ""},
    };

    return mb_check_fields(fields, sizeof fields / sizeof fields[0]);
}

mb_status mb_product_create(const mb_product_settings *settings, mb_product **out)
{
    void *memory = NULL;

    *out = NULL;
    mb_status status = check_settings(settings);
    if (status == MB_OK) {
        status = mb_stage_allocate(sizeof **out, "product modulator", &memory);
    }
    if (status != MB_OK) {
        return status;
    }
    double leak = sqrt(settings->message_power * mb_db_power(settings->leak_dbc)); /* 0 for -INFINITY */
    double gain = pow(10.0, settings->iq_gain_db / 20.0);
    double phase_rad = settings->iq_phase_deg * MB_PI / 180.0;
    *out = memory;
    **out = (mb_product){
        .leak_re = leak * cos(settings->leak_phase_rad),
        .leak_im = leak * sin(settings->leak_phase_rad),
        .im_from_re = gain * sin(phase_rad),
        .im_from_im = gain * cos(phase_rad),
        .dc_re = settings->dc_re,
        .dc_im = settings->dc_im,
    };
    return MB_OK;
}

static mb_cf32 modulated(const mb_product *product, double re, double im)
{
    re += product->leak_re;
    im += product->leak_im;
    return (mb_cf32){
        (float)(re + product->dc_re),
        (float)(product->im_from_re * re + product->im_from_im * im + product->dc_im),
    };
}

void mb_product_process(mb_product *product, const float *message, size_t count, mb_cf32 *out)
{
    for (size_t i = 0; i < count; i++) {
        float sample = message[i];
        product->counts.non_finite += mb_scrub_f32(&sample, 1);
        out[i] = modulated(product, (double)sample, 0.0);
    }
}

void mb_product_process_cf32(mb_product *product, const mb_cf32 *in, size_t count, mb_cf32 *out)
{
    for (size_t i = 0; i < count; i++) {
        mb_cf32 sample = in[i];
        product->counts.non_finite += mb_scrub_cf32(&sample, 1);
        out[i] = modulated(product, (double)sample.re, (double)sample.im);
    }
}

size_t mb_product_delay_samples(const mb_product *product)
{
    (void)product;
    return 0;
}

mb_product_counts mb_product_state(const mb_product *product)
{
    return product->counts;
}

void mb_product_reset(mb_product *product)
{
    product->counts = (mb_product_counts){0};
}

void mb_product_destroy(mb_product *product)
{
    mb_release(product);
}

void mb_iq_correction(double gain_db, double phase_deg, double *correction_gain_db,
                      double *correction_phase_deg)
{
    double gain = pow(10.0, gain_db / 20.0);
    double phase_rad = phase_deg * MB_PI / 180.0;
    double from_re = -tan(phase_rad); /* inverse of re, g (im cos p + re sin p) */
    double from_im = 1.0 / (gain * cos(phase_rad));

    *correction_gain_db = 20.0 * log10(hypot(from_re, from_im));
    *correction_phase_deg = atan2(from_re, from_im) * 180.0 / MB_PI;
}
