#!/usr/bin/python3
"""Reference values of the voice room's look-ahead gain from scipy.

Run:  python3 tests/reference/voice_reference.py > tests/reference/voice_reference.h

The wanted gains are a sequence that any language makes alike; sliding minimum and window are scipy's.
"""
import numpy as np
import scipy
from scipy import ndimage, signal

LENGTH, COUNT = 37, 400


def wanted_gains():
    """Linear congruential numbers, most of them 1, the rest between 0.05 and 1."""
    word, gains = 12345, []
    for _ in range(COUNT):
        word = (1103515245 * word + 12345) % 2**31
        part = word / 2**31
        gains.append(0.05 + 0.95 * part / 0.2 if part < 0.2 else 1.0)
    return np.array(gains)


def look_ahead(gains):
    """Minimum over the last LENGTH gains, then a Kaiser window of the same length and sum 1."""
    before = np.concatenate([np.ones(2 * LENGTH), gains])
    least = ndimage.minimum_filter1d(before, LENGTH, origin=(LENGTH - 1) // 2)
    window = signal.windows.kaiser(LENGTH, signal.kaiser_beta(70.0))
    return np.convolve(least, window / window.sum())[2 * LENGTH:2 * LENGTH + len(gains)]


print("/* Made by tests/reference/voice_reference.py (its docstring has the command)")
print(f" * with numpy {np.__version__}, scipy {scipy.__version__}. Do not edit. */")
print("/* clang-format off */")
print("#ifndef TESTS_REFERENCE_VOICE_H")
print("#define TESTS_REFERENCE_VOICE_H\n")
print(f"enum {{ REFERENCE_LENGTH = {LENGTH}, REFERENCE_COUNT = {COUNT} }};\n")
print("static const double reference_gain[REFERENCE_COUNT] = {")
for value in look_ahead(wanted_gains()):
    print(f"    {value!r},")
print("};\n\n#endif")
