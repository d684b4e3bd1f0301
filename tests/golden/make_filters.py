#!/usr/bin/env python3
"""Responses of analogue filters by scipy.signal, and a class-B amplifier by scipy's integrators, written as CSV beside this file.

Needs numpy and scipy (made with numpy 2.4.6, scipy 1.17.1, Python 3.11). scipy's conventions are the program's: butter and
bessel(norm="mag") are 3.01 dB down at the corner, cheby1's corner is the end of the ripple band and its largest gain 1, the edges of
a band are an upper and a lower one whose geometric mean is the centre.
"""

import math
import pathlib

import numpy as np
from scipy import signal
from scipy.integrate import solve_ivp

HERE = pathlib.Path(__file__).resolve().parent
TWO_PI = 2.0 * math.pi
RIPPLE = 0.5


def filters():
    lines = []
    for family in ("butterworth", "bessel", "chebyshev"):
        for order in range(1, 9):
            for shape, corner, width in (
                ("low-pass", 3400.0, 0.0), ("high-pass", 300.0, 0.0),
                ("band-pass", 1000.0, 250.0), ("band-pass", 700.0, 2800.0),
                ("notch", 100.0, 20.0), ("notch", 1500.0, 3000.0),
            ):
                kind = {"low-pass": "lowpass", "high-pass": "highpass", "band-pass": "bandpass", "notch": "bandstop"}[shape]
                edges = corner
                if width:
                    upper = width / 2.0 + math.hypot(corner, width / 2.0)
                    edges = [upper - width, upper]
                edges = TWO_PI * np.array(edges)
                make = {
                    "butterworth": lambda: signal.butter(order, edges, kind, analog=True, output="zpk"),
                    "bessel": lambda: signal.bessel(order, edges, kind, analog=True, output="zpk", norm="mag"),
                    "chebyshev": lambda: signal.cheby1(order, RIPPLE, edges, kind, analog=True, output="zpk"),
                }[family]
                zeros, poles, gain = make()
                for ratio in (0.31, 0.8, 0.97, 1.0, 1.3, 3.7):
                    f = corner * ratio
                    s = 1j * TWO_PI * f
                    # Paired factors keep the products in range.
                    h = complex(gain)
                    for k in range(len(poles)):
                        h *= (s - zeros[k] if k < len(zeros) else 1.0) / (s - poles[k])
                    lines.append(f"{family},{order},{shape},{corner:g},{width:g},{f:.12g},{h.real:.15e},{h.imag:.15e}")
    with open(HERE / "filters.csv", "w", encoding="ascii", newline="\n") as out:
        out.write("# Source: make_filters.py beside this file (scipy.signal butter, bessel norm=mag, cheby1; analog=True); Hz\n")
        out.write(f"# Ripple of the Chebyshev filters {RIPPLE} dB; complex response at f\n")
        out.write("family,order,shape,corner,width,f,re,im\n")
        out.writelines(line + "\n" for line in lines)


def class_b():
    """dv/dt = clamp(2 pi GBW V_L tanh(u/V_L), +-slew), u = x - v/G; y = v - clamp(v, +-d)."""
    rate, rows, start = 384_000.0, 1153, 0.5e-3
    gain, gbw, slew, dead = 10.0 ** (20.0 / 20.0), 600e3, 0.4e6, 0.15
    linear = slew / (TWO_PI * gbw)

    def drive(t):
        ramp = 0.5 - 0.5 * math.cos(math.pi * t / start) if t < start else 1.0
        return ramp * (0.2 * math.sin(TWO_PI * 3000.0 * t) + 0.15 * math.sin(TWO_PI * 11000.0 * t))

    def slope(t, v):
        u = drive(t) - v[0] / gain
        return [min(max(TWO_PI * gbw * linear * math.tanh(u / linear), -slew), slew)]

    def run(method, rtol):
        times = np.arange(rows) / rate
        half = round(start * rate)
        first = solve_ivp(slope, (0.0, times[half]), [0.0], method=method, t_eval=times[: half + 1], rtol=rtol, atol=rtol * 1e-2, max_step=0.25 / rate)
        second = solve_ivp(slope, (times[half], times[-1]), first.y[:, -1], method=method, t_eval=times[half:], rtol=rtol, atol=rtol * 1e-2, max_step=0.25 / rate)
        return times, np.concatenate([first.y[0], second.y[0][1:]])

    times, v = run("DOP853", 1e-13)
    others = [np.max(np.abs(run(m, 1e-11)[1] - v)) for m in ("LSODA", "Radau")]
    print(f"class B: largest {np.max(np.abs(v)):.4f} V, apart {others}")
    y = v - np.clip(v, -dead, dead)
    with open(HERE / "class_b.csv", "w", encoding="ascii", newline="\n") as out:
        out.write("# Source: make_filters.py beside this file (scipy solve_ivp DOP853, rtol 1e-13; LSODA and Radau agree within 1e-8 V)\n")
        out.write("# Class-B amplifier: dv/dt = clamp(2 pi GBW V_L tanh(u/V_L), +-slew), u = x - v/G, y = v - clamp(v, +-d)\n")
        out.write("# G 10, GBW 600 kHz, slew 0.4 V/us, V_L = slew/(2 pi GBW), d 0.15 V; t = n/384000 s; V\n")
        out.write("t,x,y\n")
        out.writelines(f"{t:.17g},{drive(t):.17g},{a:.17g}\n" for t, a in zip(times, y))


if __name__ == "__main__":
    filters()
    class_b()
