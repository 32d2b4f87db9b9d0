/* Hashes and nearest integers are those of python's hashlib and numpy (reference/files_reference.py). */
#include "convert.h"
#include "files_reference.h"
#include "samples.h"
#include "sha512.h"

static void a_hash_is_that_of_another_program(void **state)
{
    unsigned char bytes[1000];
    char text[MB_SHA512_TEXT];

    (void)state;
    for (size_t i = 0; i < sizeof bytes; i++) {
        bytes[i] = (unsigned char)(i * 7 % 251);
    }
    for (size_t i = 0; i < sizeof reference_hashes / sizeof *reference_hashes; i++) {
        size_t length = reference_hashes[i].length;
        mb_sha512 hash;
        mb_sha512_start(&hash);
        mb_sha512_add(&hash, bytes, length / 3); /* in two cuts */
        mb_sha512_add(&hash, bytes + length / 3, length - length / 3);
        mb_sha512_end(&hash, text);
        assert_string_equal(text, reference_hashes[i].text);
    }
}

static void integers_are_the_nearest_ones(void **state)
{
    mb_tally tally = {0};
    int16_t s16 = 0;
    int8_t s8 = 0;
    uint8_t u8 = 0;

    (void)state;
    for (size_t i = 0; i < sizeof reference_integers / sizeof *reference_integers; i++) {
        mb_to_s16(&reference_integers[i].x, 1, 1, &s16, &tally);
        mb_to_s8(&reference_integers[i].x, 1, 1, &s8, &tally);
        mb_to_u8(&reference_integers[i].x, 1, 1, &u8, &tally);
        assert_int_equal(s16, reference_integers[i].ci16);
        assert_int_equal(s8, reference_integers[i].ci8);
        /* x * 128 + 127.5 is rounded once in single precision: a tie may fall to the other side */
        assert_near(u8, reference_integers[i].cu8,
                    fabs(remainder((double)reference_integers[i].x * 128.0, 1.0)) < 1e-5 ? 1.0 : 0.0);
    }
}

static void every_stored_value_survives_the_way_there_and_back(void **state)
{
    mb_tally tally = {0};

    (void)state;
    for (int value = INT16_MIN; value <= INT16_MAX; value++) {
        int16_t stored = (int16_t)value, back = 0;
        float between = 0.0f;
        mb_from_s16(&stored, 1, 1, &between, &tally);
        mb_to_s16(&between, 1, 1, &back, &tally);
        assert_int_equal(back, stored);
    }
    for (int value = 0; value <= UINT8_MAX; value++) {
        uint8_t stored = (uint8_t)value, back = 0;
        int8_t with_sign = (int8_t)(value - 128), sign_back = 0;
        float between = 0.0f;
        mb_from_u8(&stored, 1, 1, &between, &tally);
        mb_to_u8(&between, 1, 1, &back, &tally);
        assert_int_equal(back, stored);
        mb_from_s8(&with_sign, 1, 1, &between, &tally);
        mb_to_s8(&between, 1, 1, &sign_back, &tally);
        assert_int_equal(sign_back, with_sign);
    }
}

static void the_zero_of_unsigned_samples_is_half_way(void **state)
{
    /* FACTS 0: read with a zero of 128 instead, a stream centred at 127.5 has a DC of -48.16 dBFS on each
     * rail */
    const uint8_t pair[2] = {127, 128};
    float out[2];
    mb_tally tally = {0};

    (void)state;
    mb_from_u8(pair, 1, 2, out, &tally);
    assert_near(out[0] + out[1], 0.0, 0.0);
    assert_near(20.0 * log10(128.0 / 128.0 - 127.5 / 128.0), -48.16, 0.01);
    assert_near((double)out[1], 0.5 / 128.0, 0.0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_hash_is_that_of_another_program),
        cmocka_unit_test(integers_are_the_nearest_ones),
        cmocka_unit_test(every_stored_value_survives_the_way_there_and_back),
        cmocka_unit_test(the_zero_of_unsigned_samples_is_half_way),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
