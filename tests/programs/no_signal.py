"""What is no suppressed-carrier signal is said to be none, with exit status 3, and never locked to."""

import json
import os

import numpy

import programs

RATE = 16000
SECONDS = 8.0


def one_sided(message):
    """The message with its negative frequencies taken away."""
    spectrum = numpy.fft.fft(message)
    spectrum[len(spectrum) // 2:] = 0
    return 2 * numpy.fft.ifft(spectrum)


class NoSignal(programs.Case):
    def setUp(self):
        super().setUp()
        random = numpy.random.default_rng(20261201)
        count = int(RATE * SECONDS)
        voice = numpy.repeat(programs.voice(SECONDS), RATE // 8000)
        spectrum = numpy.fft.fft(voice)
        frequency = numpy.abs(numpy.fft.fftfreq(count, 1 / RATE))
        voice = numpy.real(numpy.fft.ifft(numpy.where((frequency > 300) & (frequency < 2700), spectrum, 0)))
        noise = 0.003 * (random.standard_normal(count) + 1j * random.standard_normal(count))
        turn = numpy.exp(2j * numpy.pi * 137 / RATE * numpy.arange(count))
        self.inputs = {
            "noise": 30 * noise,
            "a plain carrier": 0.5 * turn + noise,
            "full AM": (0.4 + 0.4 * voice) * turn + noise,
            "one sideband": one_sided(voice) * turn + noise,
            "nothing": 0 * noise,
        }

    def receive(self, name, *more):
        programs.write_cf32(self.path("band.cf32"), self.inputs[name])
        return self.run_program("mb-receive", "--from", "band.cf32", "--rate", RATE, "--to", "out.wav", *more)

    def test_a_recording_gives_no_audio(self):
        for name in self.inputs:
            with self.subTest(name=name):
                done = self.receive(name, "--look-ahead", "all", "--track", "track.csv")
                self.assertEqual(done.status, 3, done)
                self.assertEqual(done.errors, "mb-receive: no suppressed-carrier signal was found in band.cf32 "
                                              "within 1000 Hz of 0 Hz; no audio was written; --offset and --span say "
                                              "where to look\n")
                self.assertEqual(self.names(), ["band.cf32"])

    def test_live_audio_is_muted(self):
        for name in self.inputs:
            with self.subTest(name=name):
                done = self.receive(name)
                self.assertEqual(done.status, 3, done)
                self.assertIn("the audio is silent", done.errors)
                self.assertFalse(numpy.any(programs.read_wave(self.path("out.wav"))[0]))
                os.remove(self.path("out.wav"))

    def test_the_result_says_so_too(self):
        result = json.loads(self.receive("noise", "--look-ahead", "all", "--json").out)
        self.assertFalse(result["found"])
        self.assertIsNone(result["carrier_offset_hz"])


if __name__ == "__main__":
    programs.main()
