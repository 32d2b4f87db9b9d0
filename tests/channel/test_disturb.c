/* Noise, interferer and impulses have the power their definitions say, at any rate. */
#include "samples.h"

#include <fftw3.h>

enum { SEED = 15, COUNT = 1 << 18 };

static const double rates_hz[] = {8e3, 48e3, 240e3, 2.4e6, 20e6};
enum { RATE_COUNT = sizeof rates_hz / sizeof rates_hz[0] };

/* What a channel makes of silence. */
static mb_cf32 *of_silence(const mb_channel_settings *settings, size_t count)
{
    mb_channel *channel = channel_of(settings);
    mb_cf32 *samples = samples_of(count);

    mb_channel_process(channel, samples, count, samples);
    mb_channel_destroy(channel);
    return samples;
}

/* Mean square of each bin of one long transform, so that their sum is the mean power. */
static double *bin_powers(const mb_cf32 *samples, size_t count)
{
    mb_cf32 *bins = samples_of(count);
    double *power = malloc(count * sizeof *power);
    fftwf_plan plan = fftwf_plan_dft_1d((int)count, (fftwf_complex *)bins, (fftwf_complex *)bins,
                                        FFTW_FORWARD, FFTW_ESTIMATE);

    assert_non_null(power);
    memcpy(bins, samples, count * sizeof *bins);
    fftwf_execute(plan);
    fftwf_destroy_plan(plan);
    for (size_t k = 0; k < count; k++) {
        power[k] = power_of(&bins[k], 1) / ((double)count * (double)count);
    }
    free(bins);
    return power;
}

/* Power within +-half_hz of the centre. */
static double power_within(const double *power, size_t count, double rate_hz, double half_hz)
{
    double sum = power[0];
    size_t last = (size_t)(half_hz / rate_hz * (double)count);

    for (size_t k = 1; k <= last; k++) {
        sum += power[k] + power[count - k];
    }
    return sum;
}

/* SNR of DESIGN.md: signal power over the noise power in 2 x audio bandwidth, found here by a transform. At
 * 20 MHz only 71 bins fall into the band: four standard deviations of their sum (plus one bin). */
static void snr_is_signal_power_over_noise_in_twice_the_audio_bandwidth(void **state)
{
    (void)state;
    print_message("seed %d\n", SEED);
    for (size_t k = 0; k < RATE_COUNT; k++) {
        mb_channel_settings settings = mb_channel_settings_default();
        settings.rate_hz = rates_hz[k];
        settings.seed = SEED;
        settings.signal_power = 0.03;
        settings.noise_snr_db = 15.0;
        mb_cf32 *samples = of_silence(&settings, COUNT);
        double *power = bin_powers(samples, COUNT);
        double bins = 5400.0 / rates_hz[k] * COUNT;
        double snr = 0.03 / power_within(power, COUNT, rates_hz[k], 2700.0);
        assert_near(snr / mb_db_power(15.0), 1.0, 4.0 / sqrt(bins) + 1.0 / bins);
        /* white: the whole power is that of the band times rate over band */
        double expected = 0.03 / mb_db_power(15.0) * rates_hz[k] / 5400.0;
        assert_near(power_of(samples, COUNT) / expected, 1.0, 4.0 / sqrt(COUNT));
        free(power);
        free(samples);
    }
}

/* Eight standard deviations would be 4 %; 32 bands of 8192 bins each: 1.1 % one standard deviation. */
static void noise_is_flat_over_the_whole_rate(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();

    (void)state;
    settings.seed = SEED + 1;
    settings.noise_snr_db = 0.0;
    mb_cf32 *samples = of_silence(&settings, COUNT);
    double *power = bin_powers(samples, COUNT), mean = power_of(samples, COUNT);
    for (size_t band = 0; band < 32; band++) {
        double sum = 0.0;
        for (size_t k = 0; k < COUNT / 32; k++) {
            sum += power[band * (COUNT / 32) + k];
        }
        assert_near(sum / (mean / 32.0), 1.0, 0.045);
    }
    free(power);
    free(samples);
}

/* The rails are independent and equally strong. */
static void noise_is_circular(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    double cross = 0.0, difference = 0.0;

    (void)state;
    settings.seed = SEED + 2;
    settings.noise_snr_db = 0.0;
    mb_cf32 *samples = of_silence(&settings, COUNT);
    for (size_t n = 0; n < COUNT; n++) {
        cross += (double)samples[n].re * samples[n].im;
        difference += (double)samples[n].re * samples[n].re - (double)samples[n].im * samples[n].im;
    }
    double power = power_of(samples, COUNT);
    assert_near(cross / COUNT / power, 0.0, 2.5 / sqrt(COUNT));
    assert_near(difference / COUNT / power, 0.0, 5.0 / sqrt(COUNT));
    free(samples);
}

static void noise_interferer_and_impulses_follow_the_gain(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();

    (void)state;
    settings.seed = SEED;
    settings.noise_snr_db = 10.0;
    settings.interferer = MB_INTERFERER_TONE;
    settings.impulse_rate_hz = 100.0;
    mb_cf32 *plain = of_silence(&settings, COUNT);
    settings.gain_db = -60.0;
    mb_cf32 *quiet = of_silence(&settings, COUNT);
    /* float rounding of the sums */
    for (size_t n = 0; n < COUNT; n += 17) {
        assert_near(quiet[n].re * 1e3, plain[n].re, 1e-6 * (1.0 + fabs((double)plain[n].re)));
    }
    free(plain);
    free(quiet);
}

static void the_interferer_is_one_line_where_it_should_be(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();

    (void)state;
    settings.seed = SEED;
    settings.signal_power = 0.01;
    settings.interferer = MB_INTERFERER_TONE;
    settings.interferer_db = 20.0;
    settings.interferer_offset_hz = -1234.5;
    mb_cf32 *samples = of_silence(&settings, COUNT);
    assert_near(power_of(samples, COUNT), 1.0, 1e-6);
    assert_near(line_power(samples, COUNT, -1234.5 / 48e3), 1.0, 1e-6);
    free(samples);
}

/* The phases of many seeds fill the circle. */
static void the_interferer_has_a_random_phase(void **state)
{
    double re = 0.0, im = 0.0;

    (void)state;
    for (uint64_t seed = 0; seed < 400; seed++) {
        mb_channel_settings settings = mb_channel_settings_default();
        settings.seed = seed;
        settings.interferer = MB_INTERFERER_TONE;
        mb_cf32 *samples = of_silence(&settings, 1);
        re += samples[0].re;
        im += samples[0].im;
        free(samples);
    }
    /* a sum of 400 unit vectors: four standard deviations of each part */
    assert_near(re / 400.0, 0.0, 4.0 * sqrt(0.5 / 400.0));
    assert_near(im / 400.0, 0.0, 4.0 * sqrt(0.5 / 400.0));
}

/* Seen through a filter of 2 x audio bandwidth an impulse peaks at impulse_db over the signal, whatever the
 * rate: the sum of its spectrum over the band, computed directly. */
static void impulses_have_the_peak_power_asked_for_at_any_rate(void **state)
{
    (void)state;
    for (size_t k = 0; k < RATE_COUNT; k++) {
        mb_channel_settings settings = mb_channel_settings_default();
        settings.rate_hz = rates_hz[k];
        settings.seed = SEED;
        settings.signal_power = 0.04;
        settings.impulse_rate_hz = rates_hz[k] / 1000.0;
        settings.impulse_db = 30.0;
        mb_cf32 *samples = of_silence(&settings, COUNT);
        size_t hits = 0;
        for (size_t n = 0; n < COUNT; n++) {
            double amplitude = hypot((double)samples[n].re, (double)samples[n].im);
            if (amplitude > 0.0 && hits++ == 0) {
                double peak = amplitude * 5400.0 / rates_hz[k];
                assert_near(mb_power_db(peak * peak / 0.04), 30.0, 1e-4);
            }
        }
        /* Poisson with mean 262: four standard deviations */
        assert_near((double)hits, COUNT / 1000.0, 4.0 * sqrt(COUNT / 1000.0));
        free(samples);
    }
}

/* Times between the impulses are exponential: their standard deviation equals their mean. */
static void impulses_come_as_a_poisson_process(void **state)
{
    enum { LONG = 1 << 21 };
    mb_channel_settings settings = mb_channel_settings_default();
    double count = 0.0, sum = 0.0, square = 0.0, last = 0.0;

    (void)state;
    settings.seed = SEED;
    settings.impulse_rate_hz = 240.0; /* one in 200 samples */
    mb_cf32 *samples = of_silence(&settings, LONG);
    for (size_t n = 0; n < LONG; n++) {
        if (samples[n].re != 0.0f || samples[n].im != 0.0f) {
            double between = (double)n - last;
            last = (double)n;
            count += 1.0;
            sum += between;
            square += between * between;
        }
    }
    double mean = sum / count, deviation = sqrt(square / count - mean * mean);
    assert_near(mean / 200.0, 1.0, 0.04);     /* 10000 of them: four standard deviations */
    assert_near(deviation / mean, 1.0, 0.06); /* idem, sqrt(2) more for an exponential, 1/400 for sampling */
    free(samples);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(snr_is_signal_power_over_noise_in_twice_the_audio_bandwidth),
        cmocka_unit_test(noise_is_flat_over_the_whole_rate),
        cmocka_unit_test(noise_is_circular),
        cmocka_unit_test(noise_interferer_and_impulses_follow_the_gain),
        cmocka_unit_test(the_interferer_is_one_line_where_it_should_be),
        cmocka_unit_test(the_interferer_has_a_random_phase),
        cmocka_unit_test(impulses_have_the_peak_power_asked_for_at_any_rate),
        cmocka_unit_test(impulses_come_as_a_poisson_process),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
