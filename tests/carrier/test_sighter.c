/* One look at a stretch of baseband: where the missing carrier is, and whether there is one. */
#include "signals.h"

#include "mirrorband/carrier.h"
#include "mirrorband/measure.h"

enum { LONGEST = 1 << 18 };

static float message[LONGEST];
static mb_cf32 baseband[LONGEST];

typedef struct look_errors {
    double offset_hz2; /* mean squares */
    double phase_rad2;
} look_errors;

/*
 * Squared errors of looks at a white message. The stretch is weighted by a Hann window, which costs 1.5 in
 * the variance of the phase (its noise bandwidth) and in that of the frequency 28.1/12 = 2.34 (integrals of
 * w^2 t^2 over the square of w t^2, against the even weight of the bound).
 */
#define HANN_PHASE     1.5
#define HANN_FREQUENCY 2.34

static look_errors errors_of_looks(double snr_db, size_t looks, uint64_t seed)
{
    mb_sighting_settings settings = mb_sighting_settings_default();
    const signal_carrier carrier = {411.3, 0.0, 0.7};
    look_errors errors = {0.0, 0.0};
    mb_sighter *sighter = NULL;

    assert_ok(mb_sighter_create(&settings, &sighter));
    size_t length = mb_sighter_length(sighter), count = looks * length;
    assert_true(count <= LONGEST);
    signal_white(message, count, seed);
    signal_dsb(message, count, &carrier, baseband);
    signal_add_noise(baseband, count, 1.0, snr_db, seed);
    for (size_t i = 0; i < looks; i++) {
        mb_sighting seen = mb_sighter_look(sighter, baseband + i * length);
        double middle = (double)(i * length) + 0.5 * ((double)length - 1.0);
        double phase = signal_difference(seen.phase_rad, signal_phase(&carrier, middle), MB_PI);
        errors.offset_hz2 += (seen.offset_hz - carrier.offset_hz) * (seen.offset_hz - carrier.offset_hz);
        errors.phase_rad2 += phase * phase;
    }
    errors.offset_hz2 /= (double)looks;
    errors.phase_rad2 /= (double)looks;
    mb_sighter_destroy(sighter);
    return errors;
}

/*
 * Variance of a block phase (RECEIVER form (1 + 1/2 rho)/(4 W T rho), here with all the noise of the baseband
 * let in) and of the frequency, 12/T^2 of it as for any line (Rife and Boorstyn 1974). 80 looks: a mean
 * square is good to 16 % (one sigma); a factor of 1.7 is four sigma.
 */
static void the_carrier_is_found_to_the_accuracy_that_theory_allows(void **state)
{
    static const double snrs_db[] = {20.0, 10.0, 6.0};
    const double length_s = 0.2;

    (void)state;
    print_message("seeds 11 to 13\n");
    for (size_t i = 0; i < 3; i++) {
        look_errors errors = errors_of_looks(snrs_db[i], 80, 11 + i);
        double rho = mb_db_power(snrs_db[i]) * SIGNAL_BAND_HZ / SIGNAL_RATE_HZ;
        double block = mb_theory_block_variance(rho, SIGNAL_RATE_HZ, length_s);
        double phase = errors.phase_rad2 / (HANN_PHASE * block);
        double offset =
            errors.offset_hz2 * pow(2.0 * MB_PI * length_s, 2.0) / (12.0 * HANN_FREQUENCY * block);
        print_message("%g dB: phase %.2f, offset %.2f of theory\n", snrs_db[i], phase, offset);
        assert_true(phase > 0.6 && phase < 1.7);
        assert_true(offset > 0.6 && offset < 1.7);
    }
}

static void a_voice_is_accepted_wherever_it_lies_in_the_span(void **state)
{
    static const double offsets_hz[] = {-990.0, -137.0, 0.0, 7.25, 640.0, 995.0};
    mb_sighting_settings settings = mb_sighting_settings_default();
    mb_sighter *sighter = NULL;

    (void)state;
    settings.length_s = 0.6;
    assert_ok(mb_sighter_create(&settings, &sighter));
    signal_voice(message, signal_samples(0.6), 118.0, 21);
    for (size_t i = 0; i < sizeof offsets_hz / sizeof offsets_hz[0]; i++) {
        const signal_carrier carrier = {offsets_hz[i], 0.0, 0.3 * (double)i};
        signal_noisy_voice(message, signal_samples(0.6), &carrier, 20.0, 22, baseband);
        mb_sighting seen = mb_sighter_look(sighter, baseband);
        assert_true(seen.accepted);
        assert_near(seen.offset_hz, offsets_hz[i], 0.5); /* bound at 20 dB over 0.6 s: 0.03 Hz rms */
    }
    mb_sighter_destroy(sighter);
}

typedef struct look_counts {
    size_t looks, accepted;
} look_counts;

/* Looks every 20 ms as the acquisition does, with the default thresholds. */
static look_counts count_accepted(size_t count)
{
    mb_sighting_settings settings = mb_sighting_settings_default();
    look_counts counts = {0, 0};
    mb_sighter *sighter = NULL;

    assert_ok(mb_sighter_create(&settings, &sighter));
    for (size_t at = 0; at + mb_sighter_length(sighter) <= count; at += signal_samples(0.02)) {
        counts.looks++;
        counts.accepted += mb_sighter_look(sighter, baseband + at).accepted ? 1 : 0;
    }
    mb_sighter_destroy(sighter);
    return counts;
}

/* The threshold is set for 1e-7 a look. */
static void noise_is_never_accepted(void **state)
{
    (void)state;
    print_message("seed 31\n");
    memset(baseband, 0, sizeof baseband);
    signal_add_noise(baseband, LONGEST, 1.0, 0.0, 31);
    look_counts counts = count_accepted(LONGEST);
    assert_true(counts.looks > 800);
    assert_int_equal(counts.accepted, 0);
}

static void silence_is_refused(void **state)
{
    (void)state;
    memset(baseband, 0, sizeof baseband);
    assert_int_equal(count_accepted(16000).accepted, 0);
}

/* Its square is a line as high as that of any message, but all its power lies in the middle. */
static void a_plain_carrier_is_refused(void **state)
{
    const signal_carrier carrier = {-220.0, 0.0, 0.1};

    (void)state;
    memset(message, 0, sizeof message);
    signal_am(message, 0.1, 32000, &carrier, baseband);
    signal_add_noise(baseband, 32000, 0.01, 20.0, 41);
    assert_int_equal(count_accepted(32000).accepted, 0);
}

/* Full AM at about 70 % depth on the peaks of the voice. */
static void a_voice_with_its_full_carrier_is_refused(void **state)
{
    const signal_carrier carrier = {150.0, 0.0, 0.1};

    (void)state;
    signal_voice(message, 64000, 105.0, 42);
    signal_am(message, 0.5, 64000, &carrier, baseband);
    signal_add_noise(baseband, 64000, 0.01, 20.0, 43);
    assert_int_equal(count_accepted(64000).accepted, 0);
}

/*
 * The harmonics of a pitch mirror each other about half of its multiples: a single look can be deceived (the
 * acquisition asks for several that agree). Measured on this voice: none to a few in a thousand.
 */
static void one_sideband_alone_hardly_ever_passes_a_look(void **state)
{
    const signal_carrier carrier = {-300.0, 0.0, 0.1};

    (void)state;
    print_message("seeds 51 to 53\n");
    for (uint64_t seed = 51; seed <= 53; seed++) {
        signal_voice(message, LONGEST, 90.0 + 45.0 * (double)(seed - 51), seed);
        signal_ssb(message, LONGEST, &carrier, baseband);
        signal_add_noise(baseband, LONGEST, 0.01, 25.0, seed);
        look_counts counts = count_accepted(LONGEST);
        print_message("accepted %zu of %zu looks\n", counts.accepted, counts.looks);
        assert_at_most(counts.accepted, 0.01 * (double)counts.looks);
    }
}

/* A look at a given offset judges that one, and names the other only where it fails. */
static void a_look_at_a_wrong_offset_fails_and_names_the_right_one(void **state)
{
    mb_sighting_settings settings = mb_sighting_settings_default();
    const signal_carrier carrier = {333.0, 0.0, 0.0};
    mb_sighting elsewhere;
    mb_sighter *sighter = NULL;

    (void)state;
    settings.length_s = 0.6;
    assert_ok(mb_sighter_create(&settings, &sighter));
    signal_white(message, signal_samples(0.6), 61);
    signal_dsb(message, signal_samples(0.6), &carrier, baseband);
    signal_add_noise(baseband, signal_samples(0.6), 1.0, 15.0, 62);
    assert_false(mb_sighter_look_at(sighter, baseband, -100.0, &elsewhere).accepted);
    assert_true(elsewhere.accepted);
    assert_near(elsewhere.offset_hz, 333.0, 0.5);
    mb_sighting here = mb_sighter_look_at(sighter, baseband, 333.0, &elsewhere);
    assert_true(here.accepted);
    assert_near(here.offset_hz, 333.0, 0.0);
    assert_false(elsewhere.accepted);
    mb_sighter_destroy(sighter);
}

/* Estimates for a white message with noise in the whole baseband: coherence P/(P + N) within the band of the
 * message (SNR there), SNR itself; good to 1 dB over 0.6 s. */
static void coherence_and_snr_are_those_of_the_signal(void **state)
{
    static const double snrs_db[] = {0.0, 10.0, 20.0};
    mb_sighting_settings settings = mb_sighting_settings_default();
    const signal_carrier carrier = {-40.0, 0.0, 0.0};
    mb_sighter *sighter = NULL;

    (void)state;
    settings.length_s = 1.0;
    assert_ok(mb_sighter_create(&settings, &sighter));
    signal_white(message, 16000, 71);
    for (size_t i = 0; i < 3; i++) {
        signal_dsb(message, 16000, &carrier, baseband);
        signal_add_noise(baseband, 16000, 1.0, snrs_db[i], 72);
        mb_sighting seen = mb_sighter_look(sighter, baseband);
        double snr = mb_db_power(snrs_db[i]);
        assert_near(seen.coherence, snr / (1.0 + snr), 0.05);
        assert_near(seen.snr_db, snrs_db[i], 1.0);
    }
    mb_sighter_destroy(sighter);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_carrier_is_found_to_the_accuracy_that_theory_allows),
        cmocka_unit_test(a_voice_is_accepted_wherever_it_lies_in_the_span),
        cmocka_unit_test(noise_is_never_accepted),
        cmocka_unit_test(silence_is_refused),
        cmocka_unit_test(a_plain_carrier_is_refused),
        cmocka_unit_test(a_voice_with_its_full_carrier_is_refused),
        cmocka_unit_test(one_sideband_alone_hardly_ever_passes_a_look),
        cmocka_unit_test(a_look_at_a_wrong_offset_fails_and_names_the_right_one),
        cmocka_unit_test(coherence_and_snr_are_those_of_the_signal),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
