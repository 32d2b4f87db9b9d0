"""The first contact of a new user: one command, a table, a picture; and it leaves files of others alone."""

import os
import re
import subprocess

import programs

SCRIPT = os.path.join(programs.ROOT, "apps", "first-contact")


class FirstContact(programs.Case):
    def contact(self, *arguments):
        environment = dict(os.environ, MIRRORBAND_PROGRAMS=programs.FOLDER)
        return programs.Done(subprocess.run(["sh", SCRIPT, *arguments], cwd=self.folder, capture_output=True,
                                            check=False, timeout=170, env=environment))

    def number(self, done, row, pattern):
        found = re.search(rf"^{row} +{pattern}", done.out, re.MULTILINE)
        self.assertIsNotNone(found, done)
        return float(found.group(1))

    def check_table(self, done):
        self.assertEqual(done.status, 0, done)
        # rms over the whole recording; the whole-recording table of the receiver is far tighter
        self.assertLess(self.number(done, "carrier offset", r".*off by ([\d.]+) Hz"), 0.2)
        # 15 dB and gentle fading: the median asked for is 0.03 dB on a steady path, the worst 0.1 dB
        self.assertLess(self.number(done, "loss against ideal", r"(-?[\d.]+) dB"), 0.2)
        self.assertEqual(self.number(done, "polarity changes", r"(\d+)"), 0)
        # the leak of the config; the moving gain of the conditioning leaves some power about 0 Hz that adds to it
        self.assertAlmostEqual(self.number(done, "carrier suppression", r"(-[\d.]+) dBc"), -40, delta=3.0)
        self.assertLess(self.number(done, "occupied bandwidth", r"(\d+) Hz"), 5400)
        for name in "heard.wav", "heard.svg":
            self.assertIn(f"snow-report/{name}", done.out)
            self.assertTrue(os.path.getsize(self.path(f"snow-report/{name}")) > 1000)

    def test_the_snow_report_is_heard(self):
        self.check_table(self.contact())
        audio, rate = programs.read_wave(self.path("snow-report/report.wav"))
        self.assertGreater(len(audio) / rate, 40)
        self.assertLess(len(audio) / rate, 65)

    def test_a_recording_of_ones_own_is_taken_twice(self):
        programs.write_wave(self.path("own.wav"), programs.voice(12.0))
        for _ in range(2):
            done = self.contact("own.wav")
            self.assertEqual(done.status, 0, done)
        self.assertEqual(self.number(done, "polarity changes", r"(\d+)"), 0)

    def test_a_folder_of_the_user_is_left_alone(self):
        os.mkdir(self.path("snow-report"))
        done = self.contact()
        self.assertEqual((done.status, done.errors),
                         (1, "first-contact: snow-report exists and is not of an earlier run; move it away or start "
                             "from another folder\n"))
        self.assertEqual(os.listdir(self.path("snow-report")), [])

    def test_a_recording_that_does_not_exist_is_said_so(self):
        done = self.contact("gone.wav")
        self.assertEqual((done.status, done.errors),
                         (1, "first-contact: gone.wav does not exist; give a recording of speech, .wav or .flac\n"))
        self.assertEqual(self.names(), [])


if __name__ == "__main__":
    programs.main()
