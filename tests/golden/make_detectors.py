#!/usr/bin/env python3
"""Independent integrations of the phototransistor's and the photovoltaic cell's equations, written as CSV beside this file.

Needs numpy and scipy (made with numpy 2.4.6, scipy 1.17.1, Python 3.11). The equations are stiff: Radau IIA (implicit Runge-Kutta),
whose values are written, stands against LSODA (multistep); the difference stands in each file's head.
"""

import math

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from make_golden import HERE, RATE, ROWS, START, V_T, Case, ceil, tones

RTOL = 1e-11


def integrate(case, method):
    """Columns at every sample time; split where the smooth start ends, so that no step straddles its kink."""
    times = np.arange(ROWS) / RATE
    state = np.array(case.rest)
    pieces = []
    for first, last in ((0, round(START * RATE)), (round(START * RATE), ROWS - 1)):
        run = solve_ivp(
            case.slope, (times[first], times[last]), state, method=method, t_eval=times[first: last + 1],
            rtol=RTOL, atol=RTOL * np.array(case.scale), max_step=1.0 / RATE,
        )
        if not run.success:
            raise RuntimeError(f"{case.name}, {method}: {run.message}")
        pieces.append(run.y if last == ROWS - 1 else run.y[:, :-1])
        state = run.y[:, -1]
    states = np.hstack(pieces)
    return times, np.array([case.outputs(t, y) for t, y in zip(times, states.T)])


def make(case):
    times, best = integrate(case, "Radau")
    swing = np.max(np.abs(best - best[0]), axis=0)
    apart = np.max(np.abs(integrate(case, "LSODA")[1] - best), axis=0) / swing
    names = case.columns[2:]
    for i, name in enumerate(names):
        print(f"{case.name} {name}: rest {best[0, i]:.9g}, min {best[:, i].min():.9g}, max {best[:, i].max():.9g}; apart {apart[i]:.1e}")
    head = [
        "Source: make_detectors.py beside this file (scipy solve_ivp); SI units; T = 293.15 K, V_T = kT/q",
        *case.head,
        "Smooth start: s(t) = (1 - cos(pi t/0.5 ms))/2 up to 0.5 ms, 1 after it. Times t = n/384000 s, every n",
        f"Solver: Radau, rtol {RTOL:g}. Largest difference from LSODA as a part of the column's largest swing from rest, rounded up to",
        "a power of ten: " + ", ".join(f"{name} {ceil(apart[i])}" for i, name in enumerate(names)),
        "Rest: " + ", ".join(f"{name} = {best[0, i]:.17g}" for i, name in enumerate(names)),
    ]
    with open(HERE / f"{case.name}.csv", "w", encoding="ascii", newline="\n") as out:
        out.writelines(f"# {line}\n" for line in head)
        out.write(",".join(case.columns) + "\n")
        for t, values in zip(times, best):
            out.write(",".join(f"{x:.17g}" for x in (t, case.drive(t), *values)) + "\n")


def phototransistor(name, load, mean, swing, base_resistor=math.inf, c_load=0.0, branch=None):
    i_s, gain, low, high, b_r, v_a = 2e-14, 400.0, 3e-6, 30e-3, 3.0, 60.0
    tau_f, c_e, c_c, v_s = 1.5e-9, 6e-12, 4e-12, 9.0
    tau_r = tau_f * gain / b_r
    r_n, c_n = branch or (math.inf, 1.0)

    def flows(v_be, v_bc):
        """Transport, base-emitter and base-collector current."""
        e, c = math.exp(v_be / V_T), math.exp(v_bc / V_T)
        early = 1.0 - v_bc / v_a if v_bc <= 0.0 else 1.0 / (1.0 + v_bc / v_a)
        lost = 1.0 - math.exp(-v_be / V_T) if v_be >= 0.0 else math.exp(v_be / V_T) - 1.0
        i_be = (i_s * (e - 1.0) + low * lost) * (1.0 + i_s * e / high) / gain
        return i_s * (e - c) * early, i_be, i_s * (c - 1.0) / b_r

    def drive(t):
        return mean + tones(t, (0.7 * swing, 1000.0), (0.3 * swing, 5200.0))

    def net(i_ph, v_be, u):
        """What flows into the base and into the load's node, the branch apart."""
        i_t, i_be, i_bc = flows(v_be, v_be + u - v_s)
        return i_ph - i_be - i_bc - v_be / base_resistor, i_ph + i_t - i_bc - u / load

    def drop_for(v_be, i_ph):
        return brentq(lambda u: net(i_ph, v_be, u)[1], -1e-3, v_s + 1.0, xtol=1e-15, rtol=1e-15)

    v0 = brentq(lambda v: net(mean, v, drop_for(v, mean))[0], 0.05, 0.9, xtol=1e-15, rtol=1e-15)
    u0 = drop_for(v0, mean)

    def slope(t, y):
        v_be, u = y[0], y[1]
        base, node = net(drive(t), v_be, u)
        through = (u - y[2]) / r_n if branch else 0.0
        d_e = tau_f * i_s / V_T * math.exp(v_be / V_T) + c_e
        d_c = tau_r * i_s / V_T * math.exp((v_be + u - v_s) / V_T) + c_c
        # (d_e + d_c) v_be' + d_c u' = base; d_c v_be' + (c_load + d_c) u' = node - through
        matrix = np.array([[d_e + d_c, d_c], [d_c, c_load + d_c]])
        move = np.linalg.solve(matrix, [base, node - through])
        return [move[0], move[1], through / c_n][: len(rest)]

    rest, scale = ([v0, u0, u0], [0.1, 1.0, 1.0]) if branch else ([v0, u0], [0.1, 1.0])
    head = [
        "Phototransistor with a load; states V_BE, drop u across the load, v_n on the next stage's coupling capacitor; V_BC = V_BE + u - V_s",
        "base: d(Q_E + Q_C)/dt = i_ph - I_BE - I_BC - V_BE/R_b; load: d(C_load u + Q_C)/dt = i_ph + I_T - I_BC - u/R_L - (u - v_n)/R_n",
        "C_n dv_n/dt = (u - v_n)/R_n",
        "I_T = I_s (e - c) E, e = exp(V_BE/V_T), c = exp(V_BC/V_T), E = 1 - V_BC/V_A for V_BC <= 0, else 1/(1 + V_BC/V_A)",
        "I_BE = (I_s (e - 1) + low g)(1 + I_s e/high)/gain, g = 1 - 1/e for V_BE >= 0, else e - 1; I_BC = I_s (c - 1)/b_R",
        "Q_E = tau_F I_s (e - 1) + C_E V_BE, Q_C = tau_F gain/b_R I_s (c - 1) + C_C V_BC",
        "I_s 2e-14 A, gain 400, low 3e-6, high 30e-3 A, b_R 3, V_A 60 V, tau_F 1.5e-9 s, C_E 6e-12, C_C 4e-12 F, V_s 9 V",
        f"R_L {load:g}, R_b {base_resistor:g}, R_n {r_n:g} ohm, C_load {c_load:g}, C_n {c_n:g} F",
        f"i_ph(t) = {mean:g} + {swing:g} s(t) (0.7 sin(2 pi 1000 t) + 0.3 sin(2 pi 5200 t)) A",
    ]
    return Case(
        name, head, ["t_s", "i_ph_A", "vbe_V", "u_V"], drive, slope, rest, scale,
        lambda _, y: [y[0], y[1]],
    )


def photocell(name, mean, swing, c_load, branch):
    i_0, n, r_s, r_sh, c_j, load = 10e-12, 1.0, 20.0, 20e3, 30e-9, 1e3
    n_vt = n * V_T
    r_n, c_n = branch

    def drive(t):
        return mean + tones(t, (0.7 * swing, 1000.0), (0.3 * swing, 5200.0))

    def lost(v):
        return i_0 * math.expm1(v / n_vt) + v / r_sh

    v0 = brentq(lambda v: mean - lost(v) - v / (r_s + load), 0.0, 1.0, xtol=1e-16, rtol=1e-15)
    u0 = v0 * load / (r_s + load)

    def slope(t, y):
        v, u, v_n = y
        i, through = (v - u) / r_s, (u - v_n) / r_n
        return [(drive(t) - lost(v) - i) / c_j, (i - u / load - through) / c_load, through / c_n]

    head = [
        "Photovoltaic cell with a load; states v across the junction, u across the load, v_n on the next stage's coupling capacitor",
        "C_j dv/dt = i_ph - I_0 (exp(v/(n V_T)) - 1) - v/R_sh - (v - u)/R_s; C_load du/dt = (v - u)/R_s - u/R_L - (u - v_n)/R_n",
        "C_n dv_n/dt = (u - v_n)/R_n",
        f"I_0 10e-12 A, n 1, R_s 20, R_sh 20e3 ohm, C_j 30e-9 F, R_L 1e3, R_n {r_n:g} ohm, C_load {c_load:g}, C_n {c_n:g} F",
        f"i_ph(t) = {mean:g} + {swing:g} s(t) (0.7 sin(2 pi 1000 t) + 0.3 sin(2 pi 5200 t)) A",
    ]
    return Case(
        name, head, ["t_s", "i_ph_A", "v_V", "u_V"], drive, slope, [v0, u0, u0], [0.1, 0.1, 0.1],
        lambda _, y: [y[0], y[1]],
    )


if __name__ == "__main__":
    make(phototransistor("phototransistor_1k", 1e3, 5e-6, 4e-6))
    make(phototransistor("phototransistor_10k", 10e3, 1.6e-6, 1.4e-6))
    make(phototransistor("phototransistor_100k", 100e3, 0.25e-6, 0.15e-6, 20e6, 10e-12, (470e3, 10e-9)))
    for name, mean in (("dim", 20e-6), ("office", 400e-6), ("sun", 3e-3)):
        make(photocell(f"photocell_{name}", mean, 0.8 * mean, 10e-9, (10e3, 100e-9)))
