"""Memory does not grow with the length of the input: ten minutes need less than 100 MiB."""

import re
import subprocess
import time

import numpy

import programs

MINUTES = 10
LIMIT_KIB = 100 * 1024
RAW = ("--rate", "48000", "--format", "ci16")


class Memory(programs.Case):
    def setUp(self):
        super().setUp()
        minute = programs.voice(60.0)
        programs.write_wave(self.path("report.wav"), numpy.tile(minute, MINUTES))

    def peak_kib(self, *line, stdin=None):
        """Largest resident memory of a program that must succeed, looked up while it runs."""
        peak = 0
        with subprocess.Popen(programs.command(*line, "--quiet"), cwd=self.folder, stdin=stdin,
                              stdout=subprocess.DEVNULL) as running:
            while running.poll() is None:
                with open(f"/proc/{running.pid}/status", encoding="utf-8") as file:
                    found = re.search(r"VmHWM:\s*(\d+) kB", file.read())
                peak = int(found.group(1)) if found else peak
                time.sleep(0.01)
        self.assertEqual(running.returncode, 0)
        return peak

    def test_ten_minutes_through_every_program(self):
        lines = (["mb-transmit", "--from", "report.wav", "--to", "air.ci16", "--rate", "48000"],
                 ["mb-channel", "--from", "air.ci16", "--rate", "48000", "--to", "heard.ci16", "--truth", "truth.csv",
                  "--set", "channel.noise=20 dB", "--set", "channel.gain=-10 dB"],
                 ["mb-receive", "--from", "heard.ci16", "--rate", "48000", "--to", "heard.wav", "--track",
                  "track.csv"])
        for line in lines:
            with self.subTest(line=line):
                peak = self.peak_kib(*line)
                print(line[0], peak, "KiB")
                self.assertLess(peak, LIMIT_KIB)
                self.assertGreater(peak, 1000)
        with open(self.path("heard.ci16"), "rb") as source, subprocess.Popen(["cat"], stdin=source,
                                                                             stdout=subprocess.PIPE) as pipe:
            peak = self.peak_kib("mb-receive", "--from", "-", *RAW, "--to", "heard.wav", "--look-ahead", "all",
                                 stdin=pipe.stdout)
            print("mb-receive through a pipe", peak, "KiB")
            self.assertLess(peak, LIMIT_KIB)


if __name__ == "__main__":
    programs.main()
