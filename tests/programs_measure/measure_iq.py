"""mb-measure of IQ samples: figures known from how the files were made; table, JSON, picture and page."""

import os
import re
import subprocess

import numpy

import measuring

# every field a script may rely on
FIELDS = ["program", "version", "iq", "rate_hz", "duration_s", "signal_found", "carrier_offset_hz",
          "carrier_frequency_hz", "carrier_drift_hz_per_s", "carrier_suppression_dbc", "carrier_suppression_mean_dbc",
          "carrier_suppression_pep_db", "carrier_suppression_is_bound", "upper_sideband_dbfs", "lower_sideband_dbfs",
          "sideband_balance_db", "sidebands_active_dbfs", "activity_percent", "lock_quality", "snr_estimate_db",
          "mean_power_dbfs", "pep_dbfs", "peak_to_mean_db", "noise_dbfs_per_hz", "occupied_bandwidth_99_hz",
          "occupied_bandwidth_99_signal_hz", "bandwidth_26db_hz", "bandwidth_26db_level_hz", "signal_half_width_hz",
          "out_of_band_dbc", "out_of_band_highest_dbc", "out_of_band_highest_offset_hz", "out_of_band_highest_width_hz"]


class MeasureIq(measuring.Case):
    def test_an_emission_of_voice_is_clean(self):
        self.emission(6.0, 240000)
        result = self.measure("--from", "air.ci16", "--rate", 240000)
        self.assertEqual(list(result), FIELDS)
        self.assertTrue(result["signal_found"])
        self.assertAlmostEqual(result["carrier_offset_hz"], 0.0, delta=0.01)
        self.assertLess(result["carrier_suppression_dbc"], -80)  # issue of the emission: at most -80 dBc
        self.assertAlmostEqual(result["sideband_balance_db"], 0.0, delta=0.01)
        self.assertLess(result["occupied_bandwidth_99_hz"], 5400)
        self.assertLess(result["out_of_band_dbc"], -70)
        samples = numpy.fromfile(self.path("air.ci16"), "<i2").astype(float).reshape(-1, 2) / 32768
        power = numpy.sum(samples**2, axis=1)
        self.assertAlmostEqual(result["mean_power_dbfs"], 10 * numpy.log10(numpy.mean(power)), delta=0.005)
        self.assertAlmostEqual(result["pep_dbfs"], 10 * numpy.log10(numpy.max(power)), delta=0.005)

    def test_a_leak_is_found_at_any_rate_and_offset(self):
        for rate, offset in ((48000, 700), (1200000, 300700)):
            self.emission(6.0, rate, "--set", "transmit.leak=-60dBc", "--set", "transmit.gain=-6dB", "--offset", offset)
            result = self.measure("--from", "air.ci16", "--rate", rate, "--offset", offset - 500)
            self.assertAlmostEqual(result["carrier_offset_hz"], offset, delta=0.01)
            self.assertFalse(result["carrier_suppression_is_bound"])
            # -60 dBc of a sine of full scale, whose sidebands hold 1/2: -63.01 dBFS
            line = result["pep_dbfs"] + result["carrier_suppression_pep_db"]
            self.assertAlmostEqual(line, -63.01, delta=0.15)

    def test_an_offset_is_held_against_the_truth(self):
        self.emission(8.0)
        self.passage("channel.offset=137Hz", "channel.drift=0.5Hz/s", "channel.noise=15dB", "channel.leak=-40dBc")
        result = self.measure("--from", "heard.cf32", "--rate", 48000, "--truth", "truth.csv")
        self.assertAlmostEqual(result["carrier_offset_hz"], result["carrier_offset_truth_hz"], delta=0.05)
        self.assertLess(result["carrier_offset_rms_error_hz"], 0.05)
        self.assertAlmostEqual(result["carrier_drift_hz_per_s"], 0.5, delta=0.01)
        self.assertAlmostEqual(result["carrier_suppression_dbc"], -40.0, delta=0.7)
        self.assertFalse(result["carrier_suppression_is_bound"])
        self.assertAlmostEqual(result["sideband_balance_db"], 0.0, delta=0.2)

    def test_two_tones_give_their_intermodulation(self):
        measuring.write_cf32(self.path("tones.cf32"), measuring.two_tones(4.0, 250.3, cubic=0.01))
        result = self.measure("--from", "tones.cf32", "--rate", 48000, "--two-tone")
        # 3/4 k a^2 over the tone
        self.assertAlmostEqual(result["third_order_db"], 20 * numpy.log10(0.75 * 0.01 * 0.25**2), delta=0.2)
        self.assertLess(result["second_order_db"], -100)
        self.assertAlmostEqual(result["peak_to_mean_db"], 6.02, delta=0.05)

    def test_what_is_no_signal_ends_with_status_3_and_its_powers(self):
        time = numpy.arange(5 * 48000) / 48000
        inputs = {"noise": measuring.noise(5.0), "carrier": 0.3 * numpy.exp(2j * numpy.pi * 137 * time)}
        for name, samples in inputs.items():
            measuring.write_cf32(self.path(f"{name}.cf32"), samples)
            done = self.run_program("mb-measure", "--from", f"{name}.cf32", "--rate", 48000)
            self.assertEqual(done.status, 3, done)
            self.assertRegex(done.errors, r"^mb-measure: no suppressed-carrier signal within 1000 Hz .*\n$")
            self.assertIn("mean power", done.out)
            self.assertNotIn("balance", done.out)
            result = self.measure("--from", f"{name}.cf32", "--rate", 48000, status=3)
            self.assertEqual(list(result), FIELDS)
            self.assertFalse(result["signal_found"])
            self.assertIsNone(result["carrier_offset_hz"])
            self.assertAlmostEqual(result["mean_power_dbfs"], 10 * numpy.log10(numpy.mean(numpy.abs(samples)**2)),
                                   delta=0.01)

    def test_the_picture_and_the_page_hold_what_they_say(self):
        self.emission(6.0)
        self.succeed("mb-measure", "--from", "air.ci16", "--rate", 48000, "--picture", "air.svg", "--report",
                     "air.html")
        with open(self.path("air.svg"), encoding="utf-8") as file:
            picture = file.read()
        for text in "Upper sideband and mirrored lower sideband", "Phase line", "Carrier offset", "air.ci16":
            self.assertIn(text, picture)
        with open(self.path("air.html"), encoding="utf-8") as file:
            page = file.read()
        for text in "<svg", "</svg>", "carrier suppression", "sideband", "</html>":
            self.assertIn(text, page)
        self.assertIsNone(re.search(r"(src|href)=\"http", page))
        self.succeed("mb-measure", "--from", "air.ci16", "--rate", 48000, "--report", "again.html")
        self.assertEqual(self.names(), ["again.html", "air.ci16", "air.html", "air.svg", "report.wav"])

    def test_a_pipe_gives_the_same_as_the_file(self):
        self.emission(5.0)
        direct = self.measure("--from", "air.ci16", "--rate", 48000)
        with open(self.path("air.ci16"), "rb") as file:
            piped = self.measure("--from", "-", "--rate", 48000, "--format", "ci16", stdin=file)
        self.assertEqual({**direct, "iq": "-"}, piped)

    def test_sigmf_tells_its_rate_and_radio_frequency(self):
        self.emission(5.0)
        self.succeed("mb-channel", "--from", "air.ci16", "--rate", 48000, "--to", "heard.sigmf-meta", "--quiet")
        self.assertEqual(self.measure("--from", "heard.sigmf-meta")["rate_hz"], 48000)

    def test_memory_does_not_grow_with_the_recording(self):
        if os.environ.get("ASAN_OPTIONS"):
            self.skipTest("a sanitizer needs memory of its own")
        self.emission(5.0, 240000)
        with open(self.path("air.ci16"), "rb") as file:
            once = file.read()
        peaks = []
        for times in 1, 6:
            with open(self.path("long.ci16"), "wb") as file:
                file.write(once * times)
            script = ("import resource,subprocess,sys;subprocess.run(sys.argv[1:],stdout=subprocess.DEVNULL);"
                      "print(resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss)")
            done = subprocess.run(["python3", "-c", script, *measuring.programs.command(
                "mb-measure", "--from", self.path("long.ci16"), "--rate", 240000)], capture_output=True, check=True,
                timeout=120)
            peaks.append(int(done.stdout))
        self.assertLess(peaks[1] - peaks[0], 4096)  # kB; the track grows by 40 MB an hour, 0.3 MB here


if __name__ == "__main__":
    measuring.main()
