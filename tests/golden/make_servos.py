#!/usr/bin/env python3
"""Independent integrations of the transmitter's monitor loop and the receiver's ambient servo, written as CSV beside this file.

Needs numpy and scipy (made with numpy 2.4.6, scipy 1.17.1, Python 3.11). The integration and the file's form are those of make_golden.py.
"""

import math

from make_golden import BOLTZMANN, CHARGE, TEMPERATURE, TWO_PI, V_T, Case, make, tanh_slew, tones

PLANCK = 6.62607015e-34
LIGHT = 299_792_458.0


def monitor(name, bandwidth, gain, parts):
    bias, slope, r_s, n, i_s = 30e-3, 20e-3, 1.0, 1.8, 1e-12
    flux, at, i_low, droop = 12e-3, 50e-3, 1e-3, 0.2
    k_t, r_th, tau, f_c, wavelength = -0.005, 300.0, 1e-3, 800e3, 940e-9
    n_vt, s = n * V_T, slope * V_T

    def shape(i):
        return i * (i / (i + i_low)) / (1.0 + i / droop)

    eta = flux / shape(at)

    def current(volts):
        return s * math.log1p(math.exp((bias + slope * volts) / s))

    i0 = current(0.0)
    junction0 = n_vt * math.log1p(i0 / i_s)
    kappa = (junction0 - PLANCK * LIGHT / (wavelength * CHARGE) - 3.0 * V_T) / TEMPERATURE
    heat0 = (junction0 + i0 * r_s) * i0
    dt0 = r_th * (heat0 - eta * shape(i0)) / (1.0 + r_th * eta * shape(i0) * k_t)
    p0 = eta * shape(i0) * (1.0 + k_t * dt0)
    # P'/P = 2/i - 1/(i + I_low) - 1/(I_droop + i), di/dv = slope/(1 + e^(-bias/s)).
    p_slope = p0 * (2.0 / i0 - 1.0 / (i0 + i_low) - 1.0 / (droop + i0)) * slope / (1.0 + math.exp(-bias / s))
    h = 1e-6
    numeric = (shape(current(h)) - shape(current(-h))) / (2.0 * h) * eta * (1.0 + k_t * dt0)
    assert abs(numeric / p_slope - 1.0) < 1e-8

    def drive(t):
        return tones(t, *parts)

    def laws(t, y):
        i = current(drive(t) + y[0])
        v_f = n_vt * math.log1p(i / i_s) + i * r_s + kappa * (y[2] - dt0)
        return i, v_f, eta * shape(i) * (1.0 + k_t * y[2])

    def rate(t, y):
        i, v_f, p = laws(t, y)
        return [
            TWO_PI * bandwidth * (gain * (drive(t) - (y[1] - p0) / p_slope) - y[0]),
            TWO_PI * f_c * (p - y[1]),
            (r_th * (v_f * i - p) - y[2]) / tau,
        ]

    text = " + ".join(f"{level:g} sin(2 pi {f:g} t)" for level, f in parts)
    head = [
        "Current sink and LED with a monitor loop; states w (the loop's output), P (emitted flux) and dT (junction's rise over ambient)",
        "i = s ln(1 + exp((bias + slope (v + w))/s)), s = slope V_T",
        "dw/dt = 2 pi B (G (v - (P - P_rest)/P') - w), P' = dP_static/dv at rest at constant dT",
        "dP/dt = 2 pi f_c (P_static - P), P_static = eta i (i/(i + I_low)) / (1 + i/I_droop) (1 + k_T dT)",
        "tau d(dT)/dt = R_th (V_f i - P_static) - dT, V_f = n V_T ln(1 + i/I_s) + i R_s + kappa (dT - dT_rest)",
        "kappa = (n V_T ln(1 + i_rest/I_s) - hc/(q lambda) - 3 V_T)/T",
        "bias 30e-3 A, slope 20e-3 A/V, R_s 1 ohm, n 1.8, I_s 1e-12 A, flux 12e-3 W at 50e-3 A, I_low 1e-3 A, I_droop 0.2 A,",
        f"k_T -0.005 1/K, R_th 300 K/W, tau 1e-3 s, f_c 800e3 Hz, lambda 940e-9 m, B {bandwidth:g} Hz, G {gain:g}; kappa = {kappa:.17g} V/K",
        f"v(t) = s(t) ({text}) V",
    ]
    return Case(
        name, head, ["t_s", "v_V", "w_V", "P_W", "dT_K"], drive, rate, [0.0, p0, dt0], [1.0, 5e-3, 10.0],
        lambda _, y: list(y),
    )


def ambient(name, corner, parts):
    r_f, r_s, c_t, c_f, gbw, slew, bias = 100e3, 47e3, 80e-12, 3e-12, 2e6, 1e6, 20e-6

    def drive(t):
        return bias + tones(t, *parts)

    def input_node(y):
        return (y[0] + c_f * y[1]) / (c_t + c_f)

    def rate(t, y):
        x = input_node(y)
        return [
            -(drive(t) + (x - y[1]) / r_f + (x - y[2]) / r_s),
            tanh_slew(-x, gbw, slew),
            TWO_PI * corner * r_s / r_f * y[1],
        ]

    text = " + ".join(f"{level:g} sin(2 pi {f:g} t)" for level, f in parts)
    head = [
        "Transimpedance amplifier with an ambient servo: x inverting input, y output, z servo's output, all from the reference;",
        "states q, y and z; x = (q + C_f y)/(C_t + C_f)",
        "dq/dt = -(i_ph(t) + (x - y)/R_f + (x - z)/R_s), q = (C_t + C_f) x - C_f y; dy/dt = S(-x); dz/dt = 2 pi f_s (R_s/R_f) y",
        "S(u) = clamp(2 pi GBW V_L tanh(u/V_L), +-slew), V_L = slew/(2 pi GBW)",
        f"R_f 100e3, R_s 47e3 ohm, C_t 80e-12, C_f 3e-12 F, GBW 2e6 Hz, slew 1e6 V/s, f_s {corner:g} Hz",
        f"i_ph(t) = 20e-6 + s(t) ({text}) A",
    ]
    return Case(
        name, head, ["t_s", "i_ph_A", "y_V", "z_V"], drive, rate, [0.0, 0.0, bias * r_s], [c_t * 1e-2, 1.0, 1.0],
        lambda _, y: [y[1], y[2]],
    )


if __name__ == "__main__":
    assert BOLTZMANN * TEMPERATURE / CHARGE == V_T
    make(monitor("monitor_loop", 100e3, 20.0, [(0.6, 1000.0), (0.5, 3700.0)]))
    make(monitor("monitor_loop_slow", 2e3, 30.0, [(0.7, 1000.0), (0.4, 3700.0)]))
    make(ambient("ambient_servo", 2000.0, [(6e-6, 1000.0), (4e-6, 9000.0)]))
