"""Wrong command lines and configs: status 2, and every fault said."""

import programs


class BadConfig(programs.Case):
    def test_every_fault_of_a_config_is_said_at_once(self):
        with open(self.path("wrong.conf"), "w", encoding="utf-8") as file:
            file.write("[channel]\nofset = 137 Hz\ndrift = 5 s\nnoise = 200 dB\n")
        done = self.run_program("mb-channel", "--config", "wrong.conf", "--from", "air.ci16", "--to", "out.ci16",
                                "--set", "channel.paths=2")
        self.assertEqual(done.status, 2)
        lines = done.errors.splitlines()
        self.assertEqual(len(lines), 4, done)
        for line, words in zip(lines, (("wrong.conf:2:1", "channel.ofset", "channel.offset"),
                                       ("wrong.conf:3:", "channel.drift", "Hz/s"),
                                       ("wrong.conf:4:", "channel.noise", "100 dB"),
                                       ("--set", "channel.paths"))):
            for word in words:
                self.assertIn(word, line)

    def test_a_config_that_does_not_exist(self):
        self.refuse(2, "config file gone.conf cannot be read: No such file or directory", "mb-receive", "--config", "gone.conf", "--from",
                    "air.ci16", "--to", "out.wav")

    def test_a_quantity_may_be_written_with_or_without_a_blank(self):
        programs.write_wave(self.path("report.wav"), programs.voice(1.0))
        self.succeed("mb-transmit", "--from", "report.wav", "--to", "air.cf32", "--quiet")
        outputs = []
        for text in "channel.offset=137Hz", "channel.offset=137 Hz", "channel.offset = 0.137 kHz":
            self.succeed("mb-channel", "--from", "air.cf32", "--rate", "48kHz", "--to", "out.cf32", "--set", text)
            with open(self.path("out.cf32"), "rb") as file:
                outputs.append(file.read())
        self.assertEqual(outputs[0], outputs[1])
        self.assertEqual(outputs[0], outputs[2])

    def test_options_are_checked(self):
        self.refuse(2, "--from is missing: where the input comes from", "mb-transmit", "--to", "air.ci16")
        self.refuse(2, "--to is missing: where the output goes", "mb-receive", "--from", "air.ci16")
        self.refuse(2, "--seed: \"x\" must be a whole number from 0 to 18446744073709551615", "mb-channel", "--from",
                    "air.ci16", "--to", "out.ci16", "--seed", "x")
        self.refuse(2, "--from audio:mic: sound devices come with a later version; give a file, or - for a pipe",
                    "mb-transmit", "--from", "audio:mic", "--to", "air.ci16")
        for program in "mb-transmit", "mb-channel", "mb-receive":
            done = self.run_program(program, "--from", "a.wav", "--to", "b.wav", "--rate", "-5")
            self.assertEqual(done.status, 2)
            self.assertIn("--rate: \"-5\" is out of range", done.errors)

    def test_a_format_is_one_of_four_words(self):
        programs.write_wave(self.path("report.wav"), programs.voice(1.0))
        done = self.run_program("mb-transmit", "--from", "report.wav", "--to", "-", "--format", "cs16")
        self.assertEqual(done.status, 2)
        for word in "--format", "cs16", "cf32", "ci16", "ci8", "cu8":
            self.assertIn(word, done.errors)

    def test_options_of_the_receiver_are_keys_of_the_config(self):
        done = self.run_program("mb-receive", "--from", "air.ci16", "--to", "out.wav", "--look-ahead", "ever",
                                "--span", "1MHz")
        self.assertEqual(done.status, 2)
        self.assertIn("receive.look_ahead", done.errors)
        self.assertIn("receive.span", done.errors)

    def test_every_program_explains_itself(self):
        for program in "mb-transmit", "mb-channel", "mb-receive":
            done = self.succeed(program, "--help")
            self.assertIn(f"Usage: {program} --from ENDPOINT --to ENDPOINT", done.out)
            self.assertIn("channel.offset", self.succeed(program, "--set", "help").out)
            self.assertRegex(self.succeed(program, "--version").out, rf"^{program} \(Mirrorband\) \d")


if __name__ == "__main__":
    programs.main()
