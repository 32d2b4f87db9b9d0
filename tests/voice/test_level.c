/* Level control of the transmit audio stage: voices of any strength, pauses, noise, silence. */
#include "signals.h"

#define RATE ((size_t)48000)

static float samples[10 * RATE];

/* Syllables of a 600 Hz tone, four a second, over noise; then the noise alone. */
static void make_syllables_and_pause(double speech, double noise, size_t speech_count, size_t count)
{
    mb_random random;

    mb_random_seed(&random, 4, 0);
    for (size_t i = 0; i < count; i++) {
        double t = (double)i / RATE, syllable = fmax(0.0, sin(2.0 * MB_PI * 4.0 * t));
        double voice = i < speech_count ? speech * syllable * sin(2.0 * MB_PI * 600.0 * t) : 0.0;
        samples[i] = (float)(voice + noise * mb_random_normal(&random));
    }
}

/* Weak and strong voices (14 dB apart, both within reach of the gain's ceiling) come out alike: mean level
 * within 1 dB after 3 s. */
static void weak_and_strong_voices_come_out_alike(void **state)
{
    const mb_voice_settings settings = mb_voice_settings_default();
    double level_db[2];

    (void)state;
    for (size_t k = 0; k < 2; k++) {
        make_syllables_and_pause(k == 0 ? 0.7 : 0.14, 1e-5, 4 * RATE, 4 * RATE);
        voice_run(&settings, samples, 4 * RATE, samples);
        level_db[k] = mb_power_db(mean_square(samples + 3 * RATE, RATE));
    }
    assert_near(level_db[0], level_db[1], 1.0);
}

/* In a pause of 5 s the background is not brought up: its gain is held, and never above the ceiling. */
static void the_gain_is_held_in_pauses(void **state)
{
    const mb_voice_settings settings = mb_voice_settings_default();
    mb_voice *voice = NULL;

    (void)state;
    print_message("seed 4\n");
    make_syllables_and_pause(0.3, 0.001, 4 * RATE, 10 * RATE);
    assert_ok(mb_voice_create(&settings, &voice));
    mb_voice_process(voice, samples, 5 * RATE, samples);
    double early_db = mb_voice_state(voice).gain_db;
    for (size_t second = 5; second < 10; second++) {
        mb_voice_process(voice, samples + second * RATE, RATE, samples);
        assert_near(mb_voice_state(voice).gain_db, early_db, 0.1);
    }
    assert_at_most(early_db, settings.max_gain_db);
    mb_voice_destroy(voice);
}

/* Noise that was always there, and digital silence, are lifted by the ceiling at most. */
static void silence_and_noise_alone_are_lifted_no_higher_than_the_ceiling(void **state)
{
    const mb_voice_settings settings = mb_voice_settings_default();
    double noise_power = 0.0, lift_db = 0.0;

    (void)state;
    make_syllables_and_pause(0.0, 0.001, 0, 6 * RATE);
    mb_voice_settings plain = settings;
    plain.conditioning = false;
    static float passed[RATE];
    voice_run(&plain, samples, RATE, passed);
    noise_power = mean_square(passed + 2000, RATE - 2000);
    voice_run(&settings, samples, 6 * RATE, samples);
    lift_db = mb_power_db(mean_square(samples + 3 * RATE, 3 * RATE) / noise_power);
    assert_at_most(lift_db, settings.max_gain_db + 0.5); /* spread of the noise power over 1 s: 0.1 dB */
    memset(samples, 0, RATE * sizeof *samples);
    voice_run(&settings, samples, RATE, samples);
    assert_true(greatest(samples, RATE) == 0.0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(weak_and_strong_voices_come_out_alike),
        cmocka_unit_test(the_gain_is_held_in_pauses),
        cmocka_unit_test(silence_and_noise_alone_are_lifted_no_higher_than_the_ceiling),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
