#!/usr/bin/python3
"""Reference values of the carrier room: a dense Kalman filter and Rauch-Tung-Striebel smoother.

Run:  python3 tests/reference/carrier_reference.py > tests/reference/carrier_reference.h

Three states (phase, frequency, drift) driven by three white noises. Everything is written with full 3 x 3
matrices, and the noise covariance comes from the matrix exponential (C. F. Van Loan, 1978) instead of closed
forms. Measurements are a true track plus linear congruential numbers; every step with index % 7 in (3, 4) has
no measurement.
"""
import numpy as np
import scipy
from scipy.linalg import expm

STEPS, STEP_S, VARIANCE = 60, 0.01, 0.02
NOISE = np.diag([0.5, 2.0, 30.0])
A = np.array([[0.0, 1.0, 0.0], [0.0, 0.0, 1.0], [0.0, 0.0, 0.0]])
FIRST = np.array([0.3, 12.0, -1.0])
FIRST_P = np.array([[0.5, 0.1, 0.02], [0.1, 9.0, 0.3], [0.02, 0.3, 4.0]])


def numbers(count):
    """In [-1, 1), the same as numbers() of tests/carrier/test_phase_filter.c."""
    word, out = 12345, np.empty(count)
    for i in range(count):
        word = (1103515245 * word + 12345) % 2**31
        out[i] = word / 2**30 - 1.0
    return out


def model(dt):
    """Transition and noise covariance over dt > 0 by Van Loan's block exponential."""
    block = np.zeros((6, 6))
    block[:3, :3], block[:3, 3:], block[3:, 3:] = -A, NOISE, A.T
    big = expm(block * dt)
    transition = big[3:, 3:].T
    return transition, transition @ big[:3, 3:]


def flat(state, covariance):
    return list(state) + [covariance[i, j] for i in range(3) for j in range(i, 3)]


def table(name, values):
    print(f"static const double {name}[{len(values)}] = {{")
    for value in values:
        print(f"    {float(value)!r},")
    print("};\n")


def main():
    transition, driven = model(STEP_S)
    row = np.array([[1.0, 0.0, 0.0]])
    state, covariance = FIRST, FIRST_P
    filtered, predicted = [], []
    for i, number in enumerate(numbers(STEPS)):
        predicted.append((state, covariance))
        if i % 7 not in (3, 4):
            t = i * STEP_S
            innovation = 0.5 + 10.0 * t + 3.0 * t * t + 0.2 * number - state[0]
            gain = covariance @ row.T / (row @ covariance @ row.T + VARIANCE)
            state = state + gain[:, 0] * innovation
            keep = np.eye(3) - gain @ row
            covariance = keep @ covariance @ keep.T + VARIANCE * gain @ gain.T  # Joseph form
        filtered.append((state, covariance))
        state, covariance = transition @ state, transition @ covariance @ transition.T + driven
    smoothed = [None] * STEPS
    smoothed[-1] = filtered[-1]
    for i in range(STEPS - 2, -1, -1):
        x, p = filtered[i]
        ahead_x, ahead_p = predicted[i + 1]
        gain = p @ transition.T @ np.linalg.inv(ahead_p)
        x = x + gain @ (smoothed[i + 1][0] - ahead_x)
        smoothed[i] = (x, p + gain @ (smoothed[i + 1][1] - ahead_p) @ gain.T)
    over, noise = model(0.7)
    back = np.linalg.inv(over)
    print("/* Made by tests/reference/carrier_reference.py (its docstring has the command)")
    print(f" * with numpy {np.__version__}, scipy {scipy.__version__}. Do not edit. */")
    print("/* clang-format off */")
    print("#ifndef TESTS_REFERENCE_CARRIER_H")
    print("#define TESTS_REFERENCE_CARRIER_H\n")
    print("/* phase, frequency, drift, then the covariance pp pf pd ff fd dd */")
    table("reference_forward", flat(over @ FIRST, over @ FIRST_P @ over.T + noise))
    table("reference_backward", flat(back @ FIRST, back @ (FIRST_P + noise) @ back.T))
    table("reference_filtered_20", flat(*filtered[20]))
    table("reference_filtered_59", flat(*filtered[59]))
    table("reference_smoothed_0", flat(*smoothed[0]))
    table("reference_smoothed_31", flat(*smoothed[31]))
    print("#endif")


main()
