/* The output SNR agrees with least squares over the whole matrix, as scipy computes it, whatever the cuts. */
#define MEASURE_REFERENCE_SCORES
#include "check.h"
#include "measure_reference.h"
#include "failing_memory.h"

#include "mirrorband/measure.h"

enum { RATE = 8000, SECONDS = 9, COUNT = RATE * SECONDS, BAND = 201 };

typedef struct recording {
    float message[COUNT], audio[COUNT];
} recording;

/* The generator of measure_reference.py, through its band filter. */
static double *band_noise(uint64_t seed)
{
    double *white = mb_allocate(COUNT, sizeof *white), *out = mb_allocate(COUNT, sizeof *out);

    if (white == NULL || out == NULL) {
        fail_msg("no memory for the test");
        abort(); /* not reached; said for those who read along */
    }
    for (int i = 0; i < COUNT; i++) {
        seed = seed * 6364136223846793005u + 1442695040888963407u;
        white[i] = (double)(float)((double)(seed >> 32) / 2147483648.0 - 1.0);
        for (int k = 0; k < BAND && k <= i; k++) {
            out[i] += score_band[k] * white[i - k];
        }
    }
    mb_release(white);
    return out;
}

/* As score_material of measure_reference.py: keyed noise; delayed, coloured by 0.7 + 0.3 z^-3, turned over at
 * a time, with noise. */
static recording *material_of(int delay, double flip_at_s, double noise_gain)
{
    double *message = band_noise(1), *noise = band_noise(2);
    recording *out = mb_allocate(1, sizeof *out);

    assert_non_null(out);
    for (int i = 0; i < COUNT; i++) {
        message[i] = i % 16000 >= 12000 ? 0.0 : 0.5 * message[i];
        out->message[i] = (float)message[i];
    }
    for (int i = 0; i < COUNT; i++) {
        int from = i - delay;
        double audio = from >= 0 && from < COUNT ? 0.7 * message[from] : 0.0;
        audio += from >= 3 && from < COUNT ? 0.3 * message[from - 3] : 0.0;
        bool turned = flip_at_s > 0.0 && i >= (int)(flip_at_s * RATE);
        out->audio[i] = (float)((turned ? -audio : audio) + noise_gain * noise[i]);
    }
    mb_release(message);
    mb_release(noise);
    return out;
}

static void pass_over(mb_score *score, const recording *material, size_t block, bool fit)
{
    for (size_t i = 0; i < COUNT; i += block) {
        size_t count = i + block > COUNT ? COUNT - i : block;
        (fit ? mb_score_fit : mb_score_align)(score, material->message + i, material->audio + i, count);
    }
}

static mb_score_result scored(const recording *material, size_t block, double skip_s)
{
    mb_score_settings settings = mb_score_settings_default();
    mb_score *score = NULL;
    mb_score_result result;

    settings.skip_s = skip_s;
    assert_ok(mb_score_create(&settings, &score));
    pass_over(score, material, block, false);
    assert_ok(mb_score_aligned(score));
    pass_over(score, material, block, true);
    assert_ok(mb_score_finish(score, &result));
    mb_score_destroy(score);
    return result;
}

/* Rows of measure_reference.py: noise from 0 to 40 dB, delays of either sign up to 0.9 s, a start left out, a
 * polarity change. 0.05 dB: the agreement that two scorers of one definition must reach; counts and delay
 * exactly. */
static void output_snr_agrees_with_least_squares_of_scipy(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof score_rows / sizeof score_rows[0]; i++) {
        recording *material =
            material_of(score_rows[i].delay, score_rows[i].flip_at_s, score_rows[i].noise_gain);
        mb_score_result result = scored(material, 4000, score_rows[i].skip_s);
        assert_near(result.snr_db, score_rows[i].snr_db, 0.05);
        assert_near(result.delay_s, (double)score_rows[i].lag / RATE, 0.0);
        assert_int_equal(result.polarity_changes, score_rows[i].changes);
        assert_int_equal(result.segments, score_rows[i].segments);
        assert_near(result.segment_median_db, score_rows[i].median_db, 0.05);
        assert_near(result.segment_worst_db, score_rows[i].worst_db, 0.05);
        mb_release(material);
    }
}

/* One gain and one polarity are free: upside down and 60 dB lower is as good. */
static void gain_and_polarity_of_the_whole_are_free(void **state)
{
    recording *material = material_of(37, 0.0, 0.0);

    (void)state;
    double upright_db = scored(material, 1000, 0.0).gain_db;
    for (int i = 0; i < COUNT; i++) {
        material->audio[i] *= -0.001f;
    }
    mb_score_result result = scored(material, 1000, 0.0);
    assert_at_least(result.snr_db, 60.0);
    assert_int_equal(result.polarity_changes, 0);
    assert_near(result.gain_db, upright_db - 60.0, 0.001);
    mb_release(material);
}

/* The audio ends 2 s before the message: what has no partner is not scored, as if the message ended there
 * too. The two differ by what the band filter rings on at the end of the message. */
static void what_has_no_partner_is_not_scored(void **state)
{
    enum { SHORT = COUNT - 2 * RATE };
    recording *material = material_of(431, 0.0, 0.01);
    mb_score_settings settings = mb_score_settings_default();
    mb_score *score = NULL;
    mb_score_result both, one;

    (void)state;
    assert_ok(mb_score_create(&settings, &score));
    mb_score_align(score, material->message, material->audio, SHORT);
    assert_ok(mb_score_aligned(score));
    mb_score_fit(score, material->message, material->audio, SHORT);
    assert_ok(mb_score_finish(score, &both));
    mb_score_reset(score);
    mb_score_align(score, material->message, material->audio, SHORT);
    mb_score_align(score, material->message + SHORT, NULL, COUNT - SHORT);
    assert_ok(mb_score_aligned(score));
    mb_score_fit(score, material->message, material->audio, SHORT);
    mb_score_fit(score, material->message + SHORT, NULL, COUNT - SHORT);
    assert_ok(mb_score_finish(score, &one));
    assert_near(one.scored_s, both.scored_s, 0.0);
    assert_near(one.scored_s, (SHORT - 431.0) / RATE, 1e-9);
    assert_near(one.snr_db, both.snr_db, 0.01);
    assert_int_equal(one.segments, both.segments);
    mb_score_destroy(score);
    mb_release(material);
}

static bool forbid(void *user, size_t bytes)
{
    (void)bytes;
    *(int *)user += 1;
    return true;
}

static void cuts_and_a_reset_change_no_bit_and_streaming_takes_no_memory(void **state)
{
    recording *material = material_of(100, 2.5, 0.01);
    mb_score_settings settings = mb_score_settings_default();
    mb_score *score = NULL;
    mb_score_result whole = scored(material, COUNT, 0.5), cut;
    int asked = 0;

    (void)state;
    settings.skip_s = 0.5;
    assert_ok(mb_score_create(&settings, &score));
    mb_allocation_gate_set(forbid, &asked);
    pass_over(score, material, 999, false);
    mb_score_reset(score);
    pass_over(score, material, 7, false);
    assert_ok(mb_score_aligned(score));
    pass_over(score, material, 64, true);
    assert_ok(mb_score_finish(score, &cut));
    mb_allocation_gate_set(NULL, NULL);
    assert_int_equal(asked, 0);
    assert_memory_equal(&whole, &cut, sizeof whole);
    mb_score_destroy(score);
    mb_release(material);
}

static void wrong_settings_are_named(void **state)
{
    mb_score_settings good = mb_score_settings_default(), bad;
    mb_score *score = NULL;

    (void)state;
    bad = good, bad.rate_hz = 96000.0;
    assert_fault(mb_score_create(&bad, &score), MB_ERROR_ARGUMENT, "rate_hz");
    bad = good, bad.max_delay_s = 0.0;
    assert_fault(mb_score_create(&bad, &score), MB_ERROR_ARGUMENT, "max_delay_s");
    bad = good, bad.fir_span_s = 0.1;
    assert_fault(mb_score_create(&bad, &score), MB_ERROR_ARGUMENT, "fir_span_s");
    bad = good, bad.skip_s = -1.0;
    assert_fault(mb_score_create(&bad, &score), MB_ERROR_ARGUMENT, "skip_s");
    bad = good, bad.segment_s = 0.0;
    assert_fault(mb_score_create(&bad, &score), MB_ERROR_ARGUMENT, "segment_s");
    assert_null(score);
    assert_survives_lack_of_memory(mb_score_create(&good, &score));
    mb_score_destroy(score);
    mb_score_destroy(NULL);
}

static void silence_and_passes_out_of_turn_are_told(void **state)
{
    mb_score_settings settings = mb_score_settings_default();
    mb_score *score = NULL;
    mb_score_result result;
    recording *material = material_of(0, 0.0, 0.0);

    (void)state;
    settings.skip_s = 20.0;
    assert_ok(mb_score_create(&settings, &score));
    assert_int_equal(mb_score_finish(score, &result), MB_ERROR_ARGUMENT);
    mb_score_align(score, material->message, material->audio, 0);
    assert_int_equal(mb_score_aligned(score), MB_ERROR_NO_SIGNAL);
    mb_score_reset(score);
    material->audio[3] = NAN;
    pass_over(score, material, COUNT, false);
    assert_ok(mb_score_aligned(score));
    assert_int_equal(mb_score_aligned(score), MB_ERROR_ARGUMENT);
    pass_over(score, material, COUNT, true);
    assert_int_equal(mb_score_finish(score, &result), MB_ERROR_NO_SIGNAL); /* nothing left after the skip */
    mb_score_destroy(score);
    result = scored(material, COUNT, 0.0);
    assert_int_equal(result.non_finite, 1);
    mb_release(material);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(output_snr_agrees_with_least_squares_of_scipy),
        cmocka_unit_test(gain_and_polarity_of_the_whole_are_free),
        cmocka_unit_test(what_has_no_partner_is_not_scored),
        cmocka_unit_test(cuts_and_a_reset_change_no_bit_and_streaming_takes_no_memory),
        cmocka_unit_test(wrong_settings_are_named),
        cmocka_unit_test(silence_and_passes_out_of_turn_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
