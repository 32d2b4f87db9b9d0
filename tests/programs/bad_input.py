"""Bad input: one clear sentence that names what, where and the remedy, and an exit status."""

import os
import resource
import signal
import unittest

import numpy

import programs

MISSING = "does not exist; check the path"
EMPTY = "is empty; record or copy it again"


class BadInput(programs.Case):
    def setUp(self):
        super().setUp()
        self.message = programs.voice(3.0)
        programs.write_wave(self.path("report.wav"), self.message)
        self.air = numpy.repeat(self.message, 6).astype("<c8")
        programs.write_cf32(self.path("air.cf32"), self.air)

    def put(self, name, content):
        with open(self.path(name), "wb") as file:
            file.write(content)

    def part_of(self, name, count):
        with open(self.path(name), "rb") as file:
            return file.read(count)

    def transmit(self, status, sentence, source="report.wav", target="out.ci16", *more, **options):
        before = self.names()
        self.refuse(status, sentence, "mb-transmit", "--from", source, "--to", target, *more, **options)
        self.assertEqual(self.names(), before)

    def impair(self, status, sentence, source="air.cf32", target="out.ci16", *more, **options):
        before = self.names()
        self.refuse(status, sentence, "mb-channel", "--from", source, "--to", target, *more, **options)
        self.assertEqual(self.names(), before)

    def receive(self, status, sentence, source="air.cf32", target="out.wav", *more, **options):
        before = self.names()
        self.refuse(status, sentence, "mb-receive", "--from", source, "--to", target, *more, **options)
        self.assertEqual(self.names(), before)

    def test_a_missing_input(self):
        self.transmit(1, f"gone.wav {MISSING}", "gone.wav")
        self.impair(1, f"gone.sigmf-meta {MISSING}", "gone.sigmf-meta")
        self.receive(1, f"gone.ci16 {MISSING}", "gone.ci16", "out.wav", "--rate", "48000")

    def test_an_empty_input(self):
        for name in "none.wav", "none.ci16", "none.sigmf-meta":
            self.put(name, b"")
        self.transmit(1, f"none.wav {EMPTY}", "none.wav")
        self.impair(1, f"none.ci16 {EMPTY}", "none.ci16", "out.ci16", "--rate", "48000")
        self.receive(1, f"none.sigmf-meta {EMPTY}", "none.sigmf-meta")

    def test_a_truncated_input(self):
        self.put("cut.wav", self.part_of("report.wav", 1044))
        self.transmit(1, "cut.wav is truncated: its header states 48000 bytes of samples and 1000 are there; copy or "
                         "record it again", "cut.wav")
        self.put("head.wav", self.part_of("report.wav", 20))
        self.transmit(1, "head.wav is truncated: it ends before the samples begin; copy or record it again",
                      "head.wav")
        self.succeed("mb-channel", "--from", "air.cf32", "--rate", "48000", "--to", "cut.sigmf-meta", "--quiet")
        self.put("cut.sigmf-data", self.part_of("cut.sigmf-data", 8000))
        self.receive(1, "cut.sigmf-data is truncated: it holds 1000 samples, but annotations[0] of cut.sigmf-meta "
                        "reaches to sample 144000; copy or record it again", "cut.sigmf-meta")

    def test_an_odd_count_of_bytes(self):
        self.put("odd.ci16", bytes(4003))
        sentence = ("odd.ci16 holds 4003 bytes, no multiple of the 4 of a ci16 sample: it is truncated or of another "
                    "format; copy it again or cut the last 3 bytes off")
        self.impair(1, sentence, "odd.ci16", "out.ci16", "--rate", "48000")
        self.receive(1, sentence, "odd.ci16", "out.wav", "--rate", "48000")

    def test_a_wrong_ending(self):
        self.put("report.mp3", b"ID3 and more")
        self.transmit(1, "report.mp3 has no ending that is read as audio; use one of .wav .flac .rf64", "report.mp3")
        self.impair(1, "report.mp3 has no ending that is read as IQ; use one of .sigmf-meta .wav .rf64 .cf32 .ci16 "
                       ".ci8 .cu8, or state a format", "report.mp3", "out.ci16", "--rate", "48000")
        self.receive(1, "out.ogg has no ending that is written as audio; use one of .wav .flac .rf64", "air.cf32",
                     "out.ogg", "--rate", "48000")
        self.transmit(1, "out.dat has no ending that is written as IQ; use one of .sigmf-meta .wav .rf64 .cf32 .ci16 "
                         ".ci8 .cu8", "report.wav", "out.dat")

    def test_content_that_is_not_what_its_ending_says(self):
        self.put("text.wav", b"the snow is deep today\n" * 40)
        self.transmit(1, "text.wav is not WAV or RF64 but text; convert it or give it the ending of its kind",
                      "text.wav")
        self.put("wave.flac", self.part_of("report.wav", 10000))
        self.transmit(1, "wave.flac is not FLAC but WAV; convert it or give it the ending of its kind", "wave.flac")
        self.put("wave.ci16", self.part_of("report.wav", 10000))
        self.receive(1, "wave.ci16 is WAV, not raw ci16 samples; give it the ending of its kind", "wave.ci16",
                     "out.wav", "--rate", "48000")
        self.receive(1, "report.wav has 1 channel, but IQ needs two (I left, Q right); give a recording of a radio",
                     "report.wav")

    def test_a_rate_that_is_missing_or_does_not_fit(self):
        sentence = ("--rate is missing: air.cf32 holds samples that do not tell their rate; give it, such as --rate "
                    "240000")
        self.impair(2, sentence)
        self.receive(2, sentence)
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.sigmf-meta", "--quiet")
        self.receive(2, "--rate 96000 Hz does not fit air.sigmf-meta, which states 48000 Hz; leave it out",
                     "air.sigmf-meta", "out.wav", "--rate", "96000")
        self.receive(2, "--format ci8 does not fit air.cf32, which holds cf32; leave it out", "air.cf32", "out.wav",
                     "--rate", "48000", "--format", "ci8")

    def test_a_rate_too_low_for_the_message(self):
        self.transmit(2, "the sample rate does not do: rate_hz must be between 48000 and 2.5e+07 Hz; it is 4000",
                      "report.wav", "out.ci16", "--rate", "4000")
        done = self.run_program("mb-transmit", "--from", "report.wav", "--to", "out.ci16", "--rate", "48000",
                                "--offset", "30kHz")
        self.assertEqual(done.status, 2)
        self.assertIn("an output rate of 48000 Hz is too low for a message up to 2700 Hz about a carrier at 30000 Hz",
                      done.errors)
        self.receive(2, "the sample rate does not do: rate_hz must be between 8000 and 2.5e+07 Hz; it is 5000", "air.cf32", "out.wav", "--rate",
                     "5000")
        self.assertNotIn("out.wav", self.names())

    def test_an_output_that_cannot_be_written(self):
        os.mkdir(self.path("folder.wav"))
        for target in "gone/out.wav", "folder.wav":
            done = self.run_program("mb-receive", "--from", "air.cf32", "--rate", "48000", "--to", target)
            self.assertEqual((done.status, len(done.errors.splitlines())), (1, 1), done)
            self.assertIn(target, done.errors)
        done = self.run_program("mb-channel", "--from", "air.cf32", "--rate", "48000", "--to", "out.ci16", "--truth",
                                "gone/truth.csv")
        self.assertEqual(done.status, 1)
        self.assertIn("gone/truth.csv", done.errors)
        self.assertNotIn("out.ci16", self.names())

    @unittest.skipIf(os.geteuid() == 0, "root may write anywhere")
    def test_a_folder_without_permission(self):
        os.mkdir(self.path("shut"), mode=0o500)
        done = self.run_program("mb-transmit", "--from", "report.wav", "--to", "shut/out.ci16")
        self.assertEqual(done.status, 1)
        self.assertIn("Permission denied", done.errors)

    @unittest.skipUnless(os.path.exists("/dev/full"), "no device that is always full")
    def test_a_full_disk(self):
        os.symlink("/dev/full", self.path("full.ci16"))
        done = self.run_program("mb-transmit", "--from", "report.wav", "--to", "full.ci16")
        self.assertEqual((done.status, len(done.errors.splitlines())), (1, 1), done)
        self.assertIn("full.ci16", done.errors)
        self.assertIn("the disk is full", done.errors)

    def test_a_limit_on_the_size_of_files(self):
        def small():
            resource.setrlimit(resource.RLIMIT_FSIZE, (100000, 100000))
            signal.signal(signal.SIGXFSZ, signal.SIG_DFL)

        for program, source, target in (("mb-transmit", "report.wav", "out.ci16"),
                                        ("mb-channel", "air.cf32", "out.sigmf-meta"),
                                        ("mb-receive", "air.cf32", "out.wav")):
            with self.subTest(program=program):
                before = self.names()
                rate = "2.4e6" if program == "mb-transmit" else "48000"
                done = self.run_program(program, "--from", source, "--to", target, "--rate", rate, "--set",
                                        "audio.rate=48 kHz", preexec_fn=small)
                self.assertEqual((done.status, len(done.errors.splitlines())), (1, 1), done)
                self.assertIn("the largest file size allowed is reached", done.errors)
                self.assertEqual(self.names(), before)

    def test_an_output_that_is_the_input(self):
        os.symlink("air.cf32", self.path("alias.cf32"))
        for target in "air.cf32", "./air.cf32", "alias.cf32":
            self.impair(2, f"--from and --to are the same file {target}; give the output another name", "air.cf32",
                        target, "--rate", "48000")
        self.impair(2, "--from and --truth are the same file air.cf32; give the output another name", "air.cf32",
                    "out.cf32", "--truth", "air.cf32", "--rate", "48000")
        self.receive(2, "--to and --track are the same file out.wav; give the output another name", "air.cf32",
                     "out.wav", "--track", "out.wav", "--rate", "48000")

    def test_samples_that_are_no_numbers_are_counted_and_survived(self):
        damaged = self.air.copy()
        damaged[1000:1010] = numpy.nan
        damaged[70000] = complex(numpy.inf, 0)
        programs.write_cf32(self.path("nan.cf32"), damaged)
        remark = "nan.cf32 holds 11 samples that are no numbers; they were taken as zero"
        done = self.succeed("mb-channel", "--from", "nan.cf32", "--rate", "48000", "--to", "out.cf32", "--set",
                            "channel.noise=30 dB")
        self.assertEqual(done.errors, f"mb-channel: {remark}\n")
        self.assertTrue(numpy.all(numpy.isfinite(numpy.fromfile(self.path("out.cf32"), "<c8"))))
        for look_ahead in "all", "60ms":
            done = self.succeed("mb-receive", "--from", "nan.cf32", "--rate", "48000", "--to", "out.wav",
                                "--look-ahead", look_ahead)
            self.assertIn(f"mb-receive: {remark}\n", done.errors)

    def test_silence_is_remarked_on(self):
        programs.write_wave(self.path("quiet.wav"), 0 * self.message)
        done = self.succeed("mb-transmit", "--from", "quiet.wav", "--to", "quiet.ci16")
        self.assertEqual(done.errors, "mb-transmit: quiet.wav is silent, all its samples are zero; is it the right "
                                      "recording?\n")
        self.impair(1, "quiet.ci16 is silent, so that noise and leak have nothing to refer to; give another input, or "
                       "channel.signal_level", "quiet.ci16", "out.ci16", "--rate", "48000", "--set",
                    "channel.noise=10 dB")
        self.succeed("mb-channel", "--from", "quiet.ci16", "--rate", "48000", "--to", "out.ci16", "--set",
                     "channel.noise=10 dB", "--set", "channel.signal_level=-20 dBFS")

    def test_clipped_audio_is_remarked_on(self):
        programs.write_wave(self.path("loud.wav"), 20 * self.message)
        done = self.succeed("mb-transmit", "--from", "loud.wav", "--to", "out.ci16")
        self.assertRegex(done.errors, r"^mb-transmit: loud.wav was clipped when it was recorded: [\d.]+ % of its "
                                      r"samples stand at full scale; record it again at a lower level\n$")
        self.assertNotIn("clipped when", self.succeed("mb-transmit", "--from", "report.wav", "--to", "out.ci16").errors)

    def test_a_clipped_output_is_remarked_on(self):
        done = self.succeed("mb-channel", "--from", "air.cf32", "--rate", "48000", "--to", "out.ci16", "--set",
                            "channel.gain=20 dB")
        self.assertRegex(done.errors, r"^mb-channel: \d+ samples of the output were clipped; lower channel.gain, or "
                                      r"write cf32\n$")


if __name__ == "__main__":
    programs.main()
