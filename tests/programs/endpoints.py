"""Every kind of file an endpoint may name, and what it stores."""

import json
import subprocess

import numpy

import programs


class Endpoints(programs.Case):
    def setUp(self):
        super().setUp()
        self.message = programs.voice(5.0)
        programs.write_wave(self.path("report.wav"), self.message)

    def receive(self, source, *more):
        done = self.succeed("mb-receive", "--from", source, "--to", "heard.wav", "--look-ahead", "all", "--json",
                            *more)
        return json.loads(done.out)

    def test_every_kind_of_iq_file_is_written_and_received(self):
        raw = ("--rate", "48000")
        for name, size, stored, more in (("air.sigmf-meta", None, (), ()),
                                         ("short.sigmf-meta", None, ("--format", "ci16"), ()),
                                         ("air.wav", 8, (), ()), ("short.wav", 4, ("--format", "ci16"), ()),
                                         ("air.rf64", 8, (), ()), ("air.cf32", 8, (), raw),
                                         ("air.ci16", 4, (), raw), ("air.ci8", 2, (), raw),
                                         ("air.cu8", 2, (), raw)):
            with self.subTest(name=name):
                self.succeed("mb-transmit", "--from", "report.wav", "--to", name, *raw, *stored, "--offset", "200Hz")
                self.assertIn(name, self.names())
                if size is not None:
                    with open(self.path(name), "rb") as file:
                        self.assertLess(abs(len(file.read()) - size * 5 * 48000), 200)
                result = self.receive(name, *more)
                self.assertAlmostEqual(result["carrier_offset_hz"], 200, delta=0.05)
                self.assertEqual(result["duration_s"], 5.0)

    def test_sigmf_stores_the_format_asked_for(self):
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.sigmf-meta", "--format", "ci16")
        meta = programs.read_json(self.path("air.sigmf-meta"))
        self.assertEqual(meta["global"]["core:datatype"], "ci16_le")
        self.assertEqual(meta["global"]["core:sample_rate"], 48000)
        self.assertEqual(meta["annotations"][0]["core:freq_upper_edge"], 2700)

    def test_the_centre_of_a_recording_is_kept(self):
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.sigmf-meta")
        meta = programs.read_json(self.path("air.sigmf-meta"))
        meta["captures"][0]["core:frequency"] = 7285000
        with open(self.path("air.sigmf-meta"), "w", encoding="utf-8") as file:
            json.dump(meta, file)
        self.succeed("mb-channel", "--from", "air.sigmf-meta", "--to", "heard.sigmf-meta", "--set",
                     "channel.offset=100 Hz")
        heard = programs.read_json(self.path("heard.sigmf-meta"))
        self.assertEqual(heard["captures"][0]["core:frequency"], 7285000)
        self.assertEqual(heard["annotations"][0]["core:freq_lower_edge"], 7285000 + 100 - 2700)

    def test_a_file_of_another_ending_is_read_with_a_format(self):
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.ci16", "--rate", "48000")
        subprocess.run(["mv", "air.ci16", "air.bin"], cwd=self.folder, check=True)
        self.assertTrue(self.receive("air.bin", "--format", "ci16", "--rate", "48000")["found"])

    def test_audio_of_any_rate_and_kind_is_transmitted(self):
        for name, rate in ("slow.flac", 8000), ("phone.wav", 16000), ("disc.flac", 44100), ("studio.wav", 96000):
            with self.subTest(name=name):
                subprocess.run(["sox", "-V1", "report.wav", "-r", str(rate), name], cwd=self.folder, check=True)
                done = self.succeed("mb-transmit", "--from", name, "--to", "air.cf32", "--rate", "48000", "--json")
                self.assertAlmostEqual(json.loads(done.out)["duration_s"], 5.0, delta=0.001)

    def test_one_channel_of_several_is_taken(self):
        two = numpy.stack([0 * self.message, self.message], axis=1)
        programs.write_wave(self.path("two.wav"), two)
        done = self.succeed("mb-transmit", "--from", "two.wav", "--to", "air.ci16")
        self.assertIn("mb-transmit: two.wav has 2 channels; the first is taken, --set audio.channel=2 takes another\n",
                      done.errors)
        self.assertIn("two.wav is silent", done.errors)
        done = self.succeed("mb-transmit", "--from", "two.wav", "--to", "air.ci16", "--set", "audio.channel=2")
        self.assertEqual(done.errors, "")
        self.refuse(2, "two.wav has 2 channels, no channel 3; choose one that is there", "mb-transmit", "--from", "two.wav", "--to",
                    "air.ci16", "--set", "audio.channel=3")

    def test_one_pair_of_several_is_received(self):
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.ci16", "--offset", "300Hz")
        air = programs.read_ci16(self.path("air.ci16"))
        programs.write_wave(self.path("two.wav"), numpy.stack([0 * air.real, 0 * air.real, air.real, air.imag], axis=1),
                            48000)
        self.refuse(2, "--iq-channel: two.wav has 2 I/Q channels; choose one of 1 to 2", "mb-receive", "--from",
                    "two.wav", "--to", "heard.wav")
        self.assertAlmostEqual(self.receive("two.wav", "--iq-channel", "2")["carrier_offset_hz"], 300, delta=0.05)

    def test_audio_is_written_at_the_rate_and_in_the_format_asked_for(self):
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.cf32", "--rate", "48000")
        self.succeed("mb-receive", "--from", "air.cf32", "--rate", "48000", "--to", "heard.wav", "--audio-rate",
                     "48kHz", "--look-ahead", "all")
        audio, rate = programs.read_wave(self.path("heard.wav"))
        self.assertEqual((len(audio), rate), (5 * 48000, 48000))
        # loud enough to hear at once, and never at the ceiling
        self.assertGreater(numpy.max(numpy.abs(audio)), 0.1)
        self.assertLess(numpy.max(numpy.abs(audio)), 0.99)
        for more, subformat in ((), b"Bit Width     : 24"), (("--audio-format", "f32"), b"IEEE_FLOAT"):
            self.succeed("mb-receive", "--from", "air.cf32", "--rate", "48000", "--to", "heard.wav", *more)
            kind = subprocess.run(["sndfile-info", "heard.wav"], cwd=self.folder, capture_output=True, check=True)
            self.assertIn(subformat, kind.stdout)
        self.succeed("mb-receive", "--from", "air.cf32", "--rate", "48000", "--to", "heard.flac", "--quiet")
        self.succeed("mb-receive", "--from", "air.cf32", "--rate", "48000", "--to", "heard.rf64", "--audio-format",
                     "f32")
        kind = subprocess.run(["sndfile-info", "heard.rf64"], cwd=self.folder, capture_output=True, check=True)
        self.assertIn(b"IEEE float", kind.stdout)
        self.succeed("mb-transmit", "--from", "heard.rf64", "--to", "again.cf32")


if __name__ == "__main__":
    programs.main()
