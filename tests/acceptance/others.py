#!/usr/bin/python3
"""What is not suppressed-carrier double sideband must be refused: noise, a plain carrier, full-carrier AM, one sideband.

    /usr/bin/python3 tests/acceptance/others.py --programs build/apps [--trials 20]

Each trial is 15 s at 48 kHz with the voices of reception.py, anywhere within +-1 kHz, 10 to 60 dB over the noise. It counts
the recordings taken for a signal (exit status other than 3) and, live, those that locked for a moment and for how long
their audio was open.
"""
import argparse
import concurrent.futures
import os
import sys
import tempfile

import numpy as np
from scipy import signal
from scipy.io import wavfile

import reception

RATE = 48000
DURATION_S = 15.0


def complex_noise(random, count):
    return (random.standard_normal(count) + 1j * random.standard_normal(count)) / np.sqrt(2.0)


def make(kind, folder, random):
    count = int(DURATION_S * RATE)
    turn = np.exp(2j * np.pi * (random.uniform(-1000.0, 1000.0) * np.arange(count) / RATE + random.uniform()))
    noise = complex_noise(random, count) * 10.0 ** (-random.uniform(10.0, 60.0) / 20.0)
    if kind == "noise":
        return 0.1 * complex_noise(random, count)
    if kind == "carrier":
        return 0.3 * (turn + noise)
    _, message = reception.message_of(folder, random)
    band = signal.butter(6, [300, 2700], "bandpass", fs=reception.RATE, output="sos")
    message = signal.sosfiltfilt(band, message)
    message = signal.resample_poly(message, RATE // reception.RATE, 1)[:count]
    message = message / np.max(np.abs(message))
    if kind == "AM":
        return 0.3 * ((1.0 + 0.9 * message) * turn + noise)
    side = signal.hilbert(message)
    return 0.3 * ((side if random.uniform() < 0.5 else np.conj(side)) * turn + 0.3 * noise)


def trial(arguments):
    programs, kind, seed = arguments
    random = np.random.default_rng([seed, sum(map(ord, kind))])
    with tempfile.TemporaryDirectory() as folder:
        make(kind, folder, random).astype(np.complex64).tofile(folder + "/air.cf32")
        given = ("--quiet", "--from", folder + "/air.cf32", "--rate", str(RATE), "--to", folder + "/heard.wav")
        recording, _ = reception.run(programs + "mb-receive", *given, "--look-ahead", "all")
        live, _ = reception.run(programs + "mb-receive", *given)
        rate, audio = wavfile.read(folder + "/heard.wav")
    return recording != 3, live != 3, np.count_nonzero(audio) / rate


def main():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--programs", default="build/apps", help="folder of the programs")
    parser.add_argument("--trials", type=int, default=20)
    parser.add_argument("--seed", type=int, default=2000)
    parser.add_argument("--jobs", type=int, default=os.cpu_count())
    given = parser.parse_args()
    failed = 0
    print(f"{given.trials} trials of {DURATION_S:g} s a row, seeds from {given.seed}")
    print(f"{'signal':<14}{'recordings taken':>18}{'live: locked':>14}{'open, s in all':>16}")
    with concurrent.futures.ProcessPoolExecutor(given.jobs) as pool:
        for kind in ("noise", "carrier", "AM", "one sideband"):
            work = [(given.programs.rstrip("/") + "/", kind, given.seed + k) for k in range(given.trials)]
            results = list(pool.map(trial, work))
            taken, locked, opened = (sum(r[k] for r in results) for k in range(3))
            failed += taken > 0
            print(f"{kind:<14}{taken:>18}{locked:>14}{opened:>16.1f}", flush=True)
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main())
