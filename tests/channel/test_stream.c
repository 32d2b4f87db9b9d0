/* What holds for every channel: block cuts, seeds, independent impairments, linearity, reset, bad samples. */
#include "samples.h"

#include "parts.h"

enum { SEED = 9, COUNT = 20000 };

/* Every impairment at once. */
static mb_channel_settings everything(void)
{
    mb_channel_settings settings = mb_channel_settings_default();

    settings.rate_hz = 16e3;
    settings.seed = SEED;
    settings.leak_dbc = -30.0;
    settings.carrier_hz = 250.0;
    settings.paths = 2;
    settings.delay_s = 2e-3;
    settings.doppler_spread_hz = 30.0; /* several nodes within the samples of the test */
    settings.offset_hz = 137.0;
    settings.drift_hz_per_s = 5.0;
    settings.random_phase = true;
    settings.phase_noise_linewidth_hz = 0.3;
    settings.gain_db = -12.0;
    settings.level_step_at_s = 0.3333;
    settings.level_step_db = 6.0;
    settings.gap_at_s = 0.7;
    settings.gap_length_s = 0.1;
    settings.interferer = MB_INTERFERER_TONE;
    settings.interferer_offset_hz = 2000.0;
    settings.interferer_db = -10.0;
    settings.noise_snr_db = 15.0;
    settings.impulse_rate_hz = 50.0;
    settings.impulse_db = 20.0;
    settings.iq_gain_db = 0.2;
    settings.iq_phase_deg = 1.0;
    settings.dc_dbfs = -50.0;
    settings.clip_level = 0.7;
    settings.quantise_bits = 12;
    return settings;
}

static mb_cf32 *output_of(const mb_channel_settings *settings, const mb_cf32 *in, size_t count)
{
    mb_channel *channel = channel_of(settings);
    mb_cf32 *out = samples_of(count);

    mb_channel_process(channel, in, count, out);
    mb_channel_destroy(channel);
    return out;
}

/* Sums what the callback tells, so that runs can be compared. */
typedef struct truth_sum {
    double phase, gain, paths;
    uint64_t count, samples;
} truth_sum;

static void add_truth(void *user, const mb_truth *truth)
{
    truth_sum *sum = user;

    sum->phase += truth->carrier_phase_rad * (double)(1 + sum->count % 7);
    sum->gain += truth->gain_db;
    sum->paths += truth->path_re[0] + 3.0 * truth->path_im[1];
    sum->samples += truth->sample;
    sum->count++;
}

/* Length of the next block: constant, or random with `cut` 0. */
static size_t block_length(size_t cut, mb_random *random, size_t left)
{
    size_t length = cut > 0 ? cut : (size_t)(mb_random_uniform(random) * 700.0);

    return length < left ? length : left;
}

static truth_sum run_in_blocks(mb_channel *channel, const mb_cf32 *in, mb_cf32 *out, size_t cut)
{
    truth_sum sum = {0.0, 0.0, 0.0, 0, 0};
    mb_random random;

    mb_random_seed(&random, SEED, 1);
    mb_channel_reset(channel);
    mb_channel_set_truth_callback(channel, 160, add_truth, &sum);
    for (size_t at = 0; at < COUNT;) {
        size_t length = block_length(cut, &random, COUNT - at);
        mb_channel_process(channel, in + at, length, out + at);
        at += length;
    }
    return sum;
}

static void output_and_truth_do_not_depend_on_block_cuts(void **state)
{
    const size_t cuts[] = {1, 7, 64, 1000, 0};
    mb_channel_settings settings = everything();
    mb_channel *channel = channel_of(&settings);
    mb_cf32 *in = samples_of(COUNT), *whole = samples_of(COUNT), *pieces = samples_of(COUNT);

    (void)state;
    print_message("seed %d\n", SEED);
    fill_random(in, COUNT, SEED);
    truth_sum expected = run_in_blocks(channel, in, whole, COUNT);
    assert_int_equal(expected.count, COUNT / 160);
    for (size_t k = 0; k < sizeof cuts / sizeof cuts[0]; k++) {
        truth_sum sum = run_in_blocks(channel, in, pieces, cuts[k]);
        assert_memory_equal(pieces, whole, COUNT * sizeof *whole);
        assert_memory_equal(&sum, &expected, sizeof sum);
    }
    mb_channel_destroy(channel);
    free(in);
    free(whole);
    free(pieces);
}

static void the_truth_callback_does_not_change_the_output(void **state)
{
    mb_channel_settings settings = everything();
    mb_channel *channel = channel_of(&settings);
    mb_cf32 *in = samples_of(COUNT), *with = samples_of(COUNT);

    (void)state;
    fill_random(in, COUNT, SEED);
    run_in_blocks(channel, in, with, COUNT);
    mb_cf32 *without = output_of(&settings, in, COUNT);
    assert_memory_equal(with, without, COUNT * sizeof *with);
    mb_channel_destroy(channel);
    free(in);
    free(with);
    free(without);
}

static void in_place_equals_out_of_place(void **state)
{
    mb_channel_settings settings = everything();
    mb_cf32 *in = samples_of(COUNT);

    (void)state;
    fill_random(in, COUNT, SEED);
    mb_cf32 *out = output_of(&settings, in, COUNT);
    mb_channel *channel = channel_of(&settings);
    mb_channel_process(channel, in, COUNT, in);
    assert_memory_equal(in, out, COUNT * sizeof *in);
    mb_channel_destroy(channel);
    free(in);
    free(out);
}

static void equal_seeds_repeat_and_others_differ(void **state)
{
    mb_channel_settings settings = everything();
    mb_cf32 *in = samples_of(COUNT);

    (void)state;
    fill_random(in, COUNT, SEED);
    mb_cf32 *first = output_of(&settings, in, COUNT), *again = output_of(&settings, in, COUNT);
    settings.seed++;
    mb_cf32 *other = output_of(&settings, in, COUNT);
    assert_memory_equal(first, again, COUNT * sizeof *first);
    assert_memory_not_equal(first, other, COUNT * sizeof *first);
    free(in);
    free(first);
    free(again);
    free(other);
}

/* What one more impairment changes in the output of `base`: mean power of the difference from the sum of the
 * outputs apart (silence in the second). */
static double excess_of_sum(const mb_channel_settings *both, const mb_channel_settings *first,
                            const mb_channel_settings *second)
{
    mb_cf32 *in = samples_of(COUNT), *silence = samples_of(COUNT);

    fill_random(in, COUNT, SEED);
    mb_cf32 *sum = output_of(both, in, COUNT), *a = output_of(first, in, COUNT);
    mb_cf32 *b = output_of(second, silence, COUNT);
    for (size_t n = 0; n < COUNT; n++) {
        sum[n].re -= a[n].re + b[n].re;
        sum[n].im -= a[n].im + b[n].im;
    }
    double power = power_of(sum, COUNT);
    free(in);
    free(silence);
    free(sum);
    free(a);
    free(b);
    return mb_power_db(power);
}

/* Fading and oscillator are the same with and without noise, interferer and impulses, and the other way
 * round: to float rounding, outputs add. */
static void switching_one_impairment_on_leaves_the_others_as_they_are(void **state)
{
    mb_channel_settings both = everything();

    (void)state;
    both.leak_dbc = both.dc_dbfs = -INFINITY;
    both.clip_level = INFINITY;
    both.quantise_bits = 0;
    mb_channel_settings first = both, second = both;
    first.noise_snr_db = INFINITY;
    first.impulse_rate_hz = 0.0;
    first.interferer = MB_INTERFERER_NONE;
    second.paths = 0;
    second.offset_hz = second.drift_hz_per_s = second.phase_noise_linewidth_hz = 0.0;
    second.random_phase = false;
    assert_at_most(excess_of_sum(&both, &first, &second), -120.0);
}

/* Each random impairment alone keeps its realisation when any other is added. */
static void phase_noise_and_paths_do_not_share_random_numbers(void **state)
{
    mb_channel_settings settings = everything(), alone = everything();
    mb_cf32 *samples = samples_of(COUNT);

    (void)state;
    alone.phase_noise_linewidth_hz = alone.offset_hz = alone.drift_hz_per_s = 0.0;
    alone.random_phase = false;
    alone.noise_snr_db = INFINITY;
    mb_channel *first = channel_of(&settings), *second = channel_of(&alone);
    mb_channel_process(first, samples, COUNT, samples);
    mb_channel_process(second, samples, COUNT, samples);
    mb_truth a = mb_channel_truth(first), b = mb_channel_truth(second);
    for (int k = 0; k < 2; k++) {
        assert_true(a.path_re[k] == b.path_re[k] && a.path_im[k] == b.path_im[k]);
    }
    mb_channel_destroy(first);
    mb_channel_destroy(second);
    free(samples);
}

/* b is reached from a by drawing on. */
static bool follows(mb_random a, const mb_random *b)
{
    for (int i = 0; i < 3000; i++) {
        if (memcmp(a.word, b->word, sizeof a.word) == 0) {
            return true;
        }
        (void)mb_random_bits(&a);
    }
    return false;
}

static void each_impairment_draws_from_its_own_stream(void **state)
{
    mb_channel_settings settings = everything();
    mb_channel *channel = channel_of(&settings);
    const mb_random *streams[] = {&channel->noise.random, &channel->impulses.random,
                                  &channel->oscillator.random, &channel->fading.tap[0].random,
                                  &channel->fading.tap[1].random};
    const size_t count = sizeof streams / sizeof streams[0];

    (void)state;
    for (size_t i = 0; i < count; i++) {
        for (size_t k = 0; k < count; k++) {
            assert_true((i == k) == follows(*streams[i], streams[k]));
        }
    }
    mb_channel_destroy(channel);
}

/* With nothing added and nothing limited a channel is linear over the real numbers. */
static void fading_oscillator_and_rails_are_linear(void **state)
{
    mb_channel_settings settings = everything();
    mb_cf32 *x = samples_of(COUNT), *y = samples_of(COUNT), *mix = samples_of(COUNT);

    (void)state;
    settings.leak_dbc = settings.dc_dbfs = -INFINITY;
    settings.noise_snr_db = settings.clip_level = INFINITY;
    settings.impulse_rate_hz = 0.0;
    settings.interferer = MB_INTERFERER_NONE;
    settings.quantise_bits = 0;
    fill_random(x, COUNT, SEED);
    fill_random(y, COUNT, SEED + 1);
    for (size_t n = 0; n < COUNT; n++) {
        mix[n] = (mb_cf32){0.3f * x[n].re - 1.7f * y[n].re, 0.3f * x[n].im - 1.7f * y[n].im};
    }
    mb_cf32 *of_x = output_of(&settings, x, COUNT), *of_y = output_of(&settings, y, COUNT);
    mb_cf32 *of_mix = output_of(&settings, mix, COUNT);
    for (size_t n = 0; n < COUNT; n++) {
        of_mix[n].re -= 0.3f * of_x[n].re - 1.7f * of_y[n].re;
        of_mix[n].im -= 0.3f * of_x[n].im - 1.7f * of_y[n].im;
    }
    assert_at_most(mb_power_db(power_of(of_mix, COUNT) / power_of(of_x, COUNT)), -125.0); /* float rounding */
    free(x);
    free(y);
    free(mix);
    free(of_x);
    free(of_y);
    free(of_mix);
}

static void the_default_channel_changes_nothing(void **state)
{
    mb_channel_settings settings = mb_channel_settings_default();
    mb_cf32 *in = samples_of(COUNT);

    (void)state;
    fill_random(in, COUNT, SEED);
    mb_cf32 *out = output_of(&settings, in, COUNT);
    assert_memory_equal(in, out, COUNT * sizeof *in);
    mb_channel *channel = channel_of(&settings);
    assert_int_equal(mb_channel_delay_samples(channel), 0);
    mb_truth truth = mb_channel_truth(channel);
    assert_true(truth.path_re[0] == 1.0 && truth.path_re[1] == 0.0 && truth.carrier_phase_rad == 0.0);
    assert_true(truth.gain_db == 0.0 && truth.fading_db == 0.0);
    mb_channel_destroy(channel);
    free(in);
    free(out);
}

static void reset_begins_the_same_realisation_again(void **state)
{
    mb_channel_settings settings = everything();
    mb_channel *channel = channel_of(&settings);
    mb_cf32 *in = samples_of(COUNT), *first = samples_of(COUNT), *again = samples_of(COUNT);

    (void)state;
    fill_random(in, COUNT, SEED);
    mb_channel_process(channel, in, COUNT, first);
    mb_channel_counts before = mb_channel_state(channel);
    mb_channel_reset(channel);
    assert_int_equal(mb_channel_state(channel).samples, 0);
    assert_int_equal(mb_channel_state(channel).impulses, 0);
    mb_channel_process(channel, in, COUNT, again);
    mb_channel_counts after = mb_channel_state(channel);
    assert_memory_equal(first, again, COUNT * sizeof *first);
    assert_memory_equal(&before, &after, sizeof before);
    assert_true(before.clipped > 0 && before.impulses > 0 && before.samples == COUNT);
    mb_channel_destroy(channel);
    free(in);
    free(first);
    free(again);
}

static void bad_samples_count_as_zero_and_do_not_last(void **state)
{
    mb_channel_settings settings = everything();
    mb_cf32 *in = samples_of(COUNT), *clean = samples_of(COUNT);

    (void)state;
    fill_random(clean, COUNT, SEED);
    clean[100] = clean[5000] = (mb_cf32){0.0f, 0.0f};
    memcpy(in, clean, COUNT * sizeof *in);
    in[100] = (mb_cf32){NAN, 1.0f};
    in[5000] = (mb_cf32){0.5f, -INFINITY};
    mb_channel *channel = channel_of(&settings);
    mb_channel_process(channel, in, COUNT, in);
    mb_cf32 *expected = output_of(&settings, clean, COUNT);
    assert_memory_equal(in, expected, COUNT * sizeof *in);
    assert_int_equal(mb_channel_state(channel).non_finite, 2);
    mb_channel_destroy(channel);
    free(in);
    free(clean);
    free(expected);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(output_and_truth_do_not_depend_on_block_cuts),
        cmocka_unit_test(the_truth_callback_does_not_change_the_output),
        cmocka_unit_test(in_place_equals_out_of_place),
        cmocka_unit_test(equal_seeds_repeat_and_others_differ),
        cmocka_unit_test(switching_one_impairment_on_leaves_the_others_as_they_are),
        cmocka_unit_test(phase_noise_and_paths_do_not_share_random_numbers),
        cmocka_unit_test(fading_oscillator_and_rails_are_linear),
        cmocka_unit_test(the_default_channel_changes_nothing),
        cmocka_unit_test(reset_begins_the_same_realisation_again),
        cmocka_unit_test(bad_samples_count_as_zero_and_do_not_last),
        cmocka_unit_test(each_impairment_draws_from_its_own_stream),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
