/* A path's gain is a complex Gaussian process with a Gaussian Doppler spectrum of the spread asked for. */
#include "check.h"

#include "channel_reference.h"
#include "fading.h"

enum { SEED = 1487, CUTS = 4, SPREADS_LONG = 20000 };

/* A tap of spread 1 Hz whose nodes are CUTS samples apart, 256 samples a second. */
static const double RATE_HZ = 64.0 * CUTS;

typedef struct tap_bench {
    channel_gauss gauss;
    double *fir;
    fading_tap tap;
} tap_bench;

static tap_bench *bench_start(void)
{
    static tap_bench bench;
    mb_random random;
    size_t length = fading_fir_length(RATE_HZ, 1.0);

    print_message("seed %d\n", SEED);
    mb_random_seed(&random, SEED, 0);
    channel_gauss_prepare(&bench.gauss);
    bench.fir = mb_allocate(length, sizeof *bench.fir);
    assert_non_null(bench.fir);
    fading_fir_design(RATE_HZ, 1.0, bench.fir, length);
    bench.tap = (fading_tap){.fir = bench.fir, .fir_length = length, .gauss = &bench.gauss};
    bench.tap.noise = mb_allocate(length, sizeof *bench.tap.noise);
    assert_non_null(bench.tap.noise);
    fading_tap_start(&bench.tap, &random);
    return &bench;
}

static void bench_end(tap_bench *bench)
{
    mb_release(bench->tap.noise);
    mb_release(bench->fir);
}

static double fir_correlation(const double *fir, size_t length, size_t lag)
{
    double sum = 0.0;

    for (size_t i = 0; i + lag < length; i++) {
        sum += fir[i] * fir[i + lag];
    }
    return sum;
}

/* The correlation of the FIR is that of the tap, whatever the noise: FACTS D exp(-pi^2 d^2 tau^2 / 2), here
 * against the transform of the spectrum by scipy.integrate.quad. Lags are whole nodes; 1e-6 for where the FIR
 * is cut. */
static void the_filter_has_the_autocorrelation_of_the_doppler_spectrum(void **state)
{
    const double spread_hz = 2.0, rate_hz = 8192.0;
    size_t length = fading_fir_length(rate_hz, spread_hz);
    double *fir = mb_allocate(length, sizeof *fir);
    double nodes_per_s = rate_hz / (double)fading_node_interval(rate_hz, spread_hz);

    (void)state;
    assert_non_null(fir);
    fading_fir_design(rate_hz, spread_hz, fir, length);
    for (size_t k = 0; k < sizeof tap_autocorrelation / sizeof tap_autocorrelation[0]; k++) {
        double lag = tap_autocorrelation[k].lag_s / spread_hz * nodes_per_s;
        if (lag == rint(lag)) {
            assert_near(fir_correlation(fir, length, (size_t)lag), tap_autocorrelation[k].value, 1e-6);
        }
    }
    mb_release(fir);
}

/* Between nodes: the mean power of the cubic half way, from the correlation of the nodes, is 1 but for the
 * error of interpolation (-110 dB of power would be 1e-11; the power itself moves by about twice the
 * amplitude error of -55 dB at most). */
static void the_cubic_keeps_the_power_between_nodes(void **state)
{
    const double weight[4] = {-1.0 / 16.0, 9.0 / 16.0, 9.0 / 16.0, -1.0 / 16.0}; /* Lagrange at 1/2 */
    size_t length = fading_fir_length(RATE_HZ, 1.0);
    double *fir = mb_allocate(length, sizeof *fir);
    double power = 0.0;

    (void)state;
    assert_non_null(fir);
    fading_fir_design(RATE_HZ, 1.0, fir, length);
    for (int i = 0; i < 4; i++) {
        for (int k = 0; k < 4; k++) {
            power += weight[i] * weight[k] * fir_correlation(fir, length, (size_t)abs(i - k));
        }
    }
    assert_near(power, 1.0, 2e-5);
    mb_release(fir);
}

static void the_cubic_goes_through_the_nodes(void **state)
{
    tap_bench *bench = bench_start();

    (void)state;
    for (int i = 0; i < 100; i++) {
        double complex middle[2] = {bench->tap.node[1], bench->tap.node[2]};
        for (int end = 0; end < 2; end++) {
            double complex value = fading_tap_value(&bench->tap, end);
            assert_near(creal(value), creal(middle[end]), 1e-12);
            assert_near(cimag(value), cimag(middle[end]), 1e-12);
        }
        fading_tap_advance(&bench->tap);
    }
    bench_end(bench);
}

/* Time averages over 20000/d against the same reference: 0.02 is three standard deviations of an average over
 * about 20000 independent stretches. */
static void the_process_has_the_autocorrelation_asked_for(void **state)
{
    enum { HISTORY = 128 };
    static double complex history[HISTORY];
    tap_bench *bench = bench_start();
    double complex sum[2] = {0.0, 0.0};
    double power = 0.0;
    const size_t lag[2] = {24, 40}; /* nodes at 64 a second: 0.375 s, 0.625 s */
    const double expected[2] = {0.4995, 0.14549};
    size_t count = (size_t)SPREADS_LONG * 64;

    (void)state;
    for (size_t i = 0; i < count; i++) {
        double complex value = fading_tap_node(&bench->tap);
        history[i % HISTORY] = value;
        power += creal(value * conj(value));
        for (int k = 0; k < 2; k++) {
            sum[k] += value * conj(history[(i + HISTORY - lag[k]) % HISTORY]);
        }
    }
    assert_near(power / (double)count, 1.0, 0.02);
    for (int k = 0; k < 2; k++) {
        assert_near(creal(sum[k]) / (double)count, expected[k], 0.02);
        assert_near(cimag(sum[k]) / (double)count, 0.0, 0.02);
    }
    bench_end(bench);
}

typedef struct fade_count {
    double below, crossings;
    bool was_below;
} fade_count;

static void count_fades(fade_count *fades, double power)
{
    for (size_t k = 0; k < 4; k++) {
        bool below = power < mb_db_power(rayleigh_levels[k].level_db);
        fades[k].below += below;
        fades[k].crossings += fades[k].was_below && !below;
        fades[k].was_below = below;
    }
}

/* The noise behind the tap: unit power, half on each rail, from 10^6 draws: 0.4 % is four standard
 * deviations.
 */
static void the_noise_of_a_tap_is_circular_and_of_unit_power(void **state)
{
    tap_bench *bench = bench_start();
    double re = 0.0, im = 0.0, cross = 0.0;
    const size_t count = 1000000;

    (void)state;
    for (size_t i = 0; i < count; i++) {
        size_t newest = bench->tap.noise_at;
        (void)fading_tap_node(&bench->tap);
        double complex noise = bench->tap.noise[newest];
        re += creal(noise) * creal(noise);
        im += cimag(noise) * cimag(noise);
        cross += creal(noise) * cimag(noise);
    }
    assert_near(re / (double)count, 0.5, 0.003);
    assert_near(im / (double)count, 0.5, 0.003);
    assert_near(cross / (double)count, 0.0, 0.002);
    bench_end(bench);
}

/* Rayleigh shares and level crossing rates, FACTS D and scipy (Rice's formula), over 20000/d. Tolerances of
 * three standard deviations, which the number of fades sets (15000, 10000, 3500, 1100): 2, 3, 6, 12 %, and a
 * little more for the time spent in them. */
static void fades_are_as_deep_and_as_frequent_as_rayleighs(void **state)
{
    tap_bench *bench = bench_start();
    fade_count fades[4] = {{0.0, 0.0, false}};
    const double tolerance[4] = {0.02, 0.03, 0.06, 0.12};
    const double total = (double)SPREADS_LONG * 64.0 * CUTS;

    (void)state;
    for (size_t i = 0; i < (size_t)SPREADS_LONG * 64; i++) {
        for (int cut = 0; cut < CUTS; cut++) {
            double complex value = fading_tap_value(&bench->tap, cut / (double)CUTS);
            count_fades(fades, creal(value) * creal(value) + cimag(value) * cimag(value));
        }
        fading_tap_advance(&bench->tap);
    }
    for (size_t k = 0; k < 4; k++) {
        print_message("%g dB: share %.6f, %.5f crossings/s\n", rayleigh_levels[k].level_db,
                      fades[k].below / total, fades[k].crossings / SPREADS_LONG);
        assert_near(fades[k].below / total / rayleigh_levels[k].share, 1.0, 1.5 * tolerance[k]);
        assert_near(fades[k].crossings / SPREADS_LONG / rayleigh_levels[k].crossings_per_s, 1.0,
                    tolerance[k]);
    }
    bench_end(bench);
}

/* At any rate and spread there are 64 nodes or more to the spread, as long as the rate allows. */
static void nodes_are_close_enough_at_any_rate(void **state)
{
    (void)state;
    for (int i = 0; i <= 14; i++) {
        double rate_hz = 8e3 * pow(2500.0, i / 14.0);
        for (int k = 0; k <= 12; k++) {
            double spread_hz = 1e-4 * pow(10.0, k / 2.0);
            double nodes_per_s = rate_hz / (double)fading_node_interval(rate_hz, spread_hz);
            assert_at_least(nodes_per_s, 64.0 * spread_hz * (1.0 - 1e-12));
            assert_at_most(fading_fir_length(rate_hz, spread_hz), 500);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_filter_has_the_autocorrelation_of_the_doppler_spectrum),
        cmocka_unit_test(the_cubic_keeps_the_power_between_nodes),
        cmocka_unit_test(the_cubic_goes_through_the_nodes),
        cmocka_unit_test(the_process_has_the_autocorrelation_asked_for),
        cmocka_unit_test(fades_are_as_deep_and_as_frequent_as_rayleighs),
        cmocka_unit_test(nodes_are_close_enough_at_any_rate),
        cmocka_unit_test(the_noise_of_a_tap_is_circular_and_of_unit_power),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
