/** assess_signals.h - signals of known figures for the tests of the assessment. */
#ifndef TESTS_CHAIN_ASSESS_SIGNALS_H
#define TESTS_CHAIN_ASSESS_SIGNALS_H

#include "check.h"
#include "mirrorband/assess.h"
#include "mirrorband/filter.h"

/** Noise of 300-2700 Hz in syllables, with a pause of 0.7 s every 3 s; the caller's (mb_release). */
static inline float *speech_like(double rate_hz, size_t count, uint64_t seed)
{
    mb_random random;
    float *taps = NULL, *out = mb_allocate(count, sizeof *out);
    size_t tap_count = 0;
    mb_fir *band = NULL;

    assert_non_null(out);
    assert_ok(mb_design_bandpass(400.0, 2600.0, 200.0, 80.0, rate_hz, &taps, &tap_count));
    assert_ok(mb_fir_create(&(mb_fir_settings){.taps = taps, .tap_count = tap_count}, &band));
    mb_random_seed(&random, seed, 0);
    for (size_t i = 0; i < count; i++) {
        out[i] = (float)(0.4 * mb_random_normal(&random));
    }
    mb_fir_process_f32(band, out, count, out);
    for (size_t i = 0; i < count; i++) {
        double time_s = (double)i / rate_hz, syllable = fabs(sin(2.0 * MB_PI * 1.7 * time_s));
        bool pause = fmod(time_s, 3.0) > 2.3;
        out[i] *= (float)(pause ? 0.0 : 0.3 + 0.7 * syllable);
    }
    mb_fir_process_f32(band, out, count, out);
    mb_fir_destroy(band);
    mb_release(taps);
    return out;
}

static inline double mean_square(const float *samples, size_t count)
{
    double sum = 0.0;

    for (size_t i = 0; i < count; i++) {
        sum += (double)samples[i] * (double)samples[i];
    }
    return sum / (double)count;
}

/** How a message is put on the air. */
typedef struct emission_plan {
    double rate_hz, offset_hz, drift_hz_per_s, phase_rad;
    double leak_dbc;  /* over the mean power of both sidebands */
    double noise_db;  /* noise in 5400 Hz over the mean power of both sidebands; -INFINITY: none */
    bool sixteen_bit; /* dithered and rounded to 16 bits */
} emission_plan;

static inline double plan_phase(const emission_plan *plan, double time_s)
{
    return plan->phase_rad +
           2.0 * MB_PI * (plan->offset_hz * time_s + 0.5 * plan->drift_hz_per_s * time_s * time_s);
}

static inline mb_cf32 *on_air(const emission_plan *plan, const float *message, size_t count, uint64_t seed)
{
    mb_random random;
    mb_cf32 *out = mb_allocate(count, sizeof *out);
    double power = mean_square(message, count), leak = sqrt(power * mb_db_power(plan->leak_dbc));
    double noise = sqrt(0.5 * power * mb_db_power(plan->noise_db) * plan->rate_hz / 5400.0);

    assert_non_null(out);
    mb_random_seed(&random, seed, 1);
    for (size_t i = 0; i < count; i++) {
        double phase = plan_phase(plan, (double)i / plan->rate_hz), size = (double)message[i] + leak;
        double re = size * cos(phase), im = size * sin(phase);
        if (noise > 0.0) {
            re += noise * mb_random_normal(&random);
            im += noise * mb_random_normal(&random);
        }
        if (plan->sixteen_bit) {
            re = rint(re * 32768.0 + mb_random_uniform(&random) - 0.5) / 32768.0;
            im = rint(im * 32768.0 + mb_random_uniform(&random) - 0.5) / 32768.0;
        }
        out[i] = (mb_cf32){(float)re, (float)im};
    }
    return out;
}

/** Both passes in blocks; truth by rows of 10 ms when wanted. Leaves the object to the caller. */
static inline mb_status assess_in_blocks(const mb_assess_iq_settings *settings, const mb_cf32 *in,
                                         size_t count, size_t block, mb_assess_iq **out)
{
    assert_ok(mb_assess_iq_create(settings, out));
    for (size_t done = 0; done < count; done += block) {
        size_t run = count - done < block ? count - done : block;
        assert_ok(mb_assess_iq_listen(*out, in + done, run));
    }
    mb_status status = mb_assess_iq_resolve(*out);
    for (size_t done = 0; done < count; done += block) {
        size_t run = count - done < block ? count - done : block;
        mb_assess_iq_process(*out, in + done, run);
    }
    return status;
}

#endif
