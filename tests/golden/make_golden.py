#!/usr/bin/env python3
"""Independent integrations of four stations' equations, written as CSV beside this file.

Needs numpy 2.4 and scipy 1.17 (made with numpy 2.4.6, scipy 1.17.1, Python 3.11).

Each case states its equations and its rest point and is integrated from rest by three methods of different
families: DOP853 (explicit Runge-Kutta of order 8, rtol 1e-13), whose values are written, against LSODA (multistep)
and Radau IIA (implicit Runge-Kutta), rtol 1e-12. The differences are printed and stand in each file's head.
"""

import math
import pathlib
import sys
from dataclasses import dataclass
from typing import Callable

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq
from scipy.special import wrightomega

HERE = pathlib.Path(__file__).resolve().parent
RATE = 384_000.0
ROWS = 1153  # 0 to 3.0 ms
BOLTZMANN = 1.380649e-23
CHARGE = 1.602176634e-19
TEMPERATURE = 293.15
V_T = BOLTZMANN * TEMPERATURE / CHARGE
START = 0.5e-3  # length of the smooth start, s
TWO_PI = 2.0 * math.pi


def ramp(t):
    """Smooth start: (1 − cos(π t/0.5 ms))/2 up to 0.5 ms, 1 after it."""
    return 0.5 - 0.5 * math.cos(math.pi * t / START) if t < START else 1.0


def tones(t, *parts):
    """Sum of level·sin(2π f t) over (level, f), under the smooth start."""
    return ramp(t) * sum(level * math.sin(TWO_PI * f * t) for level, f in parts)


@dataclass
class Case:
    name: str
    head: list[str]
    columns: list[str]
    drive: Callable  # t -> input
    slope: Callable  # (t, state) -> state's rate
    rest: list[float]
    scale: list[float]  # size of each state, for the absolute tolerance
    outputs: Callable  # (t, state) -> columns after the input


def integrate(case, method, rtol):
    """States at every sample time; split where the smooth start ends, so that no step straddles its kink."""
    times = np.arange(ROWS) / RATE
    state = np.array(case.rest)
    pieces = []
    for first, last in ((0, round(START * RATE)), (round(START * RATE), ROWS - 1)):
        run = solve_ivp(
            case.slope, (times[first], times[last]), state, method=method, t_eval=times[first: last + 1],
            rtol=rtol, atol=rtol * 1e-2 * np.array(case.scale), max_step=0.25 / RATE,
        )
        if not run.success:
            raise RuntimeError(f"{case.name}, {method}: {run.message}")
        pieces.append(run.y if last == ROWS - 1 else run.y[:, :-1])
        state = run.y[:, -1]
    return times, np.hstack(pieces)


def rows(case, method, rtol):
    times, states = integrate(case, method, rtol)
    return times, np.array([case.outputs(t, y) for t, y in zip(times, states.T)])


def make(case):
    at_rest = np.max(np.abs(np.array(case.slope(0.0, case.rest)) * 1e-3 / np.array(case.scale)))
    assert at_rest < 1e-9, f"{case.name} does not start at rest: {at_rest}"
    times, best = rows(case, "DOP853", 1e-13)
    swing = np.max(np.abs(best - best[0]), axis=0)
    apart = {}
    for method, rtol in (("LSODA", 1e-12), ("Radau", 1e-12)):
        apart[method] = np.max(np.abs(rows(case, method, rtol)[1] - best), axis=0) / swing
    names = case.columns[2:]
    print(f"\n{case.name}")
    for i, name in enumerate(names):
        print(
            f"  {name}: rest {best[0, i]:.9g}, min {best[:, i].min():.9g}, max {best[:, i].max():.9g};"
            f" apart from LSODA {apart['LSODA'][i]:.1e}, from Radau {apart['Radau'][i]:.1e} of the largest swing"
        )
    head = [
        f"Source: {pathlib.Path(sys.argv[0]).name} beside this file (scipy solve_ivp); SI units; T = 293.15 K, V_T = kT/q",
        *case.head,
        "Smooth start: s(t) = (1 - cos(pi t/0.5 ms))/2 up to 0.5 ms, 1 after it. Times t = n/384000 s, every n",
        "Solver: DOP853, rtol 1e-13, atol 1e-15 of each state's size, step at most 1/4 sample. Largest difference from LSODA and",
        "Radau (rtol 1e-12) over the file, as a part of the column's largest swing from rest, rounded up to a power of ten: "
        + ", ".join(f"{name} {ceil(apart['LSODA'][i])} and {ceil(apart['Radau'][i])}" for i, name in enumerate(names)),
        "Rest: " + ", ".join(f"{name} = {best[0, i]:.17g}" for i, name in enumerate(names)),
    ]
    with open(HERE / f"{case.name}.csv", "w", encoding="ascii", newline="\n") as out:
        out.writelines(f"# {line}\n" for line in head)
        out.write(",".join(case.columns) + "\n")
        for t, values in zip(times, best):
            out.write(",".join(f"{x:.17g}" for x in (t, case.drive(t), *values)) + "\n")


def ceil(x):
    """The power of ten at or above x."""
    return f"1e{math.ceil(math.log10(x)):03d}" if x > 0.0 else "0"


def led(name, low, high):
    supply, r, r_source, r_s, n, i_s = 5.0, 180.0, 20.0, 1.0, 1.8, 1e-12
    flux, at, i_low, droop = 12e-3, 50e-3, 1e-3, 0.4
    kappa, k_t, r_th, tau, f_c = -1.6e-3, -0.005, 350.0, 2e-3, 200e3
    n_vt, total = n * V_T, r + r_source + r_s

    def shape(i):
        return i * (i / (i + i_low)) / (1.0 + i / droop)

    eta = flux / shape(at)

    def current(volts):
        """Root of volts = i·total + n·V_T·ln(1 + i/I_s), by the Wright omega function."""
        z = math.log(i_s * total / n_vt) + (volts + i_s * total) / n_vt
        return n_vt / total * float(wrightomega(z)) - i_s

    for volts in (0.3, 1.0, 5.0, 9.5):
        i = current(volts)
        assert abs(i * total + n_vt * math.log1p(i / i_s) - volts) < 1e-11

    # At rest V_f carries no temperature term, and the law is linear in ΔT.
    i0 = current(supply)
    heat0 = (n_vt * math.log1p(i0 / i_s) + i0 * r_s) * i0
    dt0 = r_th * (heat0 - eta * shape(i0)) / (1.0 + r_th * eta * shape(i0) * k_t)
    p0 = eta * shape(i0) * (1.0 + k_t * dt0)

    def drive(t):
        return tones(t, (low, 1000.0), (high, 3700.0))

    def laws(t, rise):
        i = current(supply + drive(t) - kappa * (rise - dt0))
        v_f = n_vt * math.log1p(i / i_s) + i * r_s + kappa * (rise - dt0)
        return i, v_f, eta * shape(i) * (1.0 + k_t * rise)

    def slope(t, y):
        i, v_f, p = laws(t, y[0])
        return [(r_th * (v_f * i - p) - y[0]) / tau, TWO_PI * f_c * (p - y[1])]

    head = [
        "LED with a series resistor; state dT (junction's rise over ambient) and P (emitted flux)",
        "supply + v(t) = i (R + R_source + R_s) + n V_T ln(1 + i/I_s) + kappa (dT - dT_rest)",
        "P_static = eta i (i/(i + I_low)) / (1 + i/I_droop) (1 + k_T dT), eta such that P_static(at_current) = flux at dT = 0",
        "tau d(dT)/dt = R_th (V_f i - P_static) - dT, V_f = n V_T ln(1 + i/I_s) + i R_s + kappa (dT - dT_rest)",
        "dP/dt = 2 pi f_c (P_static - P)",
        "supply 5 V, R 180, R_source 20, R_s 1 ohm, n 1.8, I_s 1e-12 A, flux 12e-3 W at 50e-3 A, I_low 1e-3 A, I_droop 0.4 A,",
        "kappa -1.6e-3 V/K, k_T -0.005 1/K, R_th 350 K/W, tau 2e-3 s, f_c 200e3 Hz; eta = %.17g W/A" % eta,
        f"v(t) = s(t) ({low} sin(2 pi 1000 t) + {high} sin(2 pi 3700 t)) V",
    ]
    return Case(
        name, head, ["t_s", "v_V", "i_A", "dT_K", "P_W"], drive, slope, [dt0, p0], [10.0, 5e-3],
        lambda t, y: [laws(t, y[0])[0], y[0], y[1]],
    )


def photodiode(name, bias, swing):
    v_s, r_l, r_n, c_c, c_load = 5.0, 1e6, 470e3, 10e-9, 5e-12
    c_0, phi, m, i_d, i_s, n, r_sh = 70e-12, 0.6, 0.45, 2e-9, 1e-10, 1.2, 1e9
    n_vt = n * V_T

    def capacitance(v_r):
        if v_r >= -phi / 2:
            return c_0 / (1.0 + v_r / phi) ** m
        return c_0 * 2.0**m * (1.0 - 2.0 * m / phi * (v_r + phi / 2))

    def drive(t):
        return bias + tones(t, (0.7 * swing, 1000.0), (0.3 * swing, 5200.0))

    def into_node(i_ph, v):
        """Current the diode delivers into the node, capacitance apart."""
        v_r = v_s - v
        dark = -i_d * math.expm1(-v_r / n_vt) if v_r > 0.0 else 0.0
        return i_ph + dark - i_s * math.expm1(-v_r / n_vt) + v_r / r_sh

    rest = brentq(lambda v: into_node(bias, v) - v / r_l, 0.0, v_s + 1.0, xtol=1e-15, rtol=1e-15)

    def slope(t, y):
        v, v_c = y
        branch = (v - v_c) / r_n
        net = into_node(drive(t), v) - v / r_l - branch
        return [net / (c_load + capacitance(v_s - v)), branch / c_c]

    head = [
        "Reverse-biased photodiode (cathode at V_s) into a load, the next stage behind a coupling capacitor; states v and v_c",
        "(C_load + C_j(V_R)) dv/dt = i_ph + i_dark(V_R) - I_s (exp(-V_R/(n V_T)) - 1) + V_R/R_sh - v/R_L - (v - v_c)/R_n",
        "C_c dv_c/dt = (v - v_c)/R_n, V_R = V_s - v; i_dark = I_d (1 - exp(-V_R/(n V_T))) for V_R > 0, else 0",
        "C_j(V) = C0/(1 + V/phi)^m for V >= -phi/2, below it the straight line of the same value and slope there",
        "V_s 5 V, R_L 1e6, R_n 470e3 ohm, C_c 10e-9, C_load 5e-12, C0 70e-12 F, phi 0.6 V, m 0.45, I_d 2e-9, I_s 1e-10 A, n 1.2,",
        "R_sh 1e9 ohm",
        f"i_ph(t) = {bias:g} + {swing:g} s(t) (0.7 sin(2 pi 1000 t) + 0.3 sin(2 pi 5200 t)) A",
        "v_n_V is the voltage across R_n, v - v_c",
    ]
    return Case(
        name, head, ["t_s", "i_ph_A", "v_V", "v_n_V"], drive, slope, [rest, rest], [1.0, 1.0],
        lambda _, y: [y[0], y[0] - y[1]],
    )


def tanh_slew(u, gbw, slew):
    """Input pair's law with V_L = slew/(2π·GBW): clamp(2π·GBW·V_L·tanh(u/V_L), ±slew)."""
    v_l = slew / (TWO_PI * gbw)
    return max(-slew, min(slew, TWO_PI * gbw * v_l * math.tanh(u / v_l)))


def transimpedance(name, r_f, c_t, c_f, gbw, slew, parts):
    bias = 10e-6

    def drive(t):
        return bias + tones(t, *parts)

    def input_node(y):
        return (y[0] + c_f * y[1]) / (c_t + c_f)

    def slope(t, y):
        x = input_node(y)
        return [-(drive(t) + (x - y[1]) / r_f), tanh_slew(-x, gbw, slew)]

    rest = bias * r_f
    text = " + ".join(f"{level:g} sin(2 pi {f:g} t)" for level, f in parts)
    head = [
        "Transimpedance amplifier: x inverting input, y output, both from the reference; states q and y; x = (q + C_f y)/(C_t + C_f)",
        "dq/dt = -(i_ph(t) + (x - y)/R_f), q = (C_t + C_f) x - C_f y; dy/dt = S(-x)",
        "S(u) = clamp(2 pi GBW V_L tanh(u/V_L), +-slew), V_L = slew/(2 pi GBW)",
        f"R_f {r_f:g} ohm, C_t {c_t:g}, C_f {c_f:g} F, GBW {gbw:g} Hz, slew {slew:g} V/s",
        f"i_ph(t) = {bias:g} + s(t) ({text}) A",
    ]
    return Case(
        name, head, ["t_s", "i_ph_A", "x_V", "y_V"], drive, slope, [-c_f * rest, rest], [c_t * 1e-2, 1.0],
        lambda _, y: [input_node(y), y[1]],
    )


def opamp(name, level):
    beta, gbw, slew = 1.0 / 11.0, 1e6, 0.5e6

    def drive(t):
        return tones(t, (level, 15_000.0))

    head = [
        "Non-inverting op-amp stage, output's deviation from rest: dv/dt = clamp(2 pi GBW V_L tanh(u/V_L), +-slew)",
        "u = x(t) - beta v, V_L = slew/(2 pi GBW); beta 1/11, GBW 1e6 Hz, slew 0.5e6 V/s",
        f"x(t) = s(t) {level} sin(2 pi 15000 t) V",
    ]
    return Case(
        name, head, ["t_s", "x_V", "v_V"], drive,
        lambda t, y: [tanh_slew(drive(t) - beta * y[0], gbw, slew)], [0.0], [1.0], lambda _, y: [y[0]],
    )


def cases():
    linear = [(0.6 * 6e-6, 1000.0), (0.4 * 6e-6, 17_000.0)]
    return [
        led("led_resistor", 1.0, 1.2),
        led("led_resistor_cutoff", 2.06, 2.44),
        photodiode("photodiode_load", 4.2e-6, 3.8e-6),
        photodiode("photodiode_load_gentle", 2e-6, 0.5e-6),
        transimpedance("transimpedance", 100e3, 100e-12, 2e-12, 5e6, 8e6, linear),
        transimpedance("transimpedance_slew", 220e3, 120e-12, 3e-12, 1e6, 0.05e6, [(9e-6, 9000.0)]),
        opamp("opamp_stage", 0.35),
        opamp("opamp_stage_slew", 0.6),
    ]


if __name__ == "__main__":
    for each in cases():
        make(each)
