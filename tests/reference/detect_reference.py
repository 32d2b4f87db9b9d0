#!/usr/bin/python3
"""Reference values of the detect room from scipy: the band-pass of the detector by the window method.

Run:  python3 tests/reference/detect_reference.py > tests/reference/detect_reference.h

16 kHz, 60 dB Kaiser design, transitions of 120 Hz centred 60 Hz outside 250 and 2750 Hz, as long as the
detector's own delay says (the length is printed and checked by the test).
"""
import numpy as np
import scipy
from scipy import signal

LENGTH = signal.kaiserord(60.0, 120.0 / 8000.0)[0] | 1
FREQUENCIES = [100, 150, 190, 220, 250, 300, 1000, 2000, 2700, 2750, 2780, 2810, 2850, 2900]


def main():
    taps = signal.firwin(LENGTH, [190.0, 2810.0], fs=16000.0, pass_zero=False, scale=False,
                         window=("kaiser", signal.kaiser_beta(60.0)))
    _, response = signal.freqz(taps, worN=FREQUENCIES, fs=16000.0)
    print("/* Made by tests/reference/detect_reference.py (its docstring has the command)")
    print(f" * with numpy {np.__version__}, scipy {scipy.__version__}. Do not edit. */")
    print("/* clang-format off */")
    print("#ifndef TESTS_REFERENCE_DETECT_H")
    print("#define TESTS_REFERENCE_DETECT_H\n")
    print(f"enum {{ REFERENCE_BANDPASS_LENGTH = {LENGTH} }};\n")
    print("/* frequency in Hz, magnitude of the response */")
    print(f"static const double reference_bandpass[{len(FREQUENCIES)}][2] = {{")
    for frequency, value in zip(FREQUENCIES, np.abs(response)):
        print(f"    {{{float(frequency)!r}, {float(value)!r}}},")
    print("};\n")
    print("#endif")


main()
