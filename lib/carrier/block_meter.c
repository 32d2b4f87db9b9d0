#include "block_meter.h"

#include <math.h>

mb_status block_meter_create(double rate_hz, double high_cut_hz, size_t block, block_meter *out)
{
    size_t count = 0;

    *out = (block_meter){.rate_hz = rate_hz, .block = block};
    /* a voice has most of its power below 1 kHz: half the message band, gently sloped, gives the surest phase
     */
    double cutoff_hz = 0.52 * high_cut_hz;
    mb_status status = mb_design_lowpass(cutoff_hz, cutoff_hz, 50.0, rate_hz, &out->taps, &count);
    if (status != MB_OK) {
        return status;
    }
    status = mb_fir_create(&(mb_fir_settings){.taps = out->taps, .tap_count = count}, &out->low_pass);
    out->scratch = mb_allocate(block, sizeof *out->scratch);
    if (status != MB_OK || out->scratch == NULL) {
        block_meter_destroy(out);
        return mb_fail(MB_ERROR_MEMORY, "", "no memory for the carrier tracker");
    }
    out->delay = (count - 1) / 2;
    double power = 0.0;
    for (size_t i = 0; i < count; i++) {
        power += (double)out->taps[i] * (double)out->taps[i];
    }
    out->noise_bandwidth_hz = power * rate_hz;
    return MB_OK;
}

void block_meter_destroy(block_meter *meter)
{
    mb_fir_destroy(meter->low_pass);
    mb_release(meter->taps);
    mb_release(meter->scratch);
    *meter = (block_meter){0};
}

void block_meter_start(block_meter *meter, double phase_rad, double frequency_rad_s, double lead)
{
    const double turn = 2.0 * MB_PI;
    double now = phase_rad - lead * frequency_rad_s / meter->rate_hz;

    meter->turned_rad = turn * floor(now / turn);
    meter->phase_rad = now - meter->turned_rad;
    mb_fir_reset(meter->low_pass);
}

static void derotate(block_meter *meter, const mb_cf32 *samples, double step)
{
    double cs = cos(meter->phase_rad), sn = sin(meter->phase_rad);
    double step_cs = cos(step), step_sn = sin(step);

    for (size_t i = 0; i < meter->block; i++) {
        float c = (float)cs, s = (float)sn, re = samples[i].re, im = samples[i].im;
        meter->scratch[i] = (mb_cf32){re * c + im * s, im * c - re * s};
        double next = cs * step_cs - sn * step_sn;
        sn = cs * step_sn + sn * step_cs;
        cs = next;
    }
}

block_reading block_meter_read(block_meter *meter, const mb_cf32 *samples, double frequency_rad_s)
{
    const double turn = 2.0 * MB_PI;
    double step = frequency_rad_s / meter->rate_hz;
    double middle = 0.5 * ((double)meter->block - 1.0) - (double)meter->delay;
    block_reading reading = {meter->turned_rad + meter->phase_rad + middle * step, 0.0, 0.0, 0.0};
    float energy = 0.0f, square_re = 0.0f, square_im = 0.0f;

    derotate(meter, samples, step);
    mb_fir_process_cf32(meter->low_pass, meter->scratch, meter->block, meter->scratch);
    for (size_t i = 0; i < meter->block; i++) {
        float re = meter->scratch[i].re, im = meter->scratch[i].im;
        float a = re * re, b = im * im;
        energy += a + b;
        square_re += a - b;
        square_im += 2.0f * (re * im);
    }
    reading.energy = (double)energy;
    reading.square_re = (double)square_re;
    reading.square_im = (double)square_im;
    meter->phase_rad += (double)meter->block * step;
    double turns = turn * floor(meter->phase_rad / turn);
    meter->phase_rad -= turns;
    meter->turned_rad += turns;
    return reading;
}
