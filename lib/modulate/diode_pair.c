#include <math.h>

#include "checked.h"
#include "equivalent.h"

static const double exponent_limit = 80.0;

/* What drives one diode, in multiples of n Vt. */
typedef struct diode_drive {
    double current;      /* saturation current, with the sign it has in the output */
    double from_carrier; /* exponent per volt of carrier */
    double from_message; /* and of message */
} diode_drive;

struct mb_diode_pair {
    diode_drive drive[2];
};

mb_diode_pair_settings mb_diode_pair_settings_default(void)
{
    const mb_diode diode = {.saturation_current_a = 1e-9, .ideality = 1.0};

    return (mb_diode_pair_settings){.diode = {diode, diode}, .thermal_voltage_v = 0.02585};
}

static mb_status check_settings(const mb_diode_pair_settings *settings)
{
    const mb_diode *first = &settings->diode[0], *second = &settings->diode[1];
    const mb_checked_field fields[] = {
        {"diode[0].saturation_current_a", first->saturation_current_a, 1e-18, 1e-3, "A"},
        {"diode[1].saturation_current_a", second->saturation_current_a, 1e-18, 1e-3, "A"},
        {"diode[0].ideality", first->ideality, 0.5, 3.0, ""},
        {"diode[1].ideality", second->ideality, 0.5, 3.0, ""},
        {"thermal_voltage_v", settings->thermal_voltage_v, 0.01, 0.1, "V"},
        {"carrier_unbalance", settings->carrier_unbalance, -0.5, 0.5, ""},
        {"message_unbalance", settings->message_unbalance, -0.5, 0.5, ""},
    };

    return mb_check_fields(fields, sizeof fields / sizeof fields[0]);
}

static diode_drive drive_of(const mb_diode_pair_settings *settings, size_t which)
{
    double sign = which == 0 ? 1.0 : -1.0;
    double slope = 1.0 / (settings->diode[which].ideality * settings->thermal_voltage_v);

    return (diode_drive){
        .current = sign * settings->diode[which].saturation_current_a,
        .from_carrier = slope * (1.0 + sign * settings->carrier_unbalance),
        .from_message = slope * (sign + settings->message_unbalance),
    };
}

mb_status mb_diode_pair_create(const mb_diode_pair_settings *settings, mb_diode_pair **out)
{
    void *memory = NULL;

    *out = NULL;
    mb_status status = check_settings(settings);
    if (status == MB_OK) {
        status = mb_stage_allocate(sizeof **out, "diode pair", &memory);
    }
    if (status == MB_OK) {
        *out = memory;
        (*out)->drive[0] = drive_of(settings, 0);
        (*out)->drive[1] = drive_of(settings, 1);
    }
    return status;
}

static double current(const diode_drive *drive, double message, double carrier)
{
    double exponent = drive->from_carrier * carrier + drive->from_message * message;

    return drive->current * expm1(fmin(exponent, exponent_limit));
}

void mb_diode_pair_process(mb_diode_pair *model, const double *message_v, const double *carrier_v,
                           size_t count, double *out)
{
    for (size_t i = 0; i < count; i++) {
        double message = mb_finite(message_v[i]), carrier = mb_finite(carrier_v[i]);
        out[i] = current(&model->drive[0], message, carrier) + current(&model->drive[1], message, carrier);
    }
}

void mb_diode_pair_destroy(mb_diode_pair *model)
{
    mb_release(model);
}

mb_equivalent mb_diode_pair_equivalent(const mb_diode_pair_settings *settings, double message_peak_v,
                                       double carrier_peak_v)
{
    double cosine[4] = {0.0}, audio = 0.0;

    for (size_t which = 0; which < 2; which++) {
        diode_drive drive = drive_of(settings, which);
        double carrier = drive.from_carrier * carrier_peak_v, message = drive.from_message * message_peak_v;
        double at_carrier = 2.0 * drive.current * mb_bessel_i(1, carrier);
        for (unsigned k = 0; k < 4; k++) {
            cosine[k] += (k == 0 ? 1.0 : 2.0) * at_carrier * mb_bessel_i(k, message);
        }
        audio += 2.0 * drive.current * mb_bessel_i(0, carrier) * mb_bessel_i(1, message);
    }
    return mb_equivalent_of_sine(cosine, audio, message_peak_v);
}
