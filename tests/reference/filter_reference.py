#!/usr/bin/python3
"""Reference values of the filter room from scipy and numpy.

Run:  python3 tests/reference/filter_reference.py > tests/reference/filter_reference.h

Inputs are linear congruential numbers, a sequence that any language makes alike, so that only results are kept.
"""
import numpy as np
import scipy
from scipy import signal

COUNT = 1200


def numbers(count):
    """In [-1, 1), the same as numbers() of tests/filter/signals.h."""
    word, out = 12345, np.empty(count)
    for i in range(count):
        word = (1103515245 * word + 12345) % 2**31
        out[i] = word / 2**30 - 1.0
    return out


def table(name, values):
    print(f"static const double {name}[{len(values)}] = {{")
    for value in values:
        print(f"    {float(value)!r},")
    print("};\n")


def band_limited():
    """The numbers below 0.3 of the rate's half: what both resamplers must pass unchanged."""
    return signal.lfilter(signal.firwin(201, 0.3, window=("kaiser", 12.0)), 1.0, numbers(COUNT))


def resampled(up, down):
    """scipy.signal.resample_poly with a response far longer and steeper than ours."""
    taps = signal.firwin(2 * 100 * max(up, down) + 1, 0.9 / max(up, down), window=("kaiser", 14.0))
    return signal.resample_poly(band_limited(), up, down, window=taps)


print("/* Made by tests/reference/filter_reference.py (its docstring has the command)")
print(f" * with numpy {np.__version__}, scipy {scipy.__version__}. Do not edit. */")
print("/* clang-format off */")
print("#ifndef TESTS_REFERENCE_FILTER_H")
print("#define TESTS_REFERENCE_FILTER_H\n")
print(f"enum {{ REFERENCE_COUNT = {COUNT} }};\n")
table("reference_kaiser_21", signal.windows.kaiser(21, signal.kaiser_beta(80.0)))
table("reference_firwin_41",
      signal.firwin(41, 3000.0, fs=48000.0, window=("kaiser", signal.kaiser_beta(60.0))))
ideal = signal.firwin(61, [300.0, 2700.0], fs=16000.0, window=("kaiser", signal.kaiser_beta(50.0)),
                      pass_zero=False, scale=False)
table("reference_bandpass_61", ideal)
table("reference_filtered", signal.lfilter(signal.firwin(41, 0.25), 1.0, numbers(100)))
table("reference_firwin_quarter_41", signal.firwin(41, 0.25))
spectrum = np.fft.fft(numbers(60) + 1j * numbers(120)[60:])
table("reference_fft_re", spectrum.real)
table("reference_fft_im", spectrum.imag)
table("reference_band_limited", band_limited())
table("reference_up_3", resampled(3, 1)[1500:1700])
table("reference_down_2", resampled(1, 2)[200:400])
table("reference_5_of_4", resampled(5, 4)[600:800])
print("#endif")
