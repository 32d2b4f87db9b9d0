"""Pipes in both directions."""

import json
import subprocess

import numpy

import programs

RAW = ("--rate", "48kHz", "--format")


class Pipes(programs.Case):
    def setUp(self):
        super().setUp()
        programs.write_wave(self.path("report.wav"), programs.voice(6.0))

    def chain(self, *commands):
        """Runs programs joined by pipes; what each ended with, and the standard output of the last."""
        running, last = [], None
        for line in commands:
            running.append(subprocess.Popen(programs.command(*line), cwd=self.folder, stdin=last,
                                            stdout=subprocess.PIPE, stderr=subprocess.PIPE))
            if last is not None:
                last.close()
            last = running[-1].stdout
        out = last.read()
        last.close()
        errors = [one.stderr.read().decode() for one in running]
        for one in running:
            one.stderr.close()
        return [one.wait(60) for one in running], out, errors

    def test_three_programs_work_through_pipes(self):
        for look_ahead in "60ms", "all":
            with self.subTest(look_ahead=look_ahead):
                status, out, errors = self.chain(
                    ["mb-transmit", "--from", "report.wav", "--to", "-", *RAW, "ci16"],
                    ["mb-channel", "--from", "-", "--to", "-", *RAW, "ci16", "--set", "channel.noise=20 dB",
                     "--set", "channel.offset=-310 Hz", "--set", "channel.gain=-6 dB"],
                    ["mb-receive", "--from", "-", "--to", "heard.wav", *RAW, "ci16", "--look-ahead", look_ahead,
                     "--json"])
                self.assertEqual(status, [0, 0, 0], errors)
                self.assertAlmostEqual(json.loads(out)["carrier_offset_hz"], -310, delta=0.2)

    def test_a_pipe_carries_the_bytes_of_the_file(self):
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.cf32", "--rate", "48000")
        _, piped, _ = self.chain(["mb-transmit", "--from", "report.wav", "--to", "-", *RAW, "cf32"])
        with open(self.path("air.cf32"), "rb") as file:
            self.assertEqual(file.read(), piped)

    def test_audio_goes_through_pipes_too(self):
        audio = (programs.voice(6.0) * 32768).astype("<i2").tobytes()
        done = self.run_program("mb-transmit", "--from", "-", "--audio-rate", "8000", "--audio-format", "s16",
                                "--to", "air.cf32", "--rate", "48000", input=audio)
        self.assertEqual(done.status, 0, done)
        status, out, errors = self.chain(["mb-receive", "--from", "air.cf32", "--rate", "48000", "--to", "-",
                                          "--audio-format", "f32", "--look-ahead", "all"])
        self.assertEqual(status, [0], errors)
        self.assertEqual(len(numpy.frombuffer(out, "<f4")), 6 * 16000)
        self.assertIn("mb-receive: 6.00 s of audio", errors[0])

    def test_a_pipe_says_neither_rate_nor_format_of_itself(self):
        self.refuse(2, "--rate is missing: a pipe holds samples that do not tell their rate; give it, such as "
                       "--rate 240000", "mb-receive", "--from", "-", "--format", "ci16", "--to", "heard.wav",
                    input=b"")
        self.refuse(2, "--format is missing: a pipe holds raw samples; it is one of cf32 ci16 ci8 cu8",
                    "mb-channel", "--from", "-", "--rate", "48000", "--to", "heard.ci16", input=b"")
        self.refuse(2, "--format is missing: a pipe holds raw samples; it is one of cf32 ci16 ci8 cu8",
                    "mb-transmit", "--from", "report.wav", "--to", "-")
        self.refuse(2, "--audio-format is missing: a pipe holds raw audio, s16 or f32", "mb-receive", "--from", "-",
                    *RAW, "ci16", "--to", "-", input=b"")
        self.refuse(2, "a pipe holds raw audio: give --audio-format, s16 or f32, and --audio-rate", "mb-transmit",
                    "--from", "-", "--to", "air.ci16", input=b"")

    def test_results_do_not_mix_with_samples(self):
        self.refuse(2, "--json and --to - would both write to standard output; give --to a file", "mb-transmit",
                    "--from", "report.wav", "--to", "-", "--format", "ci16", "--json")
        self.refuse(2, "--json and --truth - would both write to standard output; give --truth a file",
                    "mb-channel", "--from", "air.ci16", "--to", "heard.ci16", "--truth", "-", "--json")
        self.refuse(2, "--to and --truth are both -; standard output can serve only one", "mb-channel", "--from",
                    "air.ci16", "--to", "-", "--truth", "-")

    def test_a_pipe_cut_inside_a_sample_is_an_error(self):
        samples = numpy.zeros(4801, "<i2").tobytes()
        done = self.run_program("mb-channel", "--from", "-", *RAW, "ci16", "--to", "heard.ci16", input=samples)
        self.assertEqual(done.status, 1)
        self.assertIn("no multiple of the 4 of a ci16 sample", done.errors)
        self.assertNotIn("heard.ci16", self.names())

    def test_an_empty_pipe_is_an_error(self):
        for program, target in ("mb-channel", "heard.ci16"), ("mb-receive", "heard.wav"):
            done = self.run_program(program, "--from", "-", *RAW, "ci16", "--to", target, input=b"")
            self.assertNotEqual(done.status, 0)
            self.assertNotIn(target, self.names())

    def test_a_reader_that_went_away_is_one_sentence(self):
        line = programs.command("mb-transmit", "--from", "report.wav", "--to", "-", "--rate", "2.4e6", "--format",
                                "cf32")
        with subprocess.Popen(line, cwd=self.folder, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as writer:
            writer.stdout.read(1000)
            writer.stdout.close()
            errors = writer.stderr.read().decode().splitlines()
        self.assertEqual((writer.returncode, len(errors)), (1, 1), errors)
        self.assertIn("standard output", errors[0])


if __name__ == "__main__":
    programs.main()
