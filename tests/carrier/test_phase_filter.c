/* The Kalman filter of phase, frequency and drift against dense matrices
 * (tests/reference/carrier_reference.py).
 */
#include "carrier_reference.h"
#include "check.h"
#include "mirrorband/carrier.h"

#define STEP_S   0.01
#define VARIANCE 0.02

enum { STEPS = 60 };

static const mb_phase_noise noise = {0.5, 2.0, 30.0};
static const mb_phase_state first_state = {0.3, 12.0, -1.0, {0.5, 0.1, 0.02, 9.0, 0.3, 4.0}};

/* Both are computed in double; the smoother inverts a matrix whose entries span four decades. */
#define TOLERANCE 1e-9

static void assert_state(const mb_phase_state *state, const double *reference)
{
    assert_near(state->phase_rad, reference[0], TOLERANCE);
    assert_near(state->frequency_rad_s, reference[1], TOLERANCE);
    assert_near(state->drift_rad_s2, reference[2], TOLERANCE);
    for (size_t i = 0; i < 6; i++) {
        assert_near(state->covariance[i], reference[3 + i], TOLERANCE * fmax(1.0, fabs(reference[3 + i])));
    }
}

static void prediction_forward_and_back_is_that_of_dense_matrices(void **state)
{
    mb_phase_state forward = first_state, back = first_state;

    (void)state;
    mb_phase_predict(&forward, &noise, 0.7);
    assert_state(&forward, reference_forward);
    mb_phase_predict(&back, &noise, -0.7);
    assert_state(&back, reference_backward);
}

/* One prediction over a time is two over its parts: the noise is white. */
static void prediction_can_be_cut_in_two(void **state)
{
    mb_phase_state once = first_state, twice = first_state;

    (void)state;
    mb_phase_predict(&once, &noise, 0.7);
    mb_phase_predict(&twice, &noise, 0.3);
    mb_phase_predict(&twice, &noise, 0.4);
    assert_near(twice.phase_rad, once.phase_rad, 1e-12);
    for (size_t i = 0; i < 6; i++) {
        assert_near(twice.covariance[i], once.covariance[i], 1e-11);
    }
}

/* In [-1, 1), the same as numbers() of the reference. */
static double next_number(uint64_t *word)
{
    *word = (1103515245u * *word + 12345u) % (1u << 31);
    return (double)*word / (double)(1u << 30) - 1.0;
}

static void run_filter(mb_phase_state *filtered)
{
    mb_phase_state now = first_state;
    uint64_t word = 12345;

    for (size_t i = 0; i < STEPS; i++) {
        double number = next_number(&word), t = (double)i * STEP_S;
        if (i % 7 != 3 && i % 7 != 4) {
            double measured = 0.5 + 10.0 * t + 3.0 * t * t + 0.2 * number;
            mb_phase_update(&now, measured - now.phase_rad, VARIANCE);
        }
        filtered[i] = now;
        mb_phase_predict(&now, &noise, STEP_S);
    }
}

static void filtered_states_are_those_of_dense_matrices(void **state)
{
    mb_phase_state filtered[STEPS];

    (void)state;
    run_filter(filtered);
    assert_state(&filtered[20], reference_filtered_20);
    assert_state(&filtered[59], reference_filtered_59);
}

static void smoothed_states_are_those_of_dense_matrices(void **state)
{
    mb_phase_state smoothed[STEPS];

    (void)state;
    run_filter(smoothed);
    for (size_t i = STEPS - 1; i > 0; i--) {
        mb_phase_smooth(&smoothed[i - 1], &noise, STEP_S, &smoothed[i]);
    }
    assert_state(&smoothed[0], reference_smoothed_0);
    assert_state(&smoothed[31], reference_smoothed_31);
}

/* What is known later cannot make an estimate worse (Rauch, Tung and Striebel 1965). */
static void smoothing_never_widens_the_phase(void **state)
{
    mb_phase_state filtered[STEPS], smoothed[STEPS];

    (void)state;
    run_filter(filtered);
    memcpy(smoothed, filtered, sizeof smoothed);
    for (size_t i = STEPS - 1; i > 0; i--) {
        mb_phase_smooth(&smoothed[i - 1], &noise, STEP_S, &smoothed[i]);
        assert_true(smoothed[i - 1].covariance[0] <= filtered[i - 1].covariance[0] * (1.0 + 1e-12));
    }
}

/* A measurement that says nothing (variance to infinity) changes nothing; one that is exact is believed. */
static void a_measurement_counts_by_its_variance(void **state)
{
    mb_phase_state vague = first_state, exact = first_state;

    (void)state;
    mb_phase_update(&vague, 1.0, 1e12);
    assert_near(vague.phase_rad, first_state.phase_rad, 1e-11);
    assert_near(vague.covariance[3], first_state.covariance[3], 1e-11);
    mb_phase_update(&exact, 1.0, 0.0);
    assert_near(exact.phase_rad, first_state.phase_rad + 1.0, 1e-12);
    assert_near(exact.covariance[0], 0.0, 1e-15);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(prediction_forward_and_back_is_that_of_dense_matrices),
        cmocka_unit_test(prediction_can_be_cut_in_two),
        cmocka_unit_test(filtered_states_are_those_of_dense_matrices),
        cmocka_unit_test(smoothed_states_are_those_of_dense_matrices),
        cmocka_unit_test(smoothing_never_widens_the_phase),
        cmocka_unit_test(a_measurement_counts_by_its_variance),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
