#!/usr/bin/env python3
"""Independent integrations of common-emitter stages, written as CSV beside this file.

Needs numpy 2.4 and scipy 1.17. Absolute voltages and currents throughout, the junction by its own saturation current, one
root by bisection and interpolation (brentq) for each evaluation of the static law.

transistor_stage: the stage's equations as its documentation states them, through cut-off and saturation.
transistor_circuit: the whole circuit by its nodes, with the charges of the base and of the collector junction and both coupling
capacitors: what the stage's one input pole, its mid-band source and its bias shift stand for.
"""

import math
import pathlib

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

HERE = pathlib.Path(__file__).resolve().parent
RATE = 384_000.0
ROWS = 1153  # 0 to 3.0 ms
V_T = 1.380649e-23 * 293.15 / 1.602176634e-19
START = 0.5e-3
TAU = 2.0 * math.pi

V_CC, R_C, BIAS, BETA, R_B = 9.0, 4.7e3, 1e-3, 200.0, 47e3
R_BB, V_A, V_SAT, I_S = 200.0, 80.0, 0.2, 7e-15
R_S, C_OUT, R_L = 2.2e3, 47e-9, 10e3
I_B0 = BIAS / BETA


def drive(t, parts):
    s = 0.5 - 0.5 * math.cos(math.pi * t / START) if t < START else 1.0
    return s * sum(a * math.sin(TAU * f * t) for a, f in parts)


def parallel(*r):
    return 1.0 / sum(1.0 / x for x in r)


def integrate(slope, rest, scale, method, rtol):
    times = np.arange(ROWS) / RATE
    first = round(START * RATE)
    pieces, state = [], np.array(rest)
    for a, b in ((0, first), (first, ROWS - 1)):
        run = solve_ivp(slope, (times[a], times[b]), state, method=method, t_eval=times[a: b + 1],
                        rtol=rtol, atol=rtol * np.array(scale), max_step=1.0 / RATE)
        if not run.success:
            raise RuntimeError(run.message)
        pieces.append(run.y if b == ROWS - 1 else run.y[:, :-1])
        state = run.y[:, -1]
    return times, np.hstack(pieces)


def write(name, head, columns, parts, slope, rest, scale, output):
    assert np.max(np.abs(np.array(slope(0.0, rest)) / np.array(scale))) < 1e-3, (name, slope(0.0, rest))
    times, best = integrate(slope, rest, scale, "Radau", 1e-9)
    _, other = integrate(slope, rest, scale, "BDF", 1e-8)
    values = np.array([output(y) for y in best.T])
    apart = np.abs(np.array([output(y) for y in other.T]) - values).max(axis=0) / np.ptp(values, axis=0)
    print(name, "rest", values[0], "span", values.min(axis=0), values.max(axis=0), "BDF apart", apart)
    with open(HERE / f"{name}.csv", "w", encoding="ascii", newline="\n") as out:
        for line in [
            "Source: make_transistor.py beside this file (scipy solve_ivp); SI units; T = 293.15 K",
            *head,
            f"V_CC {V_CC}, R_c {R_C:g}, bias {BIAS:g}, beta {BETA:g} (at rest), divider {R_B:g}, r_b {R_BB:g}, V_A {V_A:g}, V_CEsat {V_SAT}, I_S {I_S:g}",
            f"v_s(t) = s(t) ({' + '.join(f'{a:g} sin(2 pi {f:g} t)' for a, f in parts)}) V, s(t) = (1 - cos(pi t/0.5 ms))/2 up to 0.5 ms, 1 after it",
            "Solver: Radau, rtol 1e-9; largest difference from BDF (rtol 1e-8), as a part of the column's span: "
            + ", ".join(f"{x:.0e}" for x in apart),
        ]:
            out.write(f"# {line}\n")
        out.write(",".join(["t_s", "v_s_V", *columns]) + "\n")
        for t, v in zip(times, values):
            out.write(",".join(f"{x:.12g}" for x in (t, drive(t, parts), *v)) + "\n")


def stage():
    r_e, share, f_t, c_mu = 1e3, 0.8, 50e6, 4e-12
    r_u = r_e * (1.0 - share)
    v_c0 = V_CC - R_C * BIAS
    v_e0 = r_e * (BIAS + I_B0)
    v_by = v_e0 - r_u * (BIAS + I_B0)
    v_ce0 = v_c0 - v_e0
    i_sb = I_S * (1.0 + v_ce0 / V_A) / BETA  # i_B = i_sb exp(V_BE/V_T)
    v_be0 = V_T * math.log(I_B0 / i_sb)
    r_th = parallel(R_S, R_B)
    v_bb = v_e0 + v_be0 + I_B0 * (r_th + R_BB)

    def collector(v_be, u):
        """Collector current and node voltage; the next stage's capacitor stands at u."""
        i_b = i_sb * math.exp(v_be / V_T)
        open_node = parallel(R_C, R_L) * (V_CC / R_C + u / R_L)
        z = parallel(R_C, R_L)
        free = I_S * math.exp(v_be / V_T) / V_A
        # V_CE = open_node - z i_C - v_by - r_u (i_B + i_C)
        i_c = free * (V_A + open_node - v_by - r_u * i_b) / (1.0 + free * (z + r_u))
        i_c = min(i_c, (open_node - V_SAT - v_by - r_u * i_b) / (z + r_u))
        return i_b, i_c, open_node - z * i_c

    def solve(v, u):
        def excess(v_be):
            i_b, i_c, _ = collector(v_be, u)
            return i_b * (r_th + R_BB) + v_be + v_by + r_u * (i_b + i_c) - v_bb - v

        return collector(brentq(excess, v_be0 - 5.0, v_be0 + 0.3, xtol=1e-16, rtol=1e-15), u)[1:]

    # Poles at rest. r_o = (V_A + V_CE0)/I_C; gain from base to collector with the base held, then the open node's resistance.
    g_m, r_pi, r_o = BIAS / V_T, V_T / I_B0, (V_A + v_ce0) / BIAS
    z = parallel(R_C, R_L)
    matrix = np.array([  # i_b, i_c, v_c under a base voltage of 1
        [r_pi + r_u, r_u, 0.0],
        [-BETA + r_u / r_o, 1.0 + r_u / r_o, -1.0 / r_o],
        [0.0, z, 1.0],
    ])
    gain = np.linalg.solve(matrix, [1.0, 0.0, 0.0])[2]
    loop = matrix.copy()
    loop[0, 0] += r_th + R_BB
    node = np.linalg.solve(loop, [0.0, 0.0, z])[2]
    c_in = g_m / (TAU * f_t) / (1.0 + g_m * (1.0 + 1.0 / BETA) * r_u) + c_mu * (1.0 - gain)
    tau_in = parallel(r_th + R_BB, r_pi + (BETA + 1.0) * r_u) * c_in
    tau_out = node * c_mu
    parts = ((0.4, 1000.0), (0.2, 3700.0))

    def slope(t, y):
        v, u, out = y
        node = solve(v, u)[1]
        return [(drive(t, parts) * R_B / (R_S + R_B) - v) / tau_in, (node - u) / (R_L * C_OUT), (node - out) / tau_out]

    write(
        "transistor_stage",
        [
            f"Stage by its own equations: source {R_S:g} ohm straight to the base; R_E {r_e:g} of which {share} bypassed; f_T {f_t:g}, C_mu {c_mu:g}",
            f"next stage {R_L:g} ohm behind {C_OUT:g} F; input pole {1 / TAU / tau_in:.6g} Hz, node's lag {1 / TAU / tau_out:.6g} Hz, both at rest",
            "v_c_V: collector voltage behind the node's lag",
        ],
        ["v_c_V"], parts, slope, [0.0, v_c0, v_c0], [1.0, 1.0, 1.0], lambda y: [y[2]],
    )


def circuit():
    f_t, c_mu, c_in = 250e6, 1.5e-12, 100e-9
    v_c0 = V_CC - R_C * BIAS
    v_e = 1e3 * (BIAS + I_B0)
    v_ce0 = v_c0 - v_e
    i_sb = I_S * (1.0 + v_ce0 / V_A) / BETA
    v_be0 = V_T * math.log(I_B0 / i_sb)
    v_b0 = v_e + v_be0 + I_B0 * R_BB
    v_divider = v_b0 + I_B0 * R_B
    parts = ((0.025, 1000.0), (0.01, 1700.0))

    def slope(t, y):
        inner, v_c, w, u = y  # base behind r_b, collector, both capacitors
        # Base node: source through the capacitor, divider, r_b.
        g = 1.0 / R_S + 1.0 / R_B + 1.0 / R_BB
        v_b = ((drive(t, parts) - w) / R_S + v_divider / R_B + inner / R_BB) / g
        e = math.exp((inner - v_e) / V_T)
        i_b, i_c = i_sb * e, I_S * e * (1.0 + (v_c - v_e) / V_A)
        c_pi = BIAS / V_T * math.exp((inner - v_e - v_be0) / V_T) / (TAU * f_t)
        into_base = (v_b - inner) / R_BB - i_b
        into_collector = (V_CC - v_c) / R_C - i_c - (v_c - u) / R_L
        # C_pi on the base, C_mu between base and collector.
        d_inner = (into_base + into_collector) / c_pi
        d_collector = d_inner + into_collector / c_mu
        return [d_inner, d_collector, (drive(t, parts) - w - v_b) / (R_S * c_in), (v_c - u) / (R_L * C_OUT)]

    write(
        "transistor_circuit",
        [
            f"Whole circuit by its nodes: source {R_S:g} ohm, {c_in:g} F, divider and base; R_E 1000 wholly bypassed (a battery); {R_L:g} ohm behind {C_OUT:g} F",
            f"C_pi = g_m(t)/(2 pi f_T), f_T {f_t:g}; C_mu {c_mu:g} F from base to collector; v_L_V across the {R_L:g} ohm",
        ],
        ["v_c_V", "v_L_V"], parts, slope, [v_b0 - I_B0 * R_BB, v_c0, -v_b0, v_c0], [1e-2, 1.0, 1.0, 1.0],
        lambda y: [y[1], y[1] - y[3]],
    )


if __name__ == "__main__":
    stage()
    circuit()
