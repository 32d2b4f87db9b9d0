#!/usr/bin/python3
"""Reception against ideal detection, by the programs themselves, on voices that were not used while developing.

    /usr/bin/python3 tests/acceptance/reception.py --programs build/apps [--trials 20] [--snr 3,6,10,20,30]

Each trial: a message of one voice (utterances of 1.5 to 4 s between pauses of 0.3 to 3 s, 20 s in all) is sent by
mb-transmit at 48 kHz, impaired by mb-channel (offset uniform in +-1 kHz, random phase, drift +-0.2 Hz/s, noise),
received by mb-receive live and as a whole recording, and scored by mb-measure against ideal detection of the same
samples with the true phase. Yardsticks with --yardsticks: the Costas loop of mb-receive, the AM demodulator of
liquid-dsp (told the offset; build/tests/liquid_receiver), and one sideband alone.
Prints a table of median and worst loss, polarity changes and false locks, and ends with 1 if a target is missed.
"""
import argparse
import concurrent.futures
import glob
import json
import os
import subprocess
import sys
import tempfile

import numpy as np
from scipy import signal
from scipy.io import wavfile

RATE = 16000
DURATION_S = 20.0
ASTERISK = "/usr/share/asterisk/sounds/en_US_f_Allison/"
SPHINX = "/usr/share/pocketsphinx/test/data/"

# Voices while developing (not used here): demo-instruct and priv-callee-options of asterisk-core-sounds-en-wav,
# numbers.raw and something.raw of pocketsphinx-testdata, espeak-ng in en, de, fr, ru, cmn, sv.
RECORDED = (
    [ASTERISK + name + ".wav" for name in ("demo-congrats", "basic-pbx-ivr-main", "demo-echotest", "screen-callee-options")]
    + sorted(glob.glob(SPHINX + "librivox/*.wav"))
    + [SPHINX + "goforward.raw"]
    + ["/usr/share/sounds/alsa/*.wav"]
)
SPOKEN = (
    ("es+f3", 70, "En el refugio hay cuarenta centímetros de nieve nueva y el viento sopla del noroeste con fuerza."),
    ("it+m2", 20, "Al passo ci sono quaranta centimetri di neve fresca, vento forte da nord ovest, restiamo qui."),
    ("pl+f5", 95, "W schronisku leży czterdzieści centymetrów śniegu, wiatr jest silny i wieje z północy."),
    ("hi+m5", 5, "पहाड़ पर चालीस सेंटीमीटर बर्फ है और उत्तर से तेज़ हवा चल रही है, हम सुबह तक यहीं रुकेंगे।"),
    ("tr+m7", 45, "Sırtta kırk santimetre kar var, rüzgar kuzeybatıdan sert esiyor, sabaha kadar buradayız."),
    ("fi+f2", 60, "Harjanteella on neljäkymmentä senttiä lunta, tuuli puhaltaa lujaa luoteesta, jäämme tänne."),
)

# SNR in dB: (live median, live worst, recording median, recording worst) loss in dB
TARGETS = {
    30.0: (0.05, 0.15, 0.03, 0.1), 20.0: (0.05, 0.15, 0.03, 0.1), 10.0: (0.05, 0.15, 0.03, 0.1),
    6.0: (0.1, 0.3, 0.05, 0.1), 3.0: (0.2, 0.6, 0.05, 0.2),
}


def read_audio(path):
    if "*" in path:  # several short files are one voice
        return np.concatenate([read_audio(p) for p in sorted(glob.glob(path)) if "Noise" not in p])
    if path.endswith(".raw"):
        return np.fromfile(path, "<i2") / 32768.0
    rate, samples = wavfile.read(path)
    samples = samples.astype(float)
    if samples.ndim > 1:
        samples = samples[:, 0]
    step = np.gcd(rate, RATE)
    return signal.resample_poly(samples, RATE // step, rate // step)


def spoken(folder, index):
    voice, pitch, text = SPOKEN[index]
    path = os.path.join(folder, "spoken.wav")
    subprocess.run(["espeak-ng", "-v", voice, "-p", str(pitch), "-w", path, text], check=True,
                   stderr=subprocess.DEVNULL)
    return read_audio(path)


def voice_of(folder, random):
    index = int(random.integers(len(RECORDED) + len(SPOKEN)))
    if index < len(RECORDED):
        return os.path.basename(os.path.dirname(RECORDED[index]) if "*" in RECORDED[index] else RECORDED[index]), \
            read_audio(RECORDED[index])
    return "espeak-ng " + SPOKEN[index - len(RECORDED)][0], spoken(folder, index - len(RECORDED))


def trimmed(voice):
    """Without the silence at both ends and in long pauses, so that the pauses are those stated."""
    frame = RATE // 50
    count = len(voice) // frame
    power = np.mean(voice[: count * frame].reshape(count, frame) ** 2, axis=1)
    loud = power > 1e-4 * np.max(power)
    keep = np.zeros(count, bool)
    for k in np.flatnonzero(loud):
        keep[max(0, k - 10): k + 11] = True
    return voice[: count * frame].reshape(count, frame)[keep].ravel()


def message_of(folder, random):
    name, voice = voice_of(folder, random)
    voice = trimmed(voice)
    pieces, total, at = [], 0, int(random.integers(max(1, len(voice) - 4 * RATE)))
    while total < DURATION_S * RATE:
        length = int(random.uniform(1.5, 4.0) * RATE)
        piece = voice[at: at + length]
        at = at + length if at + length < len(voice) else 0
        pause = np.zeros(int(random.uniform(0.3, 3.0) * RATE))
        pieces += [piece, pause]
        total += len(piece) + len(pause)
    message = np.concatenate(pieces)[: int(DURATION_S * RATE)]
    return name, message / np.max(np.abs(message))


def run(*command):
    done = subprocess.run(command, capture_output=True, text=True)
    if done.returncode not in (0, 3):
        raise RuntimeError(" ".join(command) + ": " + done.stderr)
    return done.returncode, done.stdout


def score_of(programs, folder, heard, skip):
    _, text = run(programs + "mb-measure", "--quiet", "--from", heard, "--message", folder + "/message.wav", "--truth",
                  folder + "/truth.csv", "--iq", folder + "/heard.cf32", "--rate", "48000", "--json", "--skip", skip,
                  "--set", "transmit.conditioning=off", "--set", "transmit.gain=-3 dB")
    score = json.loads(text)
    return {"loss_db": score["loss_db"], "polarity_changes": score["polarity_changes"]}


def receive_and_score(programs, folder, told_hz, name, options, skip):
    heard = os.path.join(folder, name + ".wav")
    if name == "liquid":
        run(programs + "../tests/liquid_receiver", folder + "/heard.cf32", str(told_hz), heard)
        return {**score_of(programs, folder, heard, skip), "offset_hz": float("nan")}
    status, text = run(programs + "mb-receive", "--quiet", "--from", folder + "/heard.cf32", "--rate", "48000", "--to",
                       heard, "--json", *options)
    if status == 3:
        return {"loss_db": float("inf"), "polarity_changes": 0, "offset_hz": float("nan")}
    offset = json.loads(text)["carrier_offset_hz"]
    return {**score_of(programs, folder, heard, skip), "offset_hz": offset}


RECEIVERS = {
    "live": ((), "1.5 s"),
    "recording": (("--look-ahead", "all"), "0 s"),
    "costas": (("--set", "receive.tracker=costas"), "1.5 s"),
    "liquid": ((), "1.5 s"),
    "one sideband": (("--look-ahead", "all", "--set", "receive.sideband=upper"), "0 s"),
}


def trial(arguments):
    programs, seed, snr_db, receivers = arguments
    random = np.random.default_rng([seed, int(10 * snr_db)])
    with tempfile.TemporaryDirectory() as folder:
        voice, message = message_of(folder, random)
        wavfile.write(folder + "/message.wav", RATE, (message * 32767).astype("<i2"))
        offset = random.uniform(-1000.0, 1000.0)
        drift = 0.2 * random.choice([-1, 1])
        run(programs + "mb-transmit", "--quiet", "--from", folder + "/message.wav", "--to", folder + "/air.cf32", "--rate",
            "48000", "--set", "transmit.conditioning=off", "--set", "transmit.gain=-3 dB")
        run(programs + "mb-channel", "--quiet", "--from", folder + "/air.cf32", "--rate", "48000", "--to",
            folder + "/heard.cf32", "--truth", folder + "/truth.csv", "--seed", str(seed + 1), "--set",
            f"channel.offset={offset:.3f} Hz", "--set", f"channel.drift={drift} Hz/s", "--set", f"channel.noise={snr_db} dB",
            "--set", "channel.phase=random")
        scores = {name: receive_and_score(programs, folder, offset, name.replace(" ", "-"), *RECEIVERS[name])
                  for name in receivers}
    centre = offset + 0.5 * drift * DURATION_S
    return {"seed": seed, "snr_db": snr_db, "voice": voice, "offset_hz": centre, "scores": scores}


def summary(results, name):
    losses = np.array([r["scores"][name]["loss_db"] for r in results])
    changes = sum(r["scores"][name]["polarity_changes"] for r in results)
    astray = 0 if name == "liquid" else sum(not abs(r["scores"][name]["offset_hz"] - r["offset_hz"]) < 5.0 for r in results)
    return float(np.median(losses)), float(np.max(losses)), changes, astray


def main():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--programs", default="build/apps", help="folder of the programs")
    parser.add_argument("--trials", type=int, default=20)
    parser.add_argument("--snr", default="3,6,10,20,30")
    parser.add_argument("--seed", type=int, default=1000)
    parser.add_argument("--jobs", type=int, default=os.cpu_count())
    parser.add_argument("--yardsticks", action="store_true", help="also the Costas loop and one sideband alone")
    parser.add_argument("--list", action="store_true", help="a line per trial")
    given = parser.parse_args()
    names = ["live", "recording"] + (["costas", "liquid", "one sideband"] if given.yardsticks else [])
    missed = 0
    print(f"{given.trials} trials a row, seeds from {given.seed}; loss in dB, median / worst")
    print(f"{'SNR dB':>6}  {'receiver':<14}{'loss':>17}{'target':>15}{'polarity':>10}{'astray':>8}")
    with concurrent.futures.ProcessPoolExecutor(given.jobs) as pool:
        for snr_db in (float(text) for text in given.snr.split(",")):
            work = [(given.programs.rstrip("/") + "/", given.seed + k, snr_db, names) for k in range(given.trials)]
            results = list(pool.map(trial, work))
            for place, name in enumerate(names):
                median, worst, changes, astray = summary(results, name)
                target = TARGETS.get(snr_db, (np.inf,) * 4)[2 * place: 2 * place + 2] if place < 2 else None
                good = target is None or (median <= target[0] and worst <= target[1] and changes + astray == 0)
                missed += not good
                wanted = f"{target[0]:g} / {target[1]:g}" if target else "-"
                print(f"{snr_db:6g}  {name:<14}{median:8.3f} /{worst:7.3f}{wanted:>15}{changes:10d}{astray:8d}"
                      f"{'' if good else '  MISSED'}", flush=True)
            if given.list:
                for r in results:
                    print("   ", r["seed"], r["voice"], {n: round(s["loss_db"], 3) for n, s in r["scores"].items()})
    return 1 if missed else 0


if __name__ == "__main__":
    sys.exit(main())
