/* Settings out of their range are refused by name; those at its ends work; memory refused is a status. */
#include "samples.h"

#include <stddef.h>

typedef mb_channel_settings settings_type;

/* A double field, values that must be refused and values that must not (NAN: no more of them). */
static const struct field_case {
    const char *name;
    size_t offset;
    double refused[3];
    double accepted[3];
} cases[] = {
#define FIELD(name) #name, offsetof(settings_type, name)
    {FIELD(rate_hz), {7999.0, 20000001.0, -48e3}, {8000.0, 20e6, 44100.0}},
    {FIELD(signal_power), {0.0, -1.0, 1001.0}, {1e-12, 1e3, 0.5}},
    {FIELD(audio_bandwidth_hz), {99.0, 24001.0, INFINITY}, {400.0, 24e3, 3e3}},
    {FIELD(message_low_hz), {-1.0, 2701.0, INFINITY}, {0.0, 2700.0, 50.0}},
    {FIELD(carrier_hz), {-24001.0, 24001.0, INFINITY}, {-24e3, 24e3, 5.0}},
    {FIELD(leak_dbc), {-201.0, 41.0, INFINITY}, {-200.0, 40.0, -INFINITY}},
    {FIELD(leak_phase_rad), {-7.0, 7.0, INFINITY}, {-6.28, 6.28, 0.0}},
    {FIELD(delay_s), {-1e-9, 0.11, INFINITY}, {0.0, 0.1, 1e-6}},
    {FIELD(doppler_spread_hz), {-1.0, 1e-5, 101.0}, {0.0, 1e-4, 100.0}},
    {FIELD(second_path_db), {-101.0, 101.0, -INFINITY}, {-100.0, 100.0, 3.0}},
    {FIELD(offset_hz), {-24001.0, 24001.0, INFINITY}, {-24e3, 24e3, 137.0}},
    {FIELD(drift_hz_per_s), {-10001.0, 10001.0, -INFINITY}, {-1e4, 1e4, 0.2}},
    {FIELD(phase_rad), {-1001.0, 1001.0, INFINITY}, {-1e3, 1e3, 1.0}},
    {FIELD(phase_noise_linewidth_hz), {-1.0, 481.0, INFINITY}, {0.0, 480.0, 1e-9}},
    {FIELD(gain_db), {-201.0, 201.0, -INFINITY}, {-200.0, 100.0, 3.0}},
    {FIELD(level_step_at_s), {-1.0, 1.1e9, INFINITY}, {0.0, 1e9, 1.0}},
    {FIELD(level_step_db), {-201.0, 201.0, INFINITY}, {-200.0, 100.0, 3.0}},
    {FIELD(gap_at_s), {-1.0, 1.1e9, INFINITY}, {0.0, 1e9, 1.0}},
    {FIELD(gap_length_s), {-1.0, 1.1e9, INFINITY}, {0.0, 1e9, 1.0}},
    {FIELD(interferer_offset_hz), {-24001.0, 24001.0, INFINITY}, {-24e3, 24e3, 1.0}},
    {FIELD(interferer_db), {-201.0, 201.0, -INFINITY}, {-200.0, 100.0, 3.0}},
    {FIELD(noise_snr_db), {-101.0, 201.0, -INFINITY}, {-100.0, 200.0, INFINITY}},
    {FIELD(impulse_rate_hz), {-1.0, 4801.0, INFINITY}, {0.0, 4800.0, 1e-6}},
    {FIELD(impulse_db), {-201.0, 201.0, INFINITY}, {-200.0, 100.0, 3.0}},
    {FIELD(iq_gain_db), {-21.0, 21.0, INFINITY}, {-20.0, 20.0, 0.1}},
    {FIELD(iq_phase_deg), {-81.0, 81.0, INFINITY}, {-80.0, 80.0, 0.1}},
    {FIELD(dc_dbfs), {-201.0, 21.0, INFINITY}, {-200.0, 20.0, -INFINITY}},
    {FIELD(dc_phase_rad), {-7.0, 7.0, INFINITY}, {-6.28, 6.28, 0.0}},
    {FIELD(clip_level), {0.0, -1.0, -INFINITY}, {1e-6, 1e6, INFINITY}},
#undef FIELD
};
enum { CASE_COUNT = sizeof cases / sizeof cases[0] };

/* Everything on, so that each setting matters. */
static mb_channel_settings busy(void)
{
    mb_channel_settings settings = mb_channel_settings_default();

    settings.paths = 2;
    settings.delay_s = 1e-3;
    settings.doppler_spread_hz = 1.0;
    settings.interferer = MB_INTERFERER_TONE;
    settings.noise_snr_db = 20.0;
    settings.impulse_rate_hz = 10.0;
    settings.leak_dbc = -40.0;
    settings.phase_noise_linewidth_hz = 1.0;
    return settings;
}

static void set_field(mb_channel_settings *settings, size_t offset, double value)
{
    memcpy((unsigned char *)settings + offset, &value, sizeof value);
}

static void each_field_out_of_range_is_named(void **state)
{
    (void)state;
    for (size_t k = 0; k < CASE_COUNT; k++) {
        for (int i = 0; i < 4; i++) {
            mb_channel_settings settings = busy();
            mb_channel *channel = (mb_channel *)&settings;
            set_field(&settings, cases[k].offset, i < 3 ? cases[k].refused[i] : (double)NAN);
            assert_fault(mb_channel_create(&settings, &channel), MB_ERROR_ARGUMENT, cases[k].name);
            assert_null(channel);
        }
    }
}

static void choices_out_of_range_are_named(void **state)
{
    mb_channel *channel = NULL;

    (void)state;
    for (unsigned bits = 1; bits <= 25; bits += 24) {
        mb_channel_settings settings = busy();
        settings.quantise_bits = bits;
        assert_fault(mb_channel_create(&settings, &channel), MB_ERROR_ARGUMENT, "quantise_bits");
    }
    mb_channel_settings settings = busy();
    settings.paths = 3;
    assert_fault(mb_channel_create(&settings, &channel), MB_ERROR_ARGUMENT, "paths");
    settings = busy();
    settings.interferer = (mb_interferer)2;
    assert_fault(mb_channel_create(&settings, &channel), MB_ERROR_ARGUMENT, "interferer");
}

/* Runs a little and looks at output and truth. */
static void run_finite(const mb_channel_settings *settings)
{
    enum { COUNT = 300 };
    static mb_cf32 samples[COUNT];
    mb_channel *channel = channel_of(settings);

    fill_random(samples, COUNT, 1);
    mb_channel_process(channel, samples, COUNT, samples);
    mb_truth truth = mb_channel_truth(channel);
    for (size_t n = 0; n < COUNT; n++) {
        assert_true(isfinite(samples[n].re) && isfinite(samples[n].im));
    }
    assert_true(isfinite(truth.carrier_phase_rad) && isfinite(truth.fading_db) && isfinite(truth.gain_db));
    mb_channel_destroy(channel);
}

static void the_ends_of_each_range_work(void **state)
{
    (void)state;
    for (size_t k = 0; k < CASE_COUNT; k++) {
        for (int i = 0; i < 3; i++) {
            mb_channel_settings settings = busy();
            if (cases[k].offset == offsetof(settings_type, rate_hz)) {
                settings.phase_noise_linewidth_hz = 0.1;
            }
            set_field(&settings, cases[k].offset, cases[k].accepted[i]);
            run_finite(&settings);
        }
    }
}

/* Combinations that are odd but allowed. */
static void odd_combinations_work(void **state)
{
    mb_channel_settings settings = busy();

    (void)state;
    settings.rate_hz = 8000.0; /* a node every sample */
    settings.doppler_spread_hz = 100.0;
    run_finite(&settings);
    settings.delay_s = 0.0; /* both paths at once */
    run_finite(&settings);
    settings.paths = 1; /* delay without a second path */
    settings.delay_s = 0.1;
    run_finite(&settings);
    settings.first_path_steady = true; /* nothing moves, though there is a spread */
    run_finite(&settings);
    settings.rate_hz = 44100.5; /* rates need not be whole */
    settings.audio_bandwidth_hz = settings.rate_hz / 2.0;
    run_finite(&settings);
    settings.gap_length_s = 1e9; /* silence for ever */
    settings.level_step_at_s = 1e-3;
    settings.level_step_db = -6.0;
    run_finite(&settings);
    settings.quantise_bits = 24;
    settings.clip_level = 0.5;
    settings.seed = UINT64_MAX;
    run_finite(&settings);
}

static void destroy_accepts_null(void **state)
{
    (void)state;
    mb_channel_destroy(NULL);
}

static bool fail_at(void *user, size_t bytes)
{
    (void)bytes;
    return (*(int *)user)-- != 0;
}

/* Five blocks: the channel, delay line, filter and two noise rings. */
static void each_refused_allocation_is_a_status_and_leaks_nothing(void **state)
{
    mb_channel_settings settings = busy();
    int failures = 0;

    (void)state;
    for (int k = 0;; k++) {
        mb_channel *channel = (mb_channel *)&settings;
        int countdown = k;
        mb_allocation_gate_set(fail_at, &countdown);
        mb_status status = mb_channel_create(&settings, &channel);
        mb_allocation_gate_set(NULL, NULL);
        if (status == MB_OK) {
            mb_channel_destroy(channel);
            break;
        }
        assert_int_equal(status, MB_ERROR_MEMORY);
        assert_null(channel);
        failures++;
    }
    assert_int_equal(failures, 5);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(each_field_out_of_range_is_named),
        cmocka_unit_test(choices_out_of_range_are_named),
        cmocka_unit_test(the_ends_of_each_range_work),
        cmocka_unit_test(odd_combinations_work),
        cmocka_unit_test(destroy_accepts_null),
        cmocka_unit_test(each_refused_allocation_is_a_status_and_leaks_nothing),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
