"""The main job by hand: transmit, impair, receive a recording."""

import json

import numpy

import programs


class MainJob(programs.Case):
    def setUp(self):
        super().setUp()
        self.message = programs.voice(8.0)
        programs.write_wave(self.path("report.wav"), self.message)

    def transmit(self, *more):
        return self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.ci16", "--rate", "240000", *more)

    def impair(self, *more):
        return self.succeed("mb-channel", "--from", "air.ci16", "--rate", "240000", "--to", "heard.sigmf-meta",
                            "--set", "channel.noise=15 dB", "--set", "channel.offset=137 Hz", "--truth",
                            "truth.csv", "--seed", "7", *more)

    def receive(self, *more):
        return self.succeed("mb-receive", "--from", "heard.sigmf-meta", "--to", "heard.wav", "--track",
                            "track.csv", *more)

    def test_the_emission_is_as_long_as_the_audio_and_is_not_clipped(self):
        done = self.transmit("--json")
        result = json.loads(done.out)
        air = programs.read_ci16(self.path("air.ci16"))
        self.assertEqual(len(air), 8 * 240000)
        self.assertEqual((result["samples"], result["clipped"]), (8 * 240000, 0))
        # transmit.peak is -1 dBFS and the limiter does not overshoot; quantisation adds less than 0.001 dB
        peak_db = 20 * numpy.log10(numpy.max(numpy.abs(air)))
        self.assertLess(peak_db, -0.99)
        self.assertGreater(peak_db, -2.0)
        self.assertAlmostEqual(result["pep_dbfs"], peak_db, delta=0.01)
        self.assertAlmostEqual(result["mean_power_dbfs"], 10 * numpy.log10(numpy.mean(numpy.abs(air) ** 2)),
                               delta=0.01)

    def test_a_summary_for_people_ends_each_program(self):
        self.assertIn("air.ci16: 8.00 s at 240000 Hz\n", self.transmit().out)
        self.assertIn("heard.sigmf-meta: 8.00 s at 240000 Hz, seed 7\n", self.impair().out)
        done = self.receive("--look-ahead", "all")
        self.assertIn("heard.wav: 8.00 s of audio at 16000 Hz", done.out)
        self.assertRegex(done.out, r"carrier offset +13[67]\.\d\d Hz")
        self.assertEqual(done.errors, "")

    def test_quiet_programs_say_nothing(self):
        for done in self.transmit("--quiet"), self.impair("--quiet"), self.receive("--quiet"):
            self.assertEqual((done.out, done.errors), ("", ""))

    def test_the_truth_tells_what_was_done_every_10_ms(self):
        self.transmit()
        self.impair("--set", "channel.drift=0.2 Hz/s")
        _, names, rows = programs.read_table(self.path("truth.csv"))
        self.assertEqual(names, ["time_s", "carrier_phase_rad", "carrier_offset_hz", "gain_db", "fading_db",
                                 "path1_re", "path1_im", "path2_re", "path2_im"])
        self.assertEqual(len(rows), 800)
        time_s = numpy.arange(800) * 0.01
        numpy.testing.assert_allclose(rows[:, 0], time_s, atol=1e-12)
        numpy.testing.assert_allclose(rows[:, 2], 137 + 0.2 * time_s, atol=1e-9)
        # phase of a steady drift; the table keeps every digit of a double
        numpy.testing.assert_allclose(rows[:, 1], 2 * numpy.pi * (137 * time_s + 0.1 * time_s ** 2), atol=1e-6)

    def test_equal_seeds_give_equal_samples(self):
        self.transmit()
        self.impair()
        with open(self.path("heard.sigmf-data"), "rb") as file:
            first = file.read()
        self.impair()
        with open(self.path("heard.sigmf-data"), "rb") as file:
            self.assertEqual(file.read(), first)

    def test_the_noise_is_as_strong_as_asked_for(self):
        self.transmit()
        level_db = json.loads(self.impair("--json").out)["signal_level_dbfs"]
        air = programs.read_ci16(self.path("air.ci16"))
        heard = numpy.fromfile(self.path("heard.sigmf-data"), "<c8")
        turn = numpy.exp(2j * numpy.pi * 137 / 240000 * numpy.arange(len(air)))
        noise_db = 10 * numpy.log10(numpy.mean(numpy.abs(heard - air * turn) ** 2))
        # white over 240 kHz, 15 dB below the active speech in 5.4 kHz; 1.9 million samples: sigma 0.003 dB
        self.assertAlmostEqual(noise_db, level_db - 15 + 10 * numpy.log10(240000 / 5400), delta=0.03)

    def test_the_recording_says_where_the_signal_is(self):
        self.transmit()
        self.impair()
        annotation = programs.read_json(self.path("heard.sigmf-meta"))["annotations"][0]
        self.assertEqual(annotation["core:freq_lower_edge"], 137 - 2700)
        self.assertEqual(annotation["core:freq_upper_edge"], 137 + 2700)
        self.assertEqual(annotation["signal:detail"]["carrier_variant"], "suppressed_carrier")

    def check_audio(self, delay_s):
        """The message comes back; noise 15 dB down costs 0.02 of the correlation."""
        audio, rate = programs.read_wave(self.path("heard.wav"))
        sent = numpy.repeat(self.message, rate // 8000)
        spectrum = numpy.fft.rfft(sent, 2 * len(sent)), numpy.fft.rfft(audio, 2 * len(sent))
        # both limited to 400 .. 2500 Hz, where transmitter and receiver are flat
        frequency = numpy.fft.rfftfreq(2 * len(sent), 1 / rate)
        inside = (frequency > 400) & (frequency < 2500)
        cross = numpy.fft.irfft(numpy.where(inside, numpy.conj(spectrum[0]) * spectrum[1], 0))
        power = [numpy.fft.irfft(numpy.where(inside, numpy.abs(one) ** 2, 0))[0] for one in spectrum]
        at = int(numpy.argmax(numpy.abs(cross)))
        self.assertGreater(numpy.abs(cross[at]) / numpy.sqrt(power[0] * power[1]), 0.95)
        self.assertAlmostEqual(at / rate, delay_s, delta=0.002)

    def test_a_whole_recording_is_received_without_delay(self):
        self.transmit("--set", "transmit.conditioning=off")
        self.impair()
        result = json.loads(self.receive("--look-ahead", "all", "--json").out)
        self.assertTrue(result["found"])
        # the bound of Cramer and Rao is far below; 0.05 Hz is what a user would notice
        self.assertAlmostEqual(result["carrier_offset_hz"], 137, delta=0.05)
        self.assertLess(result["loss_estimate_db"], 0.1)
        self.assertEqual(result["audio_clipped"], 0)
        self.assertEqual(len(programs.read_wave(self.path("heard.wav"))[0]), 8 * 16000)
        self.check_audio(0.0)
        _, names, rows = programs.read_table(self.path("track.csv"))
        self.assertEqual(names, ["time_s", "carrier_offset_hz", "lock_quality", "snr_db", "in_phase_dbfs",
                                 "quadrature_dbfs", "phase_sigma_rad", "mode"])
        locked = rows[rows[:, 7] == 1]
        self.assertGreater(len(locked), 100)
        self.assertLess(numpy.max(numpy.abs(locked[:, 1] - 137)), 1.0)

    def test_live_audio_comes_within_the_delay_promised(self):
        self.transmit("--set", "transmit.conditioning=off")
        self.impair()
        result = json.loads(self.receive("--json").out)
        self.assertTrue(result["found"])
        self.assertAlmostEqual(result["carrier_offset_hz"], 137, delta=0.2)
        audio, rate = programs.read_wave(self.path("heard.wav"))
        delay_s = len(audio) / rate - 8.0
        self.assertLess(delay_s, 0.120)
        self.check_audio(delay_s)
        self.assertEqual(len(programs.read_table(self.path("track.csv"))[2]), 800)

    def test_offset_and_span_say_where_to_look(self):
        self.transmit("--offset", "25kHz")
        self.succeed("mb-channel", "--from", "air.ci16", "--rate", "240000", "--to", "heard.sigmf-meta", "--set",
                     "transmit.offset=25 kHz", "--truth", "truth.csv")
        self.assertAlmostEqual(programs.read_table(self.path("truth.csv"))[2][0, 2], 25000, delta=1e-6)
        result = json.loads(self.receive("--offset", "25.1e3", "--span", "500", "--json", "--look-ahead", "all").out)
        self.assertAlmostEqual(result["carrier_offset_hz"], 25000, delta=0.05)


if __name__ == "__main__":
    programs.main()
