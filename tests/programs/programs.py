"""What the tests of the programs share: running them, voices and other inputs, readers of what they wrote."""

import json
import os
import subprocess
import sys
import tempfile
import unittest
import warnings
import wave

import numpy
import scipy.io.wavfile

ROOT = os.path.dirname(os.path.dirname(os.path.dirname(os.path.abspath(__file__))))
VOICES = "/usr/share/asterisk/sounds/en_US_f_Allison/"
FOLDER = os.path.abspath(sys.argv[1]) if len(sys.argv) > 1 else ""


class Done:
    """How a program ended: status, and what it wrote as text."""

    def __init__(self, finished):
        self.status = finished.returncode
        self.out = finished.stdout.decode("utf-8", "replace")
        self.errors = finished.stderr.decode("utf-8", "replace")

    def __str__(self):
        return f"status {self.status}\n{self.out}{self.errors}"


def command(program, *arguments):
    """Full command line of a built program."""
    return [os.path.join(FOLDER, program), *[str(argument) for argument in arguments]]


class Case(unittest.TestCase):
    """A test in an empty folder of its own."""

    def setUp(self):
        holder = tempfile.TemporaryDirectory(prefix="mirrorband-")
        self.addCleanup(holder.cleanup)
        self.folder = holder.name

    def path(self, name):
        return os.path.join(self.folder, name)

    def run_program(self, program, *arguments, **options):
        return Done(subprocess.run(command(program, *arguments), cwd=self.folder, capture_output=True,
                                   check=False, timeout=120, **options))

    def succeed(self, program, *arguments, **options):
        done = self.run_program(program, *arguments, **options)
        self.assertEqual(done.status, 0, done)
        return done

    def refuse(self, status, sentence, program, *arguments, **options):
        """The program must end with this status, and say exactly this one line (besides where help is)."""
        done = self.run_program(program, *arguments, **options)
        lines = [line for line in done.errors.splitlines() if not line.endswith("--help lists all options")]
        self.assertEqual((done.status, lines), (status, [f"{program}: {sentence}"]))
        self.assertEqual(done.out, "")
        return done

    def names(self):
        """What stands in the folder."""
        return sorted(os.listdir(self.folder))


def voice(seconds=6.0, rate=8000):
    """Recorded digits and letters with pauses of 0.3 s, float, peak 0.5, as many seconds as asked for."""
    parts, total = [], 0
    names = [f"digits/{digit}" for digit in range(10)] + [f"phonetic/{letter}_p" for letter in "qrdgvly"]
    while total < seconds * rate:
        with wave.open(VOICES + names[len(parts) % len(names)] + ".wav") as file:
            words = numpy.frombuffer(file.readframes(file.getnframes()), "<i2") / 32768.0
        parts.append(numpy.concatenate([numpy.repeat(words, rate // 8000), numpy.zeros(int(0.3 * rate))]))
        total += len(parts[-1])
    samples = numpy.concatenate(parts)[:int(seconds * rate)]
    return 0.5 * samples / numpy.max(numpy.abs(samples))


def write_wave(path, samples, rate=8000):
    """16-bit WAV; a two-dimensional array gives a column a channel."""
    samples = numpy.atleast_2d(numpy.asarray(samples).T).T
    with wave.open(path, "wb") as file:
        file.setnchannels(samples.shape[1])
        file.setsampwidth(2)
        file.setframerate(rate)
        file.writeframes(numpy.clip(numpy.round(samples * 32768), -32768, 32767).astype("<i2").tobytes())


def read_wave(path):
    """Samples as float, of integers of 16 or 24 bits or 32-bit floats, and the rate."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", scipy.io.wavfile.WavFileWarning)  # chunks beside the samples
        rate, samples = scipy.io.wavfile.read(path)
    # 24 bits come in the upper part of 32
    scale = {"int16": 2.0**15, "int32": 2.0**31}.get(str(samples.dtype), 1.0)
    return samples / scale, rate


def write_cf32(path, samples):
    numpy.asarray(samples).astype("<c8").tofile(path)


def read_ci16(path):
    pairs = numpy.fromfile(path, "<i2").astype(float) / 32768.0
    return pairs[0::2] + 1j * pairs[1::2]


def read_table(path):
    """A table of a program: remarks, names of the columns, rows."""
    with open(path, encoding="utf-8") as file:
        lines = file.read().splitlines()
    remarks = [line for line in lines if line.startswith("#")]
    rest = [line for line in lines if not line.startswith("#")]
    rows = numpy.array([[float(field) for field in line.split(",")] for line in rest[1:]])
    return remarks, rest[0].split(","), rows


def read_json(path):
    with open(path, encoding="utf-8") as file:
        return json.load(file)


def main():
    """Runs the cases of the calling script."""
    unittest.main(argv=[sys.argv[0]], verbosity=2)
