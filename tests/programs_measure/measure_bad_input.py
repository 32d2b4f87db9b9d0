"""mb-measure on what it cannot measure: one sentence, and the status that goes with it."""

import numpy

import measuring


class BadInput(measuring.Case):
    def setUp(self):
        super().setUp()
        measuring.write_wave(self.path("heard.wav"), measuring.voice(3.0))
        measuring.write_cf32(self.path("air.cf32"), measuring.noise(2.0))

    def test_options_that_have_nothing_to_work_on(self):
        audio, samples = ("--from", "heard.wav", "--message", "heard.wav"), ("--from", "air.cf32", "--rate", 48000)
        cases = [
            ("--truth needs --iq, the samples that mb-channel wrote with it", (*audio, "--truth", "truth.csv")),
            ("--picture needs IQ samples: give --iq", (*audio, "--picture", "a.svg")),
            ("--two-tone needs IQ samples: give them by --from", (*audio, "--two-tone")),
            ("--skip needs --message, the audio that was sent", (*samples, "--skip", "1s")),
            ("--rate needs IQ samples; a pipe of audio takes --audio-rate", (*audio, "--rate", 8000)),
            ("--format needs IQ samples; a pipe of audio takes --audio-format", (*audio, "--format", "ci16")),
            ("--from is missing: where the input comes from", ()),
            ("--picture - would mix with the figures; give a file name", (*samples, "--picture", "-")),
            ("--report - would mix with the figures; give a file name", (*samples, "--report", "-")),
            ("--from and --picture are the same file air.cf32; give the output another name",
             (*samples, "--picture", "air.cf32")),
            ("--message takes the received audio by --from, but air.cf32 holds IQ samples; receive them first, by "
             "mb-receive", ("--from", "air.cf32", "--message", "heard.wav")),
            ("--iq takes the received audio by --from, but air.cf32 holds IQ samples; receive them first, by "
             "mb-receive", ("--from", "air.cf32", "--iq", "air.cf32", "--rate", 48000)),
            ("a pipe holds raw audio: give --audio-format, s16 or f32, and --audio-rate",
             ("--from", "-", "--message", "heard.wav")),
            ("--skip 9 s leaves nothing of the 3.00 s of audio; give a shorter time", (*audio, "--skip", "9s")),
        ]
        for sentence, arguments in cases:
            with self.subTest(sentence):
                self.refuse(2, sentence, "mb-measure", *arguments)
        self.assertEqual(self.names(), ["air.cf32", "heard.wav"])

    def test_files_that_are_not_there_or_not_what_they_should_be(self):
        samples = ("--iq", "air.cf32", "--rate", 48000)
        with open(self.path("truth.csv"), "w", encoding="utf-8") as file:
            file.write("time_s,carrier_offset_hz\n0,0\n")
        with open(self.path("short.csv"), "w", encoding="utf-8") as file:
            file.write("time_s,carrier_phase_rad,carrier_offset_hz\n0,0,0\n")
        measuring.write_cf32(self.path("silence.cf32"), numpy.zeros(48000))
        measuring.write_cf32(self.path("blink.cf32"), measuring.noise(0.1))
        measuring.write_wave(self.path("silence.wav"), numpy.zeros(24000))
        cases = [
            (1, "gone.wav does not exist; check the path", ("--from", "heard.wav", "--message", "gone.wav")),
            (1, "gone.cf32 does not exist; check the path", ("--from", "gone.cf32", "--rate", 48000)),
            (1, "short.csv holds no two rows of time_s and carrier_phase_rad; give the file that mb-channel --truth "
             "wrote", ("--from", "heard.wav", "--message", "heard.wav", "--truth", "short.csv", *samples)),
            (1, "the message or the audio is silent", ("--from", "silence.wav", "--message", "heard.wav")),
            (3, "the samples are silent", ("--from", "silence.cf32", "--rate", 48000)),
            (3, "an emission needs at least 0.25 s to be measured; there are 0.1 s",
             ("--from", "blink.cf32", "--rate", 48000)),
        ]
        for status, sentence, arguments in cases:
            with self.subTest(sentence):
                self.refuse(status, sentence, "mb-measure", *arguments)

    def test_a_picture_that_cannot_be_written_says_so(self):
        done = self.run_program("mb-measure", "--from", "air.cf32", "--rate", 48000, "--picture", "no/such/a.svg")
        self.assertEqual((done.status, done.out), (1, ""), done)
        self.assertIn("no/such", done.errors)
        done = self.run_program("mb-measure", "--from", "air.cf32", "--rate", 48000, "--report", "no/such/a.html")
        self.assertEqual((done.status, done.out), (1, ""), done)
        self.assertIn("no/such", done.errors)

    def test_samples_that_are_no_numbers_are_counted(self):
        samples = measuring.noise(2.0)
        samples[::1000] = numpy.nan
        measuring.write_cf32(self.path("nan.cf32"), samples)
        done = self.run_program("mb-measure", "--from", "nan.cf32", "--rate", 48000)
        self.assertEqual(done.status, 3, done)
        self.assertIn("nan.cf32 holds 96 samples that are no numbers; they were taken as zero", done.errors)


if __name__ == "__main__":
    measuring.main()
