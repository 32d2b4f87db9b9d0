#!/usr/bin/python3
"""Reference values of the modulate room from numpy and scipy.

Run:  python3 tests/reference/modulate_reference.py > tests/reference/modulate_reference.h

The spectra come from numpy.fft of device currents written out here; nothing of the library is used.
"""
import numpy as np
import scipy
from scipy import special


def lines(current, bins):
    """Amplitudes of the cosines at the given bins; bin 0 is the mean."""
    spectrum = np.abs(np.fft.rfft(current)) / len(current)
    return [(k, spectrum[k] * (1 if k == 0 else 2)) for k in bins]


def balanced():
    """Pair of square-law devices: 960 samples, carrier bin 120, message bin 10."""
    x = 2 * np.pi * np.arange(960) / 960
    vc, vm = 1.2 * np.cos(120 * x), 0.3 * np.cos(10 * x) + 0.004
    v1, v2 = vc + vm, vc - vm
    current = (0.011 + 1.03 * v1 + 0.52 * v1**2) - (0.97 * v2 + 0.47 * v2**2)
    return lines(current, (0, 10, 20, 110, 120, 130, 240))


def diodes():
    """Mismatched exponential pair: 4800 samples, carrier bin 200, message bin 10, Vt 25 mV."""
    x = 2 * np.pi * np.arange(4800) / 4800
    vc, vm = 0.1 * np.cos(200 * x), 0.025 * np.cos(10 * x)
    v1 = 1.01 * vc + 0.98 * vm
    v2 = 0.99 * vc - 1.02 * vm
    current = 1e-6 * (np.exp(v1 / 0.025) - 1) - 1.05e-6 * (np.exp(v2 / (1.01 * 0.025)) - 1)
    return lines(current, (0, 10, 20, 30, 170, 180, 190, 200, 210, 220, 230, 240, 390, 400, 410))


def table(name, width, rows):
    print(f"static const double {name}[][{width}] = {{")
    for row in rows:
        print("    {" + ", ".join(repr(float(value)) for value in row) + "},")
    print("};")


print("/* Made by tests/reference/modulate_reference.py (its docstring has the command)")
print(f" * with numpy {np.__version__}, scipy {scipy.__version__}. Do not edit. */")
print("/* clang-format off */")
print("#ifndef TESTS_REFERENCE_MODULATE_H")
print("#define TESTS_REFERENCE_MODULATE_H\n")
print("/* order, x, scipy.special.iv(order, x) */")
table("reference_bessel", 3,
      [(n, x, special.iv(n, x)) for n in (0, 1, 2, 3, 7) for x in (0.01, 0.5, 1.0, 4.0, 20.0, 40.0, 99.0)])
print("\n/* bin, amplitude */")
table("reference_balanced", 2, balanced())
print("\n/* bin, amplitude */")
table("reference_diodes", 2, diodes())
print("\n#endif")
