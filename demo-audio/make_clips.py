#!/usr/bin/env python3
"""Makes the demo clips beside this file: two short talks, a small piece of music and two test signals.

Needs numpy and scipy, and the speech synthesiser espeak-ng for the two talks. Made with espeak-ng 1.51,
numpy 2.4, scipy 1.17; every random number is seeded, so the same versions give the same files.
"""

import io
import math
import pathlib
import subprocess
import wave

import numpy as np
from scipy import signal

HERE = pathlib.Path(__file__).resolve().parent
RATE = 48_000
# Triangular dither reaches one step either way; a peak this far down never reaches the ends of the 16-bit scale.
FULL_SCALE = 32_765


def decibels(level):
    return 10.0 ** (level / 20.0)


def fade(x, rate, start, end):
    """Raised-cosine fades of `start` and `end` seconds."""
    y = x.copy()
    n = round(start * rate)
    m = round(end * rate)
    y[:n] *= 0.5 - 0.5 * np.cos(np.pi * np.arange(n) / n)
    y[len(y) - m:] *= 0.5 + 0.5 * np.cos(np.pi * (np.arange(m) + 1) / m)
    return y


def to_peak(x, level=-1.0):
    return x * (decibels(level) / np.max(np.abs(x)))


def write(name, x, rate, seed):
    """16-bit PCM with triangular dither; digital silence stays digital silence."""
    rng = np.random.default_rng(seed)
    dither = rng.random(len(x)) - rng.random(len(x))
    steps = np.rint(FULL_SCALE * x + np.where(x == 0.0, 0.0, dither))
    assert np.max(np.abs(steps)) < 32_767, f"{name} clips"
    with wave.open(str(HERE / name), "wb") as out:
        out.setnchannels(1)
        out.setsampwidth(2)
        out.setframerate(rate)
        out.writeframes(steps.astype("<i2").tobytes())


def speak(text, voice, speed, pitch, rate):
    """One utterance at `rate`, without the synthesiser's leading and trailing silence."""
    command = ["espeak-ng", "-v", voice, "-s", str(speed), "-p", str(pitch), "--stdout", text]
    raw = subprocess.run(command, check=True, capture_output=True).stdout
    with wave.open(io.BytesIO(raw)) as talk:
        own_rate = talk.getframerate()
    # A streamed header does not know its length: take what follows the data chunk's mark.
    data = raw[raw.index(b"data") + 8:]
    x = np.frombuffer(data[: len(data) // 2 * 2], dtype="<i2") / 32_768.0
    # A long Kaiser filter: images of the synthesiser's band lie more than 90 dB down.
    common = math.gcd(rate, own_rate)
    up, down = rate // common, own_rate // common
    widest = max(up, down)
    taps = signal.firwin(2 * 48 * widest + 1, 0.94 / widest, window=("kaiser", 9.5))
    x = signal.resample_poly(x, up, down, window=taps)
    x = signal.sosfiltfilt(signal.butter(2, 70.0, "highpass", fs=rate, output="sos"), x)
    loud = np.flatnonzero(np.abs(x) > 0.01 * np.max(np.abs(x)))
    margin = round(0.03 * rate)
    x = x[max(loud[0] - margin, 0): loud[-1] + 2 * margin]
    return fade(x, rate, 0.01, 0.03)


def talk(utterances, gap, lead, voice, speed, pitch, rate):
    """The utterances with digital silence before, between and after."""
    parts = [np.zeros(round(lead * rate))]
    for i, text in enumerate(utterances):
        if i:
            parts.append(np.zeros(round(gap * rate)))
        parts.append(speak(text, voice, speed, pitch, rate))
    parts.append(np.zeros(round(lead * rate)))
    return np.concatenate(parts)


def dome_talkback():
    x = talk(
        [
            "Pier to platform. I am turning you to azimuth two one five.",
            "Keep behind the rail. The shutter opens on my count.",
        ],
        gap=1.2, lead=0.25, voice="en-gb+m3", speed=162, pitch=38, rate=RATE,
    )
    write("dome-talkback.wav", to_peak(x), RATE, seed=1)


def reading_desk():
    rate = 44_100
    x = talk(
        ["Desk four. The atlas you asked for lies open at the southern sky; please turn the plates by the edge."],
        gap=0.0, lead=0.15, voice="en-gb+f3", speed=172, pitch=52, rate=rate,
    )
    write("reading-desk.wav", to_peak(x), rate, seed=2)


def tone(pitch, length, partials):
    """Additive tone; `partials` lists (frequency ratio, level, decay time in seconds)."""
    t = np.arange(round(length * RATE)) / RATE
    base = 440.0 * 2.0 ** ((pitch - 69) / 12.0)
    x = np.zeros(len(t))
    for ratio, level, decay in partials:
        if ratio * base < 18_000.0:
            x += level * np.exp(-t / decay) * np.sin(2.0 * np.pi * ratio * base * t)
    return fade(x, RATE, 0.003, 0.05)


def string(position, brightness, decay, count):
    """Partials of a string plucked at a fraction `position` of its length; upper ones die sooner."""
    return [
        (k * math.sqrt(1.0 + 1e-4 * k * k), abs(math.sin(math.pi * k * position)) / k**brightness, decay / k**0.6)
        for k in range(1, count + 1)
    ]


PLUCK = string(0.21, 1.3, 0.9, 24)
BASS = string(0.15, 1.6, 1.1, 16)
# Ratios near those of a tuned bell: hum, prime, minor third, fifth, nominal and above (from memory).
BELL = [(0.5, 0.35, 1.6), (1.0, 0.6, 1.1), (1.2, 0.3, 0.8), (1.5, 0.2, 0.6), (2.0, 0.7, 0.7), (2.67, 0.25, 0.35), (4.1, 0.12, 0.2)]


def small_piece():
    """Four bars of four in D dorian at 120 to the minute: bass, spread chords, a plucked tune, a bell on each bar."""
    beat = 0.5
    length = 16 * beat
    x = np.zeros(round(length * RATE))

    def play(at, pitch, lasts, level, partials):
        start = round(at * beat * RATE)
        y = level * tone(pitch, min(lasts * beat, length - at * beat), partials)
        x[start: start + len(y)] += y

    tune = [
        (0, 74, 1.5), (1.5, 77, 0.5), (2, 81, 1), (3, 79, 1),
        (4, 83, 0.5), (4.5, 79, 0.5), (5, 74, 1), (6, 76, 1.5), (7.5, 72, 0.5),
        (8, 77, 1), (9, 81, 0.5), (9.5, 84, 0.5), (10, 83, 1.5), (11.5, 79, 0.5),
        (12, 81, 0.75), (12.75, 79, 0.25), (13, 76, 0.5), (13.5, 77, 0.5), (14, 74, 2),
    ]
    bars = [(38, (57, 62, 65)), (43, (55, 59, 62)), (41, (57, 60, 65)), (38, (57, 62, 69))]
    for at, pitch, lasts in tune:
        play(at, pitch, lasts + 1.5, 0.55, PLUCK)
    for bar, (root, chord) in enumerate(bars):
        for half in (0, 2):
            play(4 * bar + half, root + (7 if half else 0), 3, 0.8, BASS)
            for i, pitch in enumerate(chord):
                play(4 * bar + half + 1 + 0.06 * i, pitch, 2.5, 0.3, PLUCK)
        play(4 * bar, chord[-1] + 24, 5, 0.16, BELL)
    write("small-piece.wav", to_peak(fade(x, RATE, 0.001, 0.4)), RATE, seed=3)


def staircase():
    """1 kHz in eleven level steps of 6 dB; each step holds whole cycles and has its own 5 ms fades."""
    t = np.arange(round(0.5 * RATE)) / RATE
    step = fade(np.sin(2.0 * np.pi * 1000.0 * t), RATE, 0.005, 0.005)
    x = np.concatenate([decibels(-6.0 * i) * step for i in range(11)])
    write("staircase.wav", x, RATE, seed=4)


def sweep():
    """Exponential sine sweep, phase 2π·f1·L·(e^(t/L) − 1) with L = T/ln(f2/f1)."""
    length, low, high = 6.0, 20.0, 20_000.0
    t = np.arange(round(length * RATE)) / RATE
    scale = length / math.log(high / low)
    x = np.sin(2.0 * np.pi * low * scale * np.expm1(t / scale))
    write("sweep.wav", decibels(-6.0) * fade(x, RATE, 0.05, 0.01), RATE, seed=5)


if __name__ == "__main__":
    dome_talkback()
    reading_desk()
    small_piece()
    staircase()
    sweep()
