"""An interrupt in the middle leaves a valid output of what was done so far."""

import fcntl
import os
import signal
import subprocess
import termios
import time

import numpy

import programs

FEED_S = 3.0


class Interrupts(programs.Case):
    def wait_until_idle(self, running):
        """Until the pipe is empty and the program has slept for ten looks at it."""
        idle = 0
        while idle < 10:
            left = fcntl.ioctl(running.stdin.fileno(), termios.FIONREAD, bytes(4))
            with open(f"/proc/{running.pid}/stat", encoding="utf-8") as file:
                sleeping = file.read().rsplit(")", 1)[1].split()[0] == "S"
            idle = idle + 1 if sleeping and not any(left) else 0
            time.sleep(0.01)

    def interrupt(self, content, *line, number=signal.SIGINT):
        """Feeds a program through a pipe that stays open, and interrupts it when it has taken everything."""
        with subprocess.Popen(programs.command(*line), cwd=self.folder, stdin=subprocess.PIPE,
                              stdout=subprocess.PIPE, stderr=subprocess.PIPE) as running:
            running.stdin.write(content)
            running.stdin.flush()
            self.wait_until_idle(running)
            running.send_signal(number)
            errors = running.stderr.read().decode()
            status = running.wait(60)
            running.stdin.close()
        return status, errors

    def samples(self):
        """Three seconds of a signal that a receiver locks to, cf32 at 48 kHz."""
        programs.write_wave(self.path("report.wav"), programs.voice(FEED_S))
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.cf32", "--rate", "48000", "--quiet")
        with open(self.path("air.cf32"), "rb") as file:
            return file.read()

    def test_a_transmission_is_kept(self):
        audio = (programs.voice(FEED_S) * 32768).astype("<i2").tobytes()
        status, errors = self.interrupt(audio, "mb-transmit", "--from", "-", "--audio-rate", "8000",
                                        "--audio-format", "s16", "--to", "out.ci16", "--rate", "48000")
        self.assertEqual((status, errors),
                         (130, "mb-transmit: interrupted; what was written so far is valid\n"))
        # all but the delay of the chain and the last block
        self.assertGreater(len(programs.read_ci16(self.path("out.ci16"))), (FEED_S - 0.3) * 48000)
        self.assertEqual(self.names(), ["out.ci16"])

    def test_an_impaired_recording_is_kept_with_its_truth(self):
        status, _ = self.interrupt(self.samples(), "mb-channel", "--from", "-", "--rate", "48000", "--format", "cf32",
                                   "--to", "out.sigmf-meta", "--truth", "truth.csv", number=signal.SIGTERM)
        self.assertEqual(status, 128 + 15)
        kept = len(numpy.fromfile(self.path("out.sigmf-data"), "<c8"))
        self.assertGreater(kept, (FEED_S - 0.3) * 48000)
        meta = programs.read_json(self.path("out.sigmf-meta"))
        self.assertIn("interrupted", meta["global"]["core:description"])
        remarks, _, rows = programs.read_table(self.path("truth.csv"))
        self.assertEqual(len(rows), (kept + 479) // 480)
        self.assertIn("interrupted", remarks[-1])
        self.succeed("mb-receive", "--from", "out.sigmf-meta", "--to", "heard.wav", "--look-ahead", "all")

    def test_live_audio_is_kept_with_its_track(self):
        status, _ = self.interrupt(self.samples(), "mb-receive", "--from", "-", "--rate", "48000", "--format", "cf32",
                                   "--to", "out.wav", "--track", "track.csv")
        self.assertEqual(status, 130)
        audio, rate = programs.read_wave(self.path("out.wav"))
        self.assertGreater(len(audio), (FEED_S - 0.3) * rate)
        self.assertGreater(numpy.max(numpy.abs(audio)), 0.01)
        self.assertGreater(len(programs.read_table(self.path("track.csv"))[2]), (FEED_S - 0.3) * 100)

    def test_a_recording_that_is_still_being_listened_to_gives_nothing(self):
        content = self.samples()
        before = self.names()
        status, errors = self.interrupt(content, "mb-receive", "--from", "-", "--rate", "48000", "--format", "cf32",
                                        "--to", "out.wav", "--look-ahead", "all")
        self.assertEqual((status, errors),
                         (130, "mb-receive: interrupted before any audio was made; nothing was written\n"))
        self.assertEqual(self.names(), before)

    def test_what_stood_under_the_name_stays_when_a_program_fails(self):
        with open(self.path("out.ci16"), "wb") as file:
            file.write(b"kept")
        with open(self.path("odd.ci16"), "wb") as file:
            file.write(bytes(4003))
        with open(self.path("odd.ci16"), "rb") as source:
            done = self.run_program("mb-channel", "--from", "-", "--rate", "48000", "--format", "ci16", "--to",
                                    "out.ci16", stdin=source)
        self.assertEqual(done.status, 1, done)
        with open(self.path("out.ci16"), "rb") as file:
            self.assertEqual(file.read(), b"kept")
        self.assertEqual(self.names(), ["odd.ci16", "out.ci16"])


if __name__ == "__main__":
    programs.main()
