#!/usr/bin/python3
"""Writes measure_reference.h: what the measure room is held against, computed with numpy and scipy.

Run: /usr/bin/python3 tests/reference/measure_reference.py > tests/reference/measure_reference.h

Contains a second implementation of the P.56 active level (sample by sample, threshold by threshold, as the
recommendation is written) and of the output SNR (least squares on the whole matrix, full-length correlation), which
share nothing with the C code. Random material comes from the little generator below, which the tests repeat in C.
"""
import sys

import numpy as np
import scipy
from scipy import signal, special
from scipy.io import wavfile

SCORE_RATE = 8000


def uniform_noise(count, seed):
    """Linear congruential numbers (Knuth's MMIX multiplier), upper 32 bits to [-1, 1); exact on every machine."""
    state, out = seed, np.empty(count)
    for i in range(count):
        state = (state * 6364136223846793005 + 1442695040888963407) & 0xFFFFFFFFFFFFFFFF
        out[i] = (state >> 32) / 2147483648.0 - 1.0
    return out.astype(np.float32).astype(float)


def active_level(x, rate):
    """P.56 method B: a counter and a hangover for each of 15 thresholds."""
    g, hang = np.exp(-1.0 / (rate * 0.03)), int(np.ceil(rate * 0.2))
    smooth = signal.lfilter([1 - g], [1, -g], signal.lfilter([1 - g], [1, -g], np.abs(x)))
    power, levels = np.sum(x * x), []
    for exponent in range(-15, 0):
        active, idle = 0, hang  # a signal that has not yet reached the threshold is not active
        for above in smooth >= 2.0 ** exponent:
            if above:
                active, idle = active + 1, 0
            elif idle < hang:
                active, idle = active + 1, idle + 1
        if active:
            levels.append((10 * np.log10(power / active), 20 * exponent * np.log10(2.0)))
    delta = [a - c for a, c in levels]
    for j in range(len(levels) - 1):
        if delta[j] >= 15.9 > delta[j + 1]:
            share = (delta[j] - 15.9) / (delta[j] - delta[j + 1])
            level = levels[j][0] + share * (levels[j + 1][0] - levels[j][0])
            break
    rms = 10 * np.log10(power / len(x))
    return level, 10 ** ((rms - level) / 10), rms, np.max(np.abs(x))


def band_limited(x, rate):
    taps = signal.firwin(int(rate / 60) | 1, [250, 2800], pass_zero=False, fs=rate, window=("kaiser", 8.0))
    return signal.fftconvolve(x, taps, mode="same")


def least_squares_snr(ref, out, taps):
    half = taps // 2
    columns = np.stack([np.roll(ref, k) for k in range(-half, half + 1)], axis=1)[half:-half]
    target = out[half:-half]
    weights = np.linalg.lstsq(columns, target, rcond=None)[0]
    fit = columns @ weights
    return 10 * np.log10(np.sum(fit ** 2) / np.sum((target - fit) ** 2))


def output_snr(message, audio, rate, skip_s):
    """snr, delay, polarity changes, median and worst of the active seconds."""
    m, a = band_limited(message, rate), band_limited(audio, rate)
    c = signal.correlate(a, m, mode="full", method="fft")
    lags = np.arange(-len(m) + 1, len(a))
    near = np.abs(lags) <= rate
    lag = int(lags[near][np.argmax(np.abs(c[near]))])
    m, a = (m, a[lag:]) if lag > 0 else (m[-lag:], a)
    skip, n = int(skip_s * rate), min(len(m), len(a))
    m, a = m[skip:n], a[skip:n]
    frames = np.mean(m[: len(m) // 160 * 160].reshape(-1, 160) ** 2, axis=1)
    limit = 0.1 * np.mean(frames[frames > frames.max() * 1e-3])
    values, signs = [], []
    for i in range(0, len(m) - rate + 1, rate):
        ms, as_ = m[i:i + rate], a[i:i + rate]
        if np.mean(ms * ms) >= limit:
            values.append(least_squares_snr(ms, as_, 17))
            signs.append(np.dot(ms, as_) > 0)
    changes = sum(p != q for p, q in zip(signs, signs[1:]))
    return least_squares_snr(m, a, 49), lag, changes, np.median(values), np.min(values), len(values)


def score_material(noise_db, delay, flip_at, skip_s, seconds=9):
    """Message: uniform noise of 300-2700 Hz, keyed on 1.5 s of every 2 s. Audio: delayed, coloured, noisy."""
    n = seconds * SCORE_RATE
    band = signal.firwin(201, [300, 2700], pass_zero=False, fs=SCORE_RATE)
    message = signal.lfilter(band, [1.0], uniform_noise(n, 1)) * 0.5
    message[(np.arange(n) % 16000) >= 12000] = 0.0
    audio = 0.7 * message + 0.3 * np.concatenate([[0.0, 0.0, 0.0], message[:-3]])
    late, early = np.zeros(max(delay, 0)), np.zeros(max(-delay, 0))
    audio = np.concatenate([late, audio, early])[len(early):][:n]
    if flip_at:
        audio[int(flip_at * SCORE_RATE):] *= -1.0
    noise = signal.lfilter(band, [1.0], uniform_noise(n, 2))
    gain = np.sqrt(np.mean(audio ** 2) / np.mean(noise ** 2)) * 10 ** (-noise_db / 20)
    audio = audio + gain * noise
    return message.astype(np.float32).astype(float), audio.astype(np.float32).astype(float), gain, band


def print_rows(name, fields, rows):
    print("static const struct {\n    %s;\n} %s[] = {" % (fields, name))
    for row in rows:
        print("    {%s}," % ", ".join(str(v) if isinstance(v, (str, int, np.integer)) else "%.17g" % v for v in row))
    print("};\n")


def level_rows():
    rows = []
    for name in ("Front_Center", "Rear_Left"):
        rate, samples = wavfile.read("/usr/share/sounds/alsa/%s.wav" % name)
        rows.append(('"%s.wav"' % name, float(rate), len(samples)) + active_level(samples / 32768.0, rate))
    t = np.arange(160000)
    sine = 0.5 * np.sin(2 * np.pi * 1000.0 / 8000.0 * t)
    keyed = sine * ((t // 8000) % 2 == 0)
    rare = sine * ((t // 8000) % 4 == 0)
    for name, x in (("sine", sine), ("sine 1 s on 1 s off", keyed), ("sine 1 s on 3 s off", rare)):
        rows.append(('"%s"' % name, 8000.0, len(x)) + active_level(x, 8000))
    return rows


def score_rows():
    rows = []
    for noise_db, delay, flip_at, skip_s in ((0, 100, 0, 0), (10, 0, 0, 0), (20, -431, 0, 0), (30, 7321, 0, 1.5),
                                             (40, 37, 0, 0), (20, 37, 4.25, 0)):
        message, audio, gain, _ = score_material(noise_db, delay, flip_at, skip_s)
        snr, lag, changes, median, worst, segments = output_snr(message, audio, SCORE_RATE, skip_s)
        rows.append((delay, lag, changes, segments, float(flip_at), float(skip_s), gain, snr, median, worst))
    return rows


def main():
    print("/* Made by: /usr/bin/python3 tests/reference/measure_reference.py > tests/reference/measure_reference.h")
    print(" * with python %s, numpy %s, scipy %s. Not edited by hand. */" % (
        sys.version.split()[0], np.__version__, scipy.__version__))
    print("#ifndef TESTS_MEASURE_REFERENCE_H\n#define TESTS_MEASURE_REFERENCE_H\n")
    print("/* clang-format off */\n")
    print("/* scipy.special.ive(0, x) */")
    arguments = (0.0, 0.1, 1.0, 5.0, 15.1, 19.99, 20.01, 50.0, 700.0)
    print_rows("bessel_rows", "double x, value", [(x, special.ive(0, x)) for x in arguments])
    print("#ifdef MEASURE_REFERENCE_LEVELS")
    print("/* second implementation of P.56: level dB, activity, rms dB, peak */")
    fields = "const char *name; double rate_hz; int count; double level_db, activity, rms_db, peak"
    print_rows("level_rows", fields, level_rows())
    print("#endif\n")
    print("#ifdef MEASURE_REFERENCE_SCORES")
    print("/* message filter of the score material: firwin(201, [300, 2700], pass_zero=False, fs=8000) */")
    band = score_material(0, 0, 0, 0, 1)[3]
    print("static const double score_band[201] = {%s};\n" % ", ".join("%.17g" % v for v in band))
    print("/* delay, lag: samples; SNRs by least squares over the whole matrix of 49 taps, of segments 17 */")
    fields = ("int delay, lag, changes, segments; "
              "double flip_at_s, skip_s, noise_gain, snr_db, median_db, worst_db")
    print_rows("score_rows", fields, score_rows())
    print("#endif\n")
    print("#endif")


if __name__ == "__main__":
    main()
