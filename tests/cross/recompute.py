#!/usr/bin/env python3
"""Recomputes Harklight's figures from the WAV files it writes, with scipy alone, and compares.

    python3 tests/cross/recompute.py PATH-OF-HARKLIGHT

Nothing of Harklight's own arithmetic is used: programmes are made here, sent through `harklight render`, and what comes out is read
and analysed here. `measure` takes its figures from test signals of its own, with noises of another length, so agreement holds the
whole way against itself from outside: file, converters, stations, scale, meters. Every tolerance states its reason.

Needs numpy and scipy (`requirements.txt` beside this file). Exit code 1 where a check fails.
"""

import json
import math
import pathlib
import subprocess
import sys
import tempfile
import tomllib

import numpy as np
from scipy import optimize, signal
from scipy.io import wavfile

ROOT = pathlib.Path(__file__).resolve().parents[2]
RATE = 48_000
CONVERTERS = 0.01  # dB: ripple of the two rate converters well inside their pass band, with room for float32
failures = []


def check(name, here, there, tolerance, reason):
    """Compares; prints a line; notes a failure. NaN fails."""
    apart = abs(here - there)
    good = apart <= tolerance
    print(f"{'ok  ' if good else 'FAIL'} {name:<46} here {here:12.6g}  harklight {there:12.6g}  "
          f"apart {apart:.2g} of {tolerance:.2g}: {reason}")
    if not good:
        failures.append(name)


def decibels(ratio):
    return 20.0 * math.log10(ratio)


class Link:
    """A design, and the program that renders through it."""

    def __init__(self, program, design, *sets):
        self.program, self.design = program, ROOT / "configs" / design
        self.sets = [word for s in sets for word in ("--set", s)]
        self.text = tomllib.loads(self.design.read_text(encoding="utf-8"))
        document = self.run("measure", "--json", kept=True)
        self.document = json.loads(document)
        self.figures = self.document["figures"]
        self.test = self.document["test"]

    def run(self, command, *more, kept=False):
        words = [self.program, command, self.design, *self.sets, *more]
        done = subprocess.run(words, capture_output=True, check=False, text=True)
        if done.returncode not in (0, 1):
            raise SystemExit(f"{' '.join(map(str, words))}: exit code {done.returncode}\n{done.stderr}")
        return done.stdout if kept else None

    def render(self, samples, rate=RATE):
        """Volts at the output: full, clean, noise, distortion."""
        scale = volts(self.text["output"]["full_scale"])
        with tempfile.TemporaryDirectory() as folder:
            folder = pathlib.Path(folder)
            wavfile.write(folder / "sent.wav", rate, samples.astype(np.float32))
            self.run("render", "--input", folder / "sent.wav", "--output", folder / "out.wav", "--stems")
            names = ("out.wav", "out.clean.wav", "out.noise.wav", "out.distortion.wav")
            read = [wavfile.read(folder / name) for name in names]
        assert all(r == rate and len(x) == len(samples) for r, x in read)
        return [scale * x.astype(float) for _, x in read]


def volts(text):
    number, unit = text.split()
    return float(number) * {"V": 1.0, "mV": 1e-3}[unit]


def lines(record, rate):
    """Rms value of every spectral line of a record that holds whole periods."""
    spectrum = np.abs(np.fft.rfft(record)) / len(record) * math.sqrt(2.0)
    spectrum[0] = 0.0
    return spectrum, np.fft.rfftfreq(len(record), 1.0 / rate)


def a_weighting(frequency):
    """IEC 61672-1:2013, annex E, as an analogue filter: four zeros at 0, double poles at f1 and f4, single ones at f2 and f3."""
    turn = -2.0 * math.pi
    poles = [turn * f for f in (20.598997, 20.598997, 107.65265, 737.86223, 12194.217, 12194.217)]
    _, response = signal.freqs_zpk([0.0] * 4, poles, 1.0, 2.0 * math.pi * np.append(frequency, 1000.0))
    return np.abs(response[:-1] / response[-1])


def tone_figures(name, link):
    """THD, THD+N, gain and signal level from a second of a tone, whole periods of it, after the LED has warmed."""
    tone, (low, high) = link.test["tone_hz"], link.test["band_hz"]
    peak = 10.0 ** (link.test["level_db"] / 20.0)
    time = np.arange(3 * RATE) / RATE
    full, clean, _, distortion = link.render(peak * np.sin(2.0 * math.pi * tone * time))
    spectrum, frequency = lines((clean + distortion)[-RATE:], RATE)
    fundamental = spectrum[round(tone)]
    orders = np.arange(2, int(high / tone) + 1)
    thd = math.sqrt(np.sum(spectrum[np.rint(orders * tone).astype(int)] ** 2)) / fundamental
    figures = link.figures
    check(f"{name}: THD, %", 100.0 * thd, figures["thd_percent"], 2e-3 * figures["thd_percent"],
          "converters' ripple at the harmonics, 0.01 dB = 0.12 %")
    check(f"{name}: signal, V rms", fundamental, figures["signal_rms_v"], 1.2e-3 * fundamental, "converters' ripple, 0.01 dB")
    source = volts(link.text["source"]["full_scale"]) * peak / math.sqrt(2.0)
    check(f"{name}: gain, dB", decibels(fundamental / source), figures["gain_db"], CONVERTERS, "converters' ripple")
    spectrum, frequency = lines(full[-RATE:], RATE)
    inside = (frequency >= low) & (frequency <= high)
    rest = inside & (np.abs(frequency - tone) > 0.5)
    thd_n = math.sqrt(np.sum(spectrum[rest] ** 2) / np.sum(spectrum[inside] ** 2))
    check(f"{name}: THD+N, dB", decibels(thd_n), figures["thd_n_percent"] and decibels(figures["thd_n_percent"] / 100.0), 0.15,
          "two records' noise, each 0.05 dB of its part of the residue; 0.5 Hz round the tone against the meter's own window")
    return fundamental


def scatter(random, line_powers, line_bins, seconds):
    """Standard deviation, dB, of the level that a record of `seconds` reads: of its random density (bins 1 Hz wide), and of the beats
    between each line and the random noise beside it. A window as the meters use widens either by a factor of up to 2 in power."""
    total = np.sum(random) + np.sum(line_powers)
    power = np.sum(random**2) + 2.0 * np.sum(line_powers * random[line_bins])
    return 10.0 / math.log(10.0) * math.sqrt(2.0 * power / seconds) / total


def noise_figures(name, link, fundamental):
    """SNR, flat and A-weighted, and hum from ten seconds of silence."""
    low, high = link.test["band_hz"]
    seconds, mains = 10, 50
    idle, *_ = link.render(np.zeros((seconds + 1) * RATE))
    idle = idle[RATE:]
    frequency, density = signal.welch(idle, RATE, window="hann", nperseg=RATE, detrend="constant")
    # Lines of the lamps, from the whole record; under them the random density, from their surroundings.
    random = signal.medfilt(density, 41)
    spectrum, _ = lines(idle, RATE)
    multiples = np.arange(math.ceil(low / mains), int(high / mains) + 1) * mains
    powers = spectrum[multiples * seconds] ** 2
    strong = powers > 20.0 * random[multiples] / seconds
    powers, multiples = powers[strong], multiples[strong]

    figures = link.figures
    inside = np.flatnonzero((frequency >= low) & (frequency <= high))
    for key, weight in (("snr_db", np.ones(len(inside))), ("snr_a_db", a_weighting(frequency[inside]) ** 2)):
        noise = math.sqrt(np.sum(density[inside] * weight))
        at = np.searchsorted(inside, multiples)
        apart = [scatter(random[inside] * weight, powers * weight[at], at, t) for t in (1, seconds)]
        check(f"{name}: {key}", decibels(fundamental / noise), figures[key], 4.0 * math.hypot(*apart) + CONVERTERS,
              "four standard deviations of both records' random noise, theirs of 1 s and this one of 10 s")
    check(f"{name}: mains lines that are seen", float(len(powers) > 0), float(figures["hum_db"] is not None), 0.0,
          "hum is null where the lamps are steady, and only there")
    if len(powers) == 0:
        return
    beats = math.sqrt(2.0 * np.sum(powers * random[multiples]) / seconds) / np.sum(powers)
    check(f"{name}: hum_db", decibels(math.sqrt(np.sum(powers)) / fundamental), figures["hum_db"],
          4.0 * 10.0 / math.log(10.0) * beats + 0.02, "four standard deviations of the random noise under the lines; lines too weak to count")


def corners_of_dome(link):
    """The dome's low edge from its three coupling capacitors alone: 600 Ω + 47 kΩ, 47 kΩ, 10 kΩ (front-end and op-amp outputs are stiff)."""
    corners = [1.0 / (2.0 * math.pi * r * c) for r, c in ((47.6e3, 220e-9), (47e3, 22e-9), (10e3, 1e-6))]
    response = lambda f: math.prod(1.0 / math.hypot(1.0, corner / f) for corner in corners)
    edge = optimize.brentq(lambda f: response(f) - math.sqrt(0.5), 20.0, 2000.0)
    check("dome: low edge from R and C, Hz", edge, link.figures["band_low_hz"], 5e-3 * edge,
          "the greatest response lies 0.02 dB below the passive network's, at 3 dB an octave")


def sweep_response(name, link, edges):
    """Band edges from the demo sweep: its response through the straight link, line by line."""
    rate, sent = wavfile.read(ROOT / "demo-audio" / "sweep.wav")
    sent = sent / 32768.0
    _, clean, _, _ = link.render(np.concatenate([sent, np.zeros(rate)]), rate)
    padded = np.concatenate([sent, np.zeros(rate)])
    frequency = np.fft.rfftfreq(len(padded), 1.0 / rate)
    cross = np.fft.rfft(clean) * np.conj(np.fft.rfft(padded))
    power = np.abs(np.fft.rfft(padded)) ** 2
    grid = np.geomspace(30.0, 15e3, 800)
    response = np.empty(len(grid))
    for k, f in enumerate(grid):
        # A fiftieth of an octave either way takes out the sweep's own ripple.
        near = (frequency > f / 1.014) & (frequency < f * 1.014)
        response[k] = abs(np.sum(np.abs(cross[near]))) / np.sum(power[near])
    low, high = link.test["band_hz"]
    level = decibels_of(response / np.max(response[(grid >= low) & (grid <= high)])) + 3.0103
    top = int(np.argmax(level))
    for key in edges:
        side = slice(0, top + 1) if key == "band_low_hz" else slice(top, None)
        order = 1 if key == "band_low_hz" else -1
        edge = math.exp(np.interp(0.0, level[side][::order], np.log(grid[side])[::order]))
        check(f"{name}: {key} from the sweep", edge, link.figures[key], 5e-3 * edge,
              "0.02 dB of ripple and of the grid's smoothing, at 3 dB an octave")
    at_tone = np.interp(math.log(link.test["tone_hz"]), np.log(grid), response)
    scale = volts(link.text["source"]["full_scale"])
    gentle = Link(link.program, link.design.name, "measure.level=-60 dB")
    check(f"{name}: small-signal gain from the sweep, dB", decibels(at_tone / scale), gentle.figures["gain_db"], 0.03,
          "ripple and the grid's smoothing, against a tone too weak to be compressed")


def decibels_of(ratios):
    return 20.0 * np.log10(ratios)


def main(program):
    for name, design, edges in (
        ("dome", "dome-talkback.toml", ["band_low_hz"]),
        ("hurried", "dome-talkback-hurried.toml", ["band_low_hz", "band_high_hz"]),
    ):
        link = Link(program, design)
        fundamental = tone_figures(name, link)
        noise_figures(name, link, fundamental)
        # Without the lamps' flicker only random noise is left, and its figures are not ruled by hum.
        steady = Link(program, design, "ambient.2.ripple=0 %")
        noise_figures(f"{name}, steady lamps", steady, fundamental)
        sweep_response(name, link, edges)
        if name == "dome":
            corners_of_dome(link)
    if failures:
        print(f"{len(failures)} failed: {', '.join(failures)}")
    return 1 if failures else 0


if __name__ == "__main__":
    if len(sys.argv) != 2:
        raise SystemExit(__doc__)
    sys.exit(main(pathlib.Path(sys.argv[1]).resolve()))
