/** around_carrier.h - a model's output brought down from its carrier, held against the baseband equivalent.
 */
#ifndef TESTS_MODULATE_AROUND_CARRIER_H
#define TESTS_MODULATE_AROUND_CARRIER_H

#include "line.h"
#include "mirrorband/modulate.h"

/**
 * Greatest difference between the lines around the carrier bin of a real record (each side `reach` bins,
 * turned by carrier_delay samples of the carrier) and the lines of the equivalent modulator for the message
 * u, relative to the sideband of a full-scale message. A real line a cos + b sin at fc + k is (a - jb) at k
 * of baseband; a message cos(w t) of amplitude 1 has baseband lines of 1/2 and real lines of sideband_gain
 * / 2.
 */
static inline double around_carrier_difference(const double *record, size_t count, long carrier_bin,
                                               long reach, double carrier_delay,
                                               const mb_equivalent *equivalent, const float *u)
{
    mb_equivalent_modulator_settings settings = mb_equivalent_modulator_settings_default();
    mb_equivalent_modulator *modulator = NULL;
    mb_cf32 *baseband = test_calloc(count, sizeof *baseband);
    double most = 0.0;

    settings.equivalent = *equivalent;
    assert_ok(mb_equivalent_modulator_create(&settings, &modulator));
    mb_equivalent_modulator_process(modulator, u, count, baseband);
    for (long k = -reach; k <= reach; k++) {
        line passed = line_of_real(record, count, carrier_bin + k);
        line expected = line_of_complex(baseband, count, k);
        double angle = 2.0 * MB_PI * carrier_delay * (double)(carrier_bin + k) / (double)count;
        double re = (passed.re * cos(angle) - passed.im * sin(angle)) / equivalent->sideband_gain;
        double im = (passed.re * sin(angle) + passed.im * cos(angle)) / equivalent->sideband_gain;
        most = fmax(most, hypot(re - expected.re, im - expected.im));
    }
    mb_equivalent_modulator_destroy(modulator);
    test_free(baseband);
    return 2.0 * most;
}

#endif
