"""What the tests of mb-measure share: the main job made once, and results as a dictionary."""

import json
import os
import sys

sys.path.insert(0, os.path.join(os.path.dirname(os.path.dirname(os.path.abspath(__file__))), "programs"))
import programs  # noqa: E402  (found by the line above)

import numpy  # noqa: E402

RATE = 48000


class Case(programs.Case):
    """A test that measures."""

    def measure(self, *arguments, status=0, **options):
        done = self.run_program("mb-measure", *arguments, "--json", "--quiet", **options)
        self.assertEqual(done.status, status, done)
        return json.loads(done.out)

    def emission(self, seconds=8.0, rate=RATE, *arguments):
        """report.wav and the emission of it, air.ci16, without conditioning unless told."""
        programs.write_wave(self.path("report.wav"), programs.voice(seconds))
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.ci16", "--rate", rate, "--quiet", "--set",
                     "transmit.conditioning=off", *arguments)

    def passage(self, *settings, rate=RATE):
        """heard.cf32 with truth.csv, and heard.wav received from it."""
        given = [part for setting in settings for part in ("--set", setting)]
        self.succeed("mb-channel", "--from", "air.ci16", "--rate", rate, "--to", "heard.cf32", "--truth", "truth.csv",
                     "--seed", 7, "--quiet", *given)
        self.succeed("mb-receive", "--from", "heard.cf32", "--rate", rate, "--to", "heard.wav", "--look-ahead", "all",
                     "--quiet")


def two_tones(seconds, offset_hz, cubic=0.0, rate=RATE):
    """Double sideband of 700 and 1900 Hz, 0.25 each, with a cubic term."""
    time = numpy.arange(int(seconds * rate)) / rate
    message = 0.25 * (numpy.cos(2 * numpy.pi * 700 * time) + numpy.cos(2 * numpy.pi * 1900 * time))
    message = message + cubic * message**3
    return message * numpy.exp(2j * numpy.pi * (offset_hz * time + 0.1))


def noise(seconds, size=0.05, seed=3, rate=RATE):
    generator = numpy.random.default_rng(seed)
    count = int(seconds * rate)
    return size * (generator.standard_normal(count) + 1j * generator.standard_normal(count))


main = programs.main
write_cf32, write_wave, voice = programs.write_cf32, programs.write_wave, programs.voice
