"""mb-measure of received audio: SNR, loss against ideal detection, delay and polarity."""

import numpy

import measuring


class MeasureAudio(measuring.Case):
    def score(self, *arguments, **options):
        return self.measure("--from", "heard.wav", "--message", "report.wav", *arguments, **options)

    def test_the_main_job_loses_little_and_keeps_its_polarity(self):
        self.emission(12.0)
        self.passage("channel.offset=137Hz", "channel.drift=0.2Hz/s", "channel.noise=15dB", "channel.phase=random")
        result = self.score("--truth", "truth.csv", "--iq", "heard.cf32", "--rate", 48000)
        self.assertEqual(result["message_taken"], "band limited by transmit.*")
        self.assertLess(abs(result["loss_db"]), 0.05)
        self.assertAlmostEqual(result["loss_db"], result["ideal_snr_db"] - result["snr_db"], delta=0.001)
        self.assertEqual(result["polarity_changes"], 0)
        self.assertAlmostEqual(result["delay_s"], 0.0, delta=0.0005)
        # coherent detection gains 3 dB; the pauses, of noise alone, take off what is not active speech
        active = self.measure("--from", "report.wav")["audio_activity_percent"] / 100
        self.assertAlmostEqual(result["snr_db"], 18.0 + 10 * numpy.log10(active), delta=0.7)
        self.assertLess(result["carrier_offset_rms_error_hz"], 0.05)

    def test_a_conditioned_message_is_taken_as_it_was_sent(self):
        self.emission(8.0, 48000, "--set", "transmit.conditioning=on")
        self.passage("channel.noise=20dB")
        result = self.score("--truth", "truth.csv", "--iq", "heard.cf32", "--rate", 48000)
        self.assertEqual(result["message_taken"], "conditioned by transmit.*")
        self.assertGreater(result["snr_db"], 18)
        self.assertLess(abs(result["loss_db"]), 0.05)
        plain = self.score("--set", "transmit.conditioning=off")
        self.assertLess(plain["snr_db"], result["snr_db"] - 3)

    def test_a_receiver_that_errs_in_phase_loses_what_it_should(self):
        # audio of a detector 60 degrees off: the message falls by 6.02 dB, the noise does not
        self.emission(8.0)
        self.passage("channel.noise=20dB")
        samples = numpy.fromfile(self.path("heard.cf32"), "<c8")
        audio = numpy.real(samples * numpy.exp(-1j * numpy.pi / 3))
        measuring.write_wave(self.path("heard.wav"), audio, 48000)
        result = self.score("--truth", "truth.csv", "--iq", "heard.cf32", "--rate", 48000)
        self.assertAlmostEqual(result["loss_db"], 6.02, delta=0.15)

    def test_polarity_delay_and_skip(self):
        message = measuring.voice(12.0)
        generator = numpy.random.default_rng(1)
        audio = numpy.concatenate([numpy.zeros(800), -0.4 * message])[:len(message)]
        audio = audio + 1e-3 * generator.standard_normal(len(audio))
        measuring.write_wave(self.path("report.wav"), message)
        measuring.write_wave(self.path("heard.wav"), audio)
        result = self.score()
        self.assertAlmostEqual(result["delay_s"], 0.1, delta=1e-4)
        self.assertEqual(result["polarity_changes"], 0)
        self.assertAlmostEqual(result["gain_db"], 20 * numpy.log10(0.4), delta=0.1)
        turned = audio.copy()
        turned[80000:] *= -1
        turned[:16000] = 0.1 * generator.standard_normal(16000)
        measuring.write_wave(self.path("heard.wav"), turned)
        whole = self.score()
        skipped = self.score("--skip", "2s")
        self.assertEqual(skipped["polarity_changes"], 1)
        self.assertGreater(skipped["snr_db"], whole["snr_db"] + 0.5)
        self.assertAlmostEqual(skipped["scored_s"], result["scored_s"] - 2, delta=0.2)
        self.assertEqual(skipped["skipped_s"], 2)

    def test_audio_alone_has_a_level(self):
        measuring.write_wave(self.path("tone.wav"), 0.5 * numpy.sin(numpy.arange(48000) * 2 * numpy.pi * 0.02), 16000)
        result = self.measure("--from", "tone.wav")
        self.assertAlmostEqual(result["active_speech_level_dbfs"], 20 * numpy.log10(0.5) - 3.01, delta=0.1)
        self.assertAlmostEqual(result["audio_peak_dbfs"], -6.02, delta=0.05)
        self.assertNotIn("snr_db", result)

    def test_audio_by_a_pipe(self):
        message = measuring.voice(6.0)
        measuring.write_wave(self.path("report.wav"), message)
        raw = (0.5 * message).astype("<f4").tobytes()
        result = self.measure("--from", "-", "--audio-format", "f32", "--audio-rate", 8000, "--message", "report.wav",
                              input=raw)
        self.assertGreater(result["snr_db"], 40)
        self.assertAlmostEqual(result["gain_db"], -6.02, delta=0.05)


if __name__ == "__main__":
    measuring.main()
