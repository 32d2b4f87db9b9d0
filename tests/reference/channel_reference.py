"""Reference values for the tests of the channel room, computed by other means than the library's.

Run: /usr/bin/python3 tests/reference/channel_reference.py > tests/reference/channel_reference.h
"""
import platform
from fractions import Fraction
from math import pi

import numpy as np
import scipy
from scipy import integrate, optimize, signal, special, stats


def table(comment, name, fields, rows):
    """Prints one C table of doubles."""
    print(f"/* {comment} */")
    print(f"static const struct {{\n    double {fields};\n}} {name}[] = {{")
    for row in rows:
        print("    {" + ", ".join(f"{value:.17g}" for value in row) + "},")
    print("};\n")


def tap_autocorrelation(lags):
    """Transform of a Gaussian Doppler spectrum of unit power, sigma = spread/2, by quadrature; spread 1."""
    rows = []
    for lag in lags:
        value, _ = integrate.quad(
            lambda f, t=lag: stats.norm.pdf(f, scale=0.5) * np.cos(2 * pi * f * t), -6, 6, epsabs=1e-13, limit=400)
        rows.append((lag, value))
    return rows


def rayleigh(levels_db):
    """Share of time below a level, and level crossings per second at spread 1 (Rice: the envelope's slope is
    Gaussian with the second moment of the Doppler spectrum, found here by quadrature)."""
    second, _ = integrate.quad(lambda f: (2 * pi * f) ** 2 * stats.norm.pdf(f, scale=0.5), -6, 6)
    rows = []
    for level_db in levels_db:
        ratio = 10 ** (level_db / 20)
        share = stats.rayleigh.cdf(ratio, scale=np.sqrt(0.5))
        density = stats.rayleigh.pdf(ratio, scale=np.sqrt(0.5))
        slope = np.sqrt(second / 2 / (2 * pi))  # mean of the positive part of the slope
        rows.append((level_db, share, density * slope))
    return rows


def best_phases():
    """Angle that maximises the in-phase power of a flat message over two paths: brute force, then refined."""
    generator = np.random.default_rng(1487)
    rows = []
    for delay in (0.0, 0.0005, 0.001, 0.002, 0.007):
        for _ in range(4):
            a, b = generator.normal(size=4).view(complex)
            f = np.linspace(300, 2700, 24001)

            def power(angle, a=a, b=b, f=f, delay=delay):
                turned_a, turned_b = (a * np.exp(-1j * angle)).real, (b * np.exp(-1j * angle)).real
                return -np.trapz(np.abs(turned_a + turned_b * np.exp(-2j * pi * f * delay)) ** 2, f) / 2400

            grid = np.linspace(-pi / 2, pi / 2, 181)
            start = grid[np.argmin([power(angle) for angle in grid])]
            angle = optimize.minimize_scalar(power, (start - 0.02, start, start + 0.02), tol=1e-12).x
            if ((a + b) * np.exp(-1j * angle)).real < 0:
                angle += pi
            angle = np.angle(np.exp(1j * angle))
            rows.append((delay, a.real, a.imag, b.real, b.imag, angle))
    return rows


def oscillator_phases():
    """Phase modulo one turn by exact fractions."""
    rows = []
    for rate, offset, drift, sample in (
            (8000, 137.25, 0.2, 8000 * 36000), (8000, -999.125, -0.2, 8000 * 3600 + 13),
            (240000, 137.0, 0.2, 240000 * 7200 + 1), (48000, 1000.5, 0.0, 48000 * 86400 * 3 + 63),
            (20000000, -1234567.0, 0.0, 20000000 * 86400 + 77), (2400000, 250000.0, 10.0, 2400000 * 3600 + 5)):
        n = Fraction(sample)
        turns = n * Fraction(offset) / rate + n * n * Fraction(drift) / 2 / rate / rate
        rows.append((rate, offset, drift, sample, float(turns - round(turns))))
    return rows


def image_rejections():
    """A complex tone through unequal rails, by FFT: power at +f over power at -f."""
    n = np.arange(4096)
    tone = np.exp(2j * pi * 300 * n / 4096)
    rows = []
    for gain_db, phase in ((0, 0.1), (0, 1), (0, 2), (0, 5), (0.01, 0), (0.1, 0), (0.1, 1), (0.25, 1), (0.5, 0),
                           (0.5, 3), (0.5, 5), (1, 0), (1, 5), (1, 10), (-1, -5)):
        angle = np.deg2rad(phase)
        quadrature = 10 ** (gain_db / 20) * np.sin(2 * pi * 300 * n / 4096 + angle)
        lines = np.abs(scipy.fft.fft(tone.real + 1j * quadrature)) ** 2
        rows.append((gain_db, phase, 10 * np.log10(lines[300] / lines[-300])))
    return rows


def normal_bins():
    """Probability of each of 40 bins of width 0.25 from -5 to 5."""
    edges = np.arange(-5, 5.01, 0.25)
    return [(low, special.ndtr(high) - special.ndtr(low)) for low, high in zip(edges[:-1], edges[1:])]


def notches():
    """Frequency response of two equal paths 2 ms apart at 48 kHz, normalised to an average power of 1."""
    taps = np.zeros(97)
    taps[[0, 96]] = np.sqrt(0.5)
    frequencies = [0, 100, 200, 249, 375, 500, 1000, 1251, 1600, 2600]
    _, response = signal.freqz(taps, worN=frequencies, fs=48000)
    return [(f, 20 * np.log10(abs(h))) for f, h in zip(frequencies, response)]


def main():
    print("/* Made by: /usr/bin/python3 tests/reference/channel_reference.py > tests/reference/channel_reference.h")
    print(f" * with python {platform.python_version()}, numpy {np.__version__}, scipy {scipy.__version__}. "
          "Not edited by hand. */")
    print("#ifndef TESTS_CHANNEL_REFERENCE_H\n#define TESTS_CHANNEL_REFERENCE_H\n\n/* clang-format off */\n")
    table("scipy.integrate.quad: autocorrelation of a tap of spread 1 Hz", "tap_autocorrelation", "lag_s, value",
          tap_autocorrelation((0.125, 0.25, 0.374781, 0.45015816, 0.625, 1.0)))
    table("scipy.stats.rayleigh, Rice's formula: spread 1 Hz, level over the mean power", "rayleigh_levels",
          "level_db, share, crossings_per_s", rayleigh((-3, -10, -20, -30)))
    table("scipy.optimize: best single phase of two paths, message flat from 300 to 2700 Hz", "best_phases",
          "delay_s, a_re, a_im, b_re, b_im, phase_rad", best_phases())
    table("fractions: phase in turns modulo 1 after many samples", "oscillator_phases",
          "rate_hz, offset_hz, drift_hz_per_s, sample, turns", oscillator_phases())
    table("scipy.fft: image rejection of unequal rails", "image_rejections", "gain_db, phase_deg, rejection_db",
          image_rejections())
    table("scipy.special.ndtr: probability of the bin of width 0.25 that begins at low", "normal_bins",
          "low, probability", normal_bins())
    table("scipy.signal.freqz: two equal paths 2 ms apart", "notch_response", "frequency_hz, gain_db", notches())
    print("/* scipy.stats.chi2.ppf(0.9999, 39), the bound of a chi-square over these bins */")
    print(f"static const double normal_chi_square_bound = {stats.chi2.ppf(0.9999, 39):.17g};\n")
    print("/* clang-format on */\n\n#endif")


if __name__ == "__main__":
    main()
