"""Every ready config carries a voice through all three programs."""

import glob
import json
import os

import programs

SECONDS = 15.0


class Configs(programs.Case):
    def test_every_ready_config_carries_a_voice(self):
        programs.write_wave(self.path("report.wav"), programs.voice(SECONDS))
        paths = sorted(glob.glob(os.path.join(programs.ROOT, "configs", "*.conf")))
        self.assertGreaterEqual(len(paths), 5)
        for path in paths:
            with self.subTest(config=os.path.basename(path)):
                more = ("--config", path, "--json")
                sent = json.loads(self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.sigmf-meta",
                                               *more).out)
                self.assertEqual(sent["clipped"], 0)
                impaired = json.loads(self.succeed("mb-channel", "--from", "air.sigmf-meta", "--to",
                                                   "heard.sigmf-meta", "--seed", "3", *more).out)
                heard = json.loads(self.succeed("mb-receive", "--from", "heard.sigmf-meta", "--to", "heard.wav",
                                                *more).out)
                middle_hz = 0.5 * (impaired["first_offset_hz"] + impaired["last_offset_hz"])
                # a Doppler spread of 0.5 Hz and a drift of 3 Hz over uneven speech move the mean
                self.assertAlmostEqual(heard["carrier_offset_hz"], middle_hz, delta=1.0)


if __name__ == "__main__":
    programs.main()
