/* Wideband to 16 kHz: our decimator against the chain of an oscillator and a multi-stage resampler of
 * liquid-dsp, asked for the same 80 dB. 16-bit samples have to be turned to float for that chain. */
#include "bench.h"

#include <complex.h>
#include <stdio.h>

#include <liquid/liquid.h>

#include "mirrorband/filter.h"

enum { SAMPLES = 1 << 20, REPEATS = 9, OUR_PASSES = 8, BLOCK = 4096 };

/* Both chains, made for one case. */
typedef struct chains {
    bool is_short;
    const mb_cf32 *wide;
    const mb_ci16 *wide_short;
    mb_cf32 *out;
    mb_decimator *ours;
    nco_crcf oscillator;
    msresamp_crcf resampler;
} chains;

static double pass_ours(const chains *c)
{
    double begun = mb_clock_s();

    for (int pass = 0; pass < OUR_PASSES; pass++) {
        if (c->is_short) {
            (void)mb_decimator_process_ci16(c->ours, c->wide_short, SAMPLES, c->out);
        } else {
            (void)mb_decimator_process_cf32(c->ours, c->wide, SAMPLES, c->out);
        }
    }
    return OUR_PASSES * (double)SAMPLES / (mb_clock_s() - begun);
}

static double pass_liquid(const chains *c)
{
    static float complex in[BLOCK], mixed[BLOCK], made[BLOCK];
    double begun = mb_clock_s();

    for (size_t at = 0; at < SAMPLES; at += BLOCK) {
        unsigned count = 0;
        for (size_t i = 0; i < BLOCK; i++) {
            in[i] = c->is_short
                        ? ((float)c->wide_short[at + i].re + (float)c->wide_short[at + i].im * I) / 32768.0f
                        : c->wide[at + i].re + c->wide[at + i].im * I;
        }
        nco_crcf_mix_block_down(c->oscillator, in, mixed, BLOCK);
        msresamp_crcf_execute(c->resampler, mixed, BLOCK, made, &count);
    }
    return (double)SAMPLES / (mb_clock_s() - begun);
}

/* Alternates the two, so that both see the same machine. */
static void compare(const char *name, chains *c, double rate_hz, double offset_hz)
{
    double ours[REPEATS], liquid[REPEATS], ratio[REPEATS];
    mb_decimator_settings settings = mb_decimator_settings_default();

    settings.rate_in_hz = rate_hz;
    settings.offset_hz = offset_hz;
    bench_require(mb_decimator_create(&settings, &c->ours));
    c->oscillator = nco_crcf_create(LIQUID_NCO);
    nco_crcf_set_frequency(c->oscillator, (float)(2.0 * MB_PI * offset_hz / rate_hz));
    c->resampler = msresamp_crcf_create((float)(settings.rate_out_hz / rate_hz), 80.0f);
    for (int i = 0; i < REPEATS; i++) {
        ours[i] = pass_ours(c);
        liquid[i] = pass_liquid(c);
        ratio[i] = ours[i] / liquid[i];
    }
    printf("%s: %.0f Msample/s, liquid-dsp chain %.1f Msample/s, ratio %.1f (median of %d)\n", name,
           bench_median(ours, REPEATS) / 1e6, bench_median(liquid, REPEATS) / 1e6,
           bench_median(ratio, REPEATS), REPEATS);
    nco_crcf_destroy(c->oscillator);
    msresamp_crcf_destroy(c->resampler);
    mb_decimator_destroy(c->ours);
}

void bench_decimate(void)
{
    mb_cf32 *wide = mb_allocate(SAMPLES, sizeof *wide), *out = mb_allocate(SAMPLES, sizeof *out);
    mb_ci16 *wide_short = mb_allocate(SAMPLES, sizeof *wide_short);
    mb_random random;

    if (wide == NULL || out == NULL || wide_short == NULL) {
        bench_require(mb_fail(MB_ERROR_MEMORY, "", "no memory for the samples"));
    }
    mb_random_seed(&random, 1, 0);
    for (size_t i = 0; i < SAMPLES; i++) {
        uint64_t bits = mb_random_bits(&random);
        wide_short[i] = (mb_ci16){(int16_t)(bits & 0xffffu), (int16_t)(bits >> 48)};
        wide[i] = (mb_cf32){(float)wide_short[i].re / 32768.0f, (float)wide_short[i].im / 32768.0f};
    }
    chains as_float = {.is_short = false, .wide = wide, .out = out};
    chains as_short = {.is_short = true, .wide_short = wide_short, .out = out};
    compare("translate and decimate cf32 2.4 MHz to 16 kHz", &as_float, 2.4e6, 312500.0);
    compare("translate and decimate cf32 20 MHz to 16 kHz", &as_float, 20e6, 3.2e6);
    compare("translate and decimate ci16 2.4 MHz to 16 kHz", &as_short, 2.4e6, 312500.0);
    compare("translate and decimate ci16 20 MHz to 16 kHz", &as_short, 20e6, 3.2e6);
    mb_release(wide);
    mb_release(out);
    mb_release(wide_short);
}
