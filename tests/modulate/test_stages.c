/* The contract of a stage, for the product and the equivalent modulator and the models at a carrier. */
#include "check.h"
#include "mirrorband/modulate.h"

enum { COUNT = 3000 };

/* A stage behind one face. `make` starts one with settings that use every part of it. */
typedef struct stage_face {
    mb_status (*make)(void **stage);
    void (*run)(void *stage, size_t from, size_t count);
    void (*reset)(void *stage);
    void (*destroy)(void *stage);
} stage_face;

static float message[COUNT];
static double message_v[COUNT], carrier_v[COUNT];
static double out[2 * COUNT], whole[2 * COUNT]; /* room for either kind of sample */
static mb_cf32 air[COUNT];

static mb_status make_product(void **stage)
{
    mb_product_settings settings = mb_product_settings_default();
    mb_product *product = NULL;

    settings.leak_dbc = -30.0;
    settings.iq_gain_db = 0.3;
    settings.dc_im = 0.01;
    mb_status status = mb_product_create(&settings, &product);
    *stage = product;
    return status;
}

static void run_product(void *stage, size_t from, size_t count)
{
    mb_product_process(stage, message + from, count, air + from);
    memcpy(out, air, sizeof air);
}

static void reset_product(void *stage)
{
    mb_product_reset(stage);
}

static void destroy_product(void *stage)
{
    mb_product_destroy(stage);
}

static mb_status make_equivalent(void **stage)
{
    mb_equivalent_modulator_settings settings = mb_equivalent_modulator_settings_default();
    mb_equivalent_modulator *modulator = NULL;

    settings.equivalent.leak_im = 0.02;
    settings.equivalent.second_order = 0.01;
    settings.equivalent.third_order = -0.03;
    mb_status status = mb_equivalent_modulator_create(&settings, &modulator);
    *stage = modulator;
    return status;
}

static void run_equivalent(void *stage, size_t from, size_t count)
{
    mb_equivalent_modulator_process(stage, message + from, count, air + from);
    memcpy(out, air, sizeof air);
}

static void reset_equivalent(void *stage)
{
    mb_equivalent_modulator_reset(stage);
}

static void destroy_equivalent(void *stage)
{
    mb_equivalent_modulator_destroy(stage);
}

static mb_status make_balanced(void **stage)
{
    const mb_balanced_settings settings = mb_balanced_settings_default();
    mb_balanced *model = NULL;
    mb_status status = mb_balanced_create(&settings, &model);

    *stage = model;
    return status;
}

static void run_balanced(void *stage, size_t from, size_t count)
{
    mb_balanced_process(stage, message_v + from, carrier_v + from, count, out + from);
}

static void destroy_balanced(void *stage)
{
    mb_balanced_destroy(stage);
}

static mb_status make_diodes(void **stage)
{
    const mb_diode_pair_settings settings = mb_diode_pair_settings_default();
    mb_diode_pair *model = NULL;
    mb_status status = mb_diode_pair_create(&settings, &model);

    *stage = model;
    return status;
}

static void run_diodes(void *stage, size_t from, size_t count)
{
    mb_diode_pair_process(stage, message_v + from, carrier_v + from, count, out + from);
}

static void destroy_diodes(void *stage)
{
    mb_diode_pair_destroy(stage);
}

static mb_status make_ring(void **stage)
{
    mb_ring_modulator_settings settings = mb_ring_modulator_settings_default();
    mb_ring_modulator *model = NULL;

    settings.bias_v = 0.1;
    mb_status status = mb_ring_modulator_create(&settings, &model);
    *stage = model;
    return status;
}

static void run_ring(void *stage, size_t from, size_t count)
{
    mb_ring_modulator_process(stage, message_v + from, carrier_v + from, count, out + from);
}

static void reset_ring(void *stage)
{
    mb_ring_modulator_reset(stage);
}

static void destroy_ring(void *stage)
{
    mb_ring_modulator_destroy(stage);
}

static void nothing_to_reset(void *stage)
{
    (void)stage;
}

static const stage_face faces[] = {
    {make_product, run_product, reset_product, destroy_product},
    {make_equivalent, run_equivalent, reset_equivalent, destroy_equivalent},
    {make_balanced, run_balanced, nothing_to_reset, destroy_balanced},
    {make_diodes, run_diodes, nothing_to_reset, destroy_diodes},
    {make_ring, run_ring, reset_ring, destroy_ring},
};
enum { FACES = sizeof faces / sizeof faces[0] };

static void make_input(void)
{
    mb_random random;

    mb_random_seed(&random, 31, 0);
    for (size_t i = 0; i < COUNT; i++) {
        message[i] = (float)(0.3 * mb_random_normal(&random));
        message_v[i] = (double)message[i] * 0.1;
        carrier_v[i] = 0.5 * cos(0.7 * (double)i);
    }
    message[100] = NAN;
    message[200] = -INFINITY;
    message_v[300] = NAN;
    carrier_v[400] = INFINITY;
}

static void run_in_blocks(const stage_face *face, void *stage, size_t block)
{
    mb_random random;

    mb_random_seed(&random, 32, 0);
    for (size_t done = 0; done < COUNT;) {
        size_t now = block > 0 ? block : (size_t)(mb_random_uniform(&random) * 500.0);
        now = now < COUNT - done ? now : COUNT - done;
        face->run(stage, done, now);
        done += now;
    }
}

static void the_output_does_not_depend_on_the_cuts_and_is_finite(void **state)
{
    static const size_t blocks[] = {1, 7, 64, 1000, 0};

    (void)state;
    print_message("seeds 31, 32\n");
    make_input();
    for (size_t f = 0; f < FACES; f++) {
        void *stage = NULL;
        memset(out, 0, sizeof out);
        assert_ok(faces[f].make(&stage));
        faces[f].run(stage, 0, COUNT);
        memcpy(whole, out, sizeof out);
        for (size_t k = 0; k < sizeof blocks / sizeof blocks[0]; k++) {
            faces[f].reset(stage);
            run_in_blocks(&faces[f], stage, blocks[k]);
            assert_memory_equal(out, whole, sizeof out);
        }
        for (size_t i = 0; f >= 2 && i < COUNT; i++) {
            assert_true(isfinite(out[i]));
        }
        faces[f].destroy(stage);
        faces[f].destroy(NULL);
    }
}

static void bad_message_samples_are_counted_and_taken_as_zero(void **state)
{
    void *stage = NULL;

    (void)state;
    make_input();
    assert_ok(make_product(&stage));
    run_product(stage, 0, COUNT);
    assert_int_equal(mb_product_state(stage).non_finite, 2);
    mb_cf32 bad = air[100];
    mb_product_reset(stage);
    assert_int_equal(mb_product_state(stage).non_finite, 0);
    message[100] = 0.0f;
    run_product(stage, 0, COUNT);
    assert_true(air[100].re == bad.re && air[100].im == bad.im);
    mb_product_destroy(stage);
    assert_ok(make_equivalent(&stage));
    run_equivalent(stage, 0, COUNT);
    assert_int_equal(mb_equivalent_modulator_state(stage).non_finite, 1);
    assert_int_equal(mb_equivalent_modulator_delay_samples(stage), 0);
    mb_equivalent_modulator_destroy(stage);
}

static bool refuse(void *user, size_t bytes)
{
    (void)user;
    (void)bytes;
    return false;
}

static void refused_memory_is_a_status(void **state)
{
    (void)state;
    for (size_t f = 0; f < FACES; f++) { /* each makes one allocation */
        void *stage = NULL;
        mb_allocation_gate_set(refuse, NULL);
        mb_status status = faces[f].make(&stage);
        mb_allocation_gate_set(NULL, NULL);
        assert_int_equal(status, MB_ERROR_MEMORY);
        assert_null(stage);
    }
}

static void settings_of_the_product_out_of_range_are_named(void **state)
{
    static const struct {
        size_t offset;
        double value;
        const char *field;
    } rows[] = {
        {offsetof(mb_product_settings, leak_dbc), 41.0, "leak_dbc"},
        {offsetof(mb_product_settings, leak_dbc), INFINITY, "leak_dbc"},
        {offsetof(mb_product_settings, leak_dbc), NAN, "leak_dbc"},
        {offsetof(mb_product_settings, message_power), 0.0, "message_power"},
        {offsetof(mb_product_settings, leak_phase_rad), 7.0, "leak_phase_rad"},
        {offsetof(mb_product_settings, iq_gain_db), -21.0, "iq_gain_db"},
        {offsetof(mb_product_settings, iq_phase_deg), 90.0, "iq_phase_deg"},
        {offsetof(mb_product_settings, dc_re), 1.1, "dc_re"},
        {offsetof(mb_product_settings, dc_im), NAN, "dc_im"},
    };

    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        mb_product_settings settings = mb_product_settings_default();
        mb_product *product = NULL;
        memcpy((char *)&settings + rows[i].offset, &rows[i].value, sizeof rows[i].value);
        assert_fault(mb_product_create(&settings, &product), MB_ERROR_ARGUMENT, rows[i].field);
        assert_null(product);
    }
}

static void settings_of_the_equivalent_out_of_range_are_named(void **state)
{
    mb_equivalent_modulator_settings settings = mb_equivalent_modulator_settings_default();
    mb_equivalent_modulator *modulator = NULL;

    (void)state;
    settings.equivalent.third_order = -11.0;
    assert_fault(mb_equivalent_modulator_create(&settings, &modulator), MB_ERROR_ARGUMENT, "third_order");
    settings = mb_equivalent_modulator_settings_default();
    settings.equivalent.leak_re = NAN;
    assert_fault(mb_equivalent_modulator_create(&settings, &modulator), MB_ERROR_ARGUMENT, "leak_re");
    settings = mb_equivalent_modulator_settings_default();
    settings.gain = 0.0;
    assert_fault(mb_equivalent_modulator_create(&settings, &modulator), MB_ERROR_ARGUMENT, "gain");
    assert_null(modulator);
}

static void settings_of_the_models_out_of_range_are_named(void **state)
{
    mb_balanced_settings pair = mb_balanced_settings_default();
    mb_diode_pair_settings diodes = mb_diode_pair_settings_default();
    mb_ring_modulator_settings ring = mb_ring_modulator_settings_default();
    mb_balanced *balanced = NULL;
    mb_diode_pair *diode_pair = NULL;
    mb_ring_modulator *modulator = NULL;

    (void)state;
    pair.device[1].b = NAN;
    assert_fault(mb_balanced_create(&pair, &balanced), MB_ERROR_ARGUMENT, "device[1].b");
    pair = mb_balanced_settings_default();
    pair.device[0].c = -0.5; /* the two cancel: no product */
    assert_fault(mb_balanced_create(&pair, &balanced), MB_ERROR_ARGUMENT, "c");
    diodes.diode[0].saturation_current_a = 0.0;
    assert_fault(mb_diode_pair_create(&diodes, &diode_pair), MB_ERROR_ARGUMENT,
                 "diode[0].saturation_current_a");
    diodes = mb_diode_pair_settings_default();
    diodes.thermal_voltage_v = 1.0;
    assert_fault(mb_diode_pair_create(&diodes, &diode_pair), MB_ERROR_ARGUMENT, "thermal_voltage_v");
    ring.path_gain[0] = ring.path_gain[1] = 0.0;
    assert_fault(mb_ring_modulator_create(&ring, &modulator), MB_ERROR_ARGUMENT, "path_gain");
    ring = mb_ring_modulator_settings_default();
    ring.path_gain[1] = 1.1;
    assert_fault(mb_ring_modulator_create(&ring, &modulator), MB_ERROR_ARGUMENT, "path_gain[1]");
    assert_true(balanced == NULL && diode_pair == NULL && modulator == NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_output_does_not_depend_on_the_cuts_and_is_finite),
        cmocka_unit_test(bad_message_samples_are_counted_and_taken_as_zero),
        cmocka_unit_test(refused_memory_is_a_status),
        cmocka_unit_test(settings_of_the_product_out_of_range_are_named),
        cmocka_unit_test(settings_of_the_equivalent_out_of_range_are_named),
        cmocka_unit_test(settings_of_the_models_out_of_range_are_named),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
