/* Yardstick: the suppressed-carrier AM demodulator of liquid-dsp on raw cf32 samples at 48 kHz, told the
 * carrier offset at the start. liquid_receiver FROM.cf32 OFFSET_HZ TO.wav */
#include <complex.h>
#include <stdio.h>
#include <stdlib.h>

#include <liquid/liquid.h>
#include <sndfile.h>

enum { BLOCK = 4800, RATE_HZ = 48000, AUDIO_RATE_HZ = 16000 };

int main(int argc, char **argv)
{
    static float complex in[BLOCK], mixed[BLOCK], down[BLOCK];
    static float audio[BLOCK];
    FILE *from = argc == 4 ? fopen(argv[1], "rb") : NULL;
    SF_INFO info = {.samplerate = AUDIO_RATE_HZ, .channels = 1, .format = SF_FORMAT_WAV | SF_FORMAT_FLOAT};
    SNDFILE *to = from != NULL ? sf_open(argv[3], SFM_WRITE, &info) : NULL;

    if (to == NULL) {
        fprintf(stderr, "usage: liquid_receiver FROM.cf32 OFFSET_HZ TO.wav\n");
        return 2;
    }
    nco_crcf oscillator = nco_crcf_create(LIQUID_VCO);
    msresamp_crcf resampler = msresamp_crcf_create((float)AUDIO_RATE_HZ / (float)RATE_HZ, 60.0f);
    ampmodem demodulator = ampmodem_create(1.0f, LIQUID_AMPMODEM_DSB, 1);
    nco_crcf_set_frequency(oscillator, (float)(6.283185307179586 * strtod(argv[2], NULL) / RATE_HZ));
    for (size_t got = 0; (got = fread(in, sizeof in[0], BLOCK, from)) > 0;) {
        unsigned count = 0;
        nco_crcf_mix_block_down(oscillator, in, mixed, (unsigned)got);
        msresamp_crcf_execute(resampler, mixed, (unsigned)got, down, &count);
        ampmodem_demodulate_block(demodulator, down, count, audio);
        (void)sf_write_float(to, audio, (sf_count_t)count);
    }
    ampmodem_destroy(demodulator);
    msresamp_crcf_destroy(resampler);
    nco_crcf_destroy(oscillator);
    (void)fclose(from);
    return sf_close(to) == 0 ? 0 : 1;
}
