//! The bipolar transistor with its emitter resistor, between a source at its base and a load at its collector.

use num_complex::Complex64;

/// Logarithm of the junction's drive beyond which nothing physical happens any more; keeps the powers of it finite.
const HIGHEST: f64 = 230.0;
/// Longest step that the search from the last state takes in the logarithm of the drive.
const LONGEST: f64 = 0.2;
/// Step below which the terms left out of the inverse series lie under 1e-13.
const CLOSE: f64 = 5e-4;
/// Logarithm of the drive below which its exponential bends nothing that a double could hold beside the rest.
const DEEP: f64 = -40.0;

/// A common emitter around its rest. Every variable is a deviation from rest, except the drive `j` = exp(ΔV_BE/V_T), 1 at rest.
///
/// The law is Ebers and Moll's in the forward region with Early's factor (Gray and Meyer, the large-signal model):
///
/// - I_B = I_B0·j, I_C = I·j·(1 + ΔV_CE/(V_A + V_CE0)): the current gain is that at rest, and the base current does not feel V_CE;
/// - base loop: v = ΔI_B·R_B + V_T·ln j + ΔI_E·R_E;
/// - collector: Δv_C = k − z·ΔI_C, V_CE counted from the emitter.
///
/// Saturation is hard: V_CE never falls below its least value; what the collector then cannot take the base carries. Cut-off is
/// the exponential itself. Left out: junction leakage, breakdown, high-level injection, the charge of a saturated base.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct CommonEmitter {
    /// kT/q, V.
    pub thermal_voltage: f64,
    /// Resistance of the base loop: source, divider and base region, Ω (≥ 0).
    pub base_resistance: f64,
    /// Emitter resistance that signals see, Ω (≥ 0).
    pub emitter_resistance: f64,
    /// Base current at rest, A (> 0).
    pub base_rest: f64,
    /// Collector current that the drive asks for at rest, A (> 0).
    pub asked: f64,
    /// Collector current at rest, A: `asked`, or less where the rest is saturated.
    pub collector_rest: f64,
    /// 1/(V_A + V_CE0), 1/V (≥ 0).
    pub early: f64,
    /// How far V_CE may fall from rest, V (≥ 0, may be infinite); 0 where the rest is saturated.
    pub room: f64,
}

/// Where the collector stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Region {
    Active,
    /// V_CE at its least.
    Saturated,
    /// The collector feeds on the base: it has been pulled below its least voltage.
    Reversed,
}

/// A solved state, and the start of the next search.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct State {
    /// ln j.
    pub log_drive: f64,
    /// j, the exponential of it.
    pub drive: f64,
    /// Collector current away from rest, A.
    pub collector: f64,
    pub region: Region,
    /// How the last search moved ln j, and the factor on j: the next starts as far on.
    moved: (f64, f64),
}

impl State {
    /// At rest.
    pub const REST: Self = Self {
        log_drive: 0.0,
        drive: 1.0,
        collector: 0.0,
        region: Region::Active,
        moved: (0.0, 1.0),
    };

    /// At rest but for the drive `j` (> 0), as a start.
    pub fn at_drive(j: f64) -> Self {
        Self {
            log_drive: j.ln(),
            drive: j,
            ..Self::REST
        }
    }

    /// Takes the exponential anew, so that roundings of many steps do not add up.
    pub fn renew(&mut self) {
        self.drive = self.log_drive.exp();
    }
}

/// The collector's current (A, away from rest) with its first and second derivative against the drive.
#[derive(Clone, Copy)]
struct Collector {
    current: f64,
    slope: f64,
    bend: f64,
    /// −bend'/3bend.
    hold: f64,
    region: Region,
}

impl CommonEmitter {
    /// The collector at the drive `j` under Δv_C = k − z·ΔI_C.
    #[inline]
    fn collector(&self, j: f64, k: f64, z: f64) -> Collector {
        let Self {
            emitter_resistance: re,
            base_rest: ib,
            asked,
            collector_rest: ic,
            early,
            ..
        } = *self;
        // ΔV_CE = k − z·ΔI_C − R_E·(ΔI_B + ΔI_C) put into the law is linear in I_C.
        let across = z + re;
        let base = ib * (j - 1.0);
        let held = asked * early * across;
        let scale = 1.0 / (1.0 + j * held);
        let factor = 1.0 + early * (k + across * ic - re * base);
        let active = asked * j * factor * scale;
        let slope = (asked * (factor - j * early * re * ib) - active * held) * scale;
        let current = active - ic;
        let limit = k + self.room - re * base;
        if current * across <= limit && active >= -ib * j {
            return Collector {
                current,
                slope,
                bend: -2.0 * scale * (held * slope + asked * early * re * ib),
                hold: held * scale,
                region: Region::Active,
            };
        }
        let (limited, least) = (limit / across, -ic - ib * j);
        let (current, slope, region) = if limited > least {
            (limited, -re * ib / across, Region::Saturated)
        } else {
            (least, -ib, Region::Reversed)
        };
        Collector {
            current,
            slope,
            bend: 0.0,
            hold: 0.0,
            region,
        }
    }

    /// What the base loop needs beyond `v` at ln j = `w`, V, and its slope against w, V.
    #[inline]
    fn excess(&self, w: f64, j: f64, v: f64, c: &Collector) -> (f64, f64) {
        let both = self.base_resistance + self.emitter_resistance;
        let value = self.thermal_voltage * w
            + both * self.base_rest * (j - 1.0)
            + self.emitter_resistance * c.current
            - v;
        let steep =
            self.thermal_voltage + j * (both * self.base_rest + self.emitter_resistance * c.slope);
        (value, steep)
    }

    /// The state under the base voltage `v` (V) with Δv_C = `k` − `z`·ΔI_C (V, Ω; `z` > 0), searched from `near`.
    ///
    /// Newton's method in ln j with the next two terms of the inverse series, the exponential carried along by its own: a signal
    /// that moves smoothly between samples costs one evaluation and no library function. Where that does not settle, closed
    /// forms start it anew. Good to 1e-13 of V_T.
    #[inline]
    pub fn solve(&self, v: f64, k: f64, z: f64, near: &State) -> State {
        let mut w = near.log_drive + near.moved.0;
        let mut j = near.drive * near.moved.1;
        for _ in 0..6 {
            let c = self.collector(j, k, z);
            let (value, steep) = self.excess(w, j, v, &c);
            let per = 1.0 / steep;
            let t = value * per;
            if t.abs() <= LONGEST {
                // The exponential is its own derivative; the Early effect bends it by a rational law, whose third derivative
                // follows from its second.
                let bend = self.emitter_resistance * j * j * c.bend;
                let second = 1.0 + (bend - self.thermal_voltage) * per;
                let third = second + bend * (2.0 - 3.0 * j * c.hold) * per;
                let step =
                    -t * (1.0 + t * (0.5 * second + t * (0.5 * second * second - third / 6.0)));
                let factor = exp_near(step);
                let last = j;
                w += step;
                j *= factor;
                if t.abs() < CLOSE {
                    let there = self.carried(&c, last, j, k, z);
                    // The step holds inside one region, not across the corner between two.
                    if there.region == c.region || t.abs() < 1e-13 {
                        // Made anew each time: a factor carried along would gather roundings twice over.
                        let moved = w - near.log_drive;
                        let smooth = moved.abs() < LONGEST;
                        return State {
                            log_drive: w,
                            drive: j,
                            collector: there.current,
                            region: there.region,
                            moved: if smooth {
                                (moved, exp_near(moved))
                            } else {
                                (0.0, 1.0)
                            },
                        };
                    }
                }
            } else if w < DEEP && w - t < DEEP {
                // No current to speak of on either side: a straight line.
                w -= t;
                j = w.exp();
            } else {
                break;
            }
        }
        self.solve_from_anywhere(v, k, z)
    }

    /// The collector at the drive `j` from `c` at the drive `from` close by.
    #[inline]
    fn carried(&self, c: &Collector, from: f64, j: f64, k: f64, z: f64) -> Collector {
        let rise = j - from;
        let current = c.current + rise * (c.slope + 0.5 * rise * c.bend);
        let limit = k + self.room - self.emitter_resistance * self.base_rest * (j - 1.0);
        if c.region == Region::Active && current * (z + self.emitter_resistance) <= limit {
            Collector { current, ..*c }
        } else {
            self.collector(j, k, z)
        }
    }

    fn state(&self, log_drive: f64, drive: f64, k: f64, z: f64) -> State {
        let c = self.collector(drive, k, z);
        State {
            log_drive,
            drive,
            collector: c.current,
            region: c.region,
            moved: (0.0, 1.0),
        }
    }

    /// As [`Self::solve`], without a start.
    #[cold]
    fn solve_from_anywhere(&self, v: f64, k: f64, z: f64) -> State {
        let Self {
            thermal_voltage: vt,
            base_resistance: rb,
            emitter_resistance: re,
            base_rest: ib,
            asked,
            collector_rest: ic,
            ..
        } = *self;
        // Without the Early effect each region is a loop vt·w + a·(e^w − 1) = drive, and the least or largest root is the one.
        let active = junction_loop(vt, ib * (rb + re) + asked * re, v + re * (ic - asked));
        let saturated = if self.room.is_finite() {
            let share = re / (z + re);
            let a = ib * (rb + re * (1.0 - share));
            junction_loop(vt, a, v - share * (k + self.room))
        } else {
            f64::NEG_INFINITY
        };
        let reversed = junction_loop(vt, ib * rb, v + re * (ic + ib));
        let mut w = active.max(saturated).min(reversed).min(HIGHEST);
        let (mut low, mut high) = (f64::NEG_INFINITY, f64::INFINITY);
        for _ in 0..200 {
            let j = w.exp();
            let (value, steep) = self.excess(w, j, v, &self.collector(j, k, z));
            if value > 0.0 {
                high = w;
            } else {
                low = w;
            }
            // The Early effect moves the root by a few units at most.
            let step = (value / steep).clamp(-2.0, 2.0);
            let mut next = (w - step).min(HIGHEST);
            if (next - w).abs() <= 1e-15 * w.abs().max(1.0) {
                break;
            }
            if next <= low || next >= high {
                next = low + (high - low) / 2.0;
            }
            w = next;
        }
        self.state(w, w.exp(), k, z)
    }

    /// Tangent at rest: ΔI_C = p·v + q·k under Δv_C = k − `z`·ΔI_C; p in S, q in S.
    pub fn tangent(&self, z: Complex64) -> (Complex64, Complex64) {
        let re = self.emitter_resistance;
        let base_loop = self.base_resistance + self.thermal_voltage / self.base_rest + re;
        if self.room == 0.0 {
            // V_CE stands still.
            let across = z + re - re * re / base_loop;
            return (-re / base_loop / across, 1.0 / across);
        }
        let conductance = self.output_conductance();
        let gain = self.asked / self.base_rest - conductance * re;
        let whole = 1.0 + conductance * (re + z) + gain * re / base_loop;
        (gain / base_loop / whole, conductance / whole)
    }

    /// Tangent at rest of the base current against the loop's voltage, S, with the collector's load `z` (Ω).
    pub fn base_tangent(&self, z: f64) -> f64 {
        let re = self.emitter_resistance;
        let base_loop = self.base_resistance + self.thermal_voltage / self.base_rest + re;
        (1.0 - re * self.tangent(z.into()).0.re) / base_loop
    }

    /// Conductance of the transistor alone between collector and emitter, I_C0/(V_A + V_CE0), S.
    pub fn output_conductance(&self) -> f64 {
        self.collector_rest * self.early
    }

    /// Transconductance I_C/V_T at the asked current, S.
    pub fn transconductance(&self) -> f64 {
        self.asked / self.thermal_voltage
    }

    /// Resistance seen into the collector with the base loop closed, Ω; may be infinite.
    pub fn collector_resistance(&self) -> f64 {
        let re = self.emitter_resistance;
        if self.room == 0.0 {
            let base_loop = self.base_resistance + self.thermal_voltage / self.base_rest + re;
            return re - re * re / base_loop;
        }
        // With z = 0 the collector is held: ΔI_C = q·k.
        1.0 / self.tangent(Complex64::ZERO).1.re
    }

    /// What a current from collector to emitter is worth at the collector node, with the base loop closed.
    pub fn collector_noise_gain(&self) -> f64 {
        if self.room == 0.0 {
            // The least voltage holds the collector.
            return 0.0;
        }
        let re = self.emitter_resistance;
        let base_loop = self.base_resistance + self.thermal_voltage / self.base_rest + re;
        let conductance = self.output_conductance();
        let gain = self.asked / self.base_rest - conductance * re;
        1.0 / (1.0 + conductance * re + gain * re / base_loop)
    }

    /// Base-loop volts that do as much to the collector's current as an ampere from collector to emitter, Ω.
    pub fn collector_noise_voltage(&self) -> f64 {
        let re = self.emitter_resistance;
        let base_loop = self.base_resistance + self.thermal_voltage / self.base_rest + re;
        base_loop / (self.asked / self.base_rest - self.output_conductance() * re)
    }

    /// Resistance of the base loop besides `base_resistance`: r_π + (β + 1)·R_E, Ω.
    pub fn junction_resistance(&self) -> f64 {
        self.thermal_voltage / self.base_rest
            + (self.asked / self.base_rest + 1.0) * self.emitter_resistance
    }
}

/// Root of `vt`·w + `a`·(e^w − 1) = `drive` (V): Newton's method from above, as the left side is convex.
fn junction_loop(vt: f64, a: f64, drive: f64) -> f64 {
    let target = drive / vt;
    let a = a / vt;
    if a <= 0.0 || target < -HIGHEST {
        return target + a.max(0.0);
    }
    let mut w = if target > 0.0 {
        target.min((1.0 + target / a).ln())
    } else {
        // e^w > 0 leaves at most the second.
        (target + a).min(0.0)
    };
    w = w.min(HIGHEST * 3.0);
    for _ in 0..100 {
        let e = w.exp();
        let step = (w + a * (e - 1.0) - target) / (1.0 + a * e);
        w -= step;
        if step.abs() <= 1e-9 * w.abs().max(1.0) {
            break;
        }
    }
    w
}

/// e^x for |x| < 0.26, by its series to the last place.
#[inline]
fn exp_near(x: f64) -> f64 {
    const F: [f64; 13] = {
        let mut inverse = [1.0; 13];
        let mut k = 1;
        while k < 13 {
            inverse[k] = inverse[k - 1] / k as f64;
            k += 1;
        }
        inverse
    };
    let x2 = x * x;
    let low = (1.0 + x) + x2 * (F[2] + x * F[3]);
    if x.abs() < 1e-3 {
        return low + x2 * x2 * (F[4] + x * F[5]);
    }
    let x4 = x2 * x2;
    let middle = (F[4] + x * F[5]) + x2 * (F[6] + x * F[7]);
    if x.abs() < 0.02 {
        return low + x4 * middle;
    }
    let high = (F[8] + x * F[9]) + x2 * (F[10] + x * F[11]) + x4 * F[12];
    low + x4 * (middle + x4 * high)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn stage(base: f64, emitter: f64, early: f64) -> CommonEmitter {
        CommonEmitter {
            thermal_voltage: 0.025,
            base_resistance: base,
            emitter_resistance: emitter,
            base_rest: 5e-6,
            asked: 1e-3,
            collector_rest: 1e-3,
            early,
            room: 4.0,
        }
    }

    fn some() -> Vec<CommonEmitter> {
        let mut all = Vec::new();
        for base in [0.0, 200.0, 50e3, 1e7] {
            for emitter in [0.0, 10.0, 1e3] {
                for early in [0.0, 0.01, 0.2] {
                    all.push(stage(base, emitter, early));
                }
            }
        }
        all.push(CommonEmitter {
            collector_rest: 0.4e-3,
            room: 0.0,
            ..stage(1e3, 100.0, 0.02)
        });
        all
    }

    #[test]
    fn a_stiff_base_gives_the_plain_exponential() {
        let law = CommonEmitter {
            room: f64::INFINITY,
            ..stage(0.0, 0.0, 0.0)
        };
        for v in [-0.4f64, -0.05, -1e-9, 1e-9, 0.03, 0.3] {
            let i = law.solve(v, 0.0, 1e3, &State::REST).collector;
            let expected = 1e-3 * (v / 0.025).exp_m1();
            assert!((i / expected - 1.0).abs() < 1e-6, "{v}: {i} {expected}");
            assert!((i - expected).abs() < 1e-12 * (1e-3 + expected.abs()));
        }
    }

    /// The solution put back into the three equations as they stand, whatever the region.
    #[test]
    fn solutions_satisfy_the_circuit() {
        for law in some() {
            for z in [10.0, 5e3, 1e6] {
                for k in [0.0, 1.0, -2.0, 60.0, -60.0] {
                    let mut near = State::REST;
                    for v in [0.0, 1e-6, 0.01, -0.02, 0.3, -5.0, 7.0, 200.0, -1e6, 1e6] {
                        let s = law.solve(v, k, z, &near);
                        let fresh = law.solve_from_anywhere(v, k, z);
                        let close = |a: f64, b: f64| (a - b).abs() < 1e-9 * (1e-3 + b.abs());
                        assert!(close(s.collector, fresh.collector), "{law:?} {z} {k} {v}");
                        near = s;
                        if s.log_drive >= HIGHEST {
                            continue;
                        }
                        let base = law.base_rest * (s.drive - 1.0);
                        let emitter = base + s.collector;
                        let around = law.base_resistance * base
                            + law.thermal_voltage * s.log_drive
                            + law.emitter_resistance * emitter;
                        assert!(
                            (around - v).abs() < 1e-11 * (1.0 + v.abs()),
                            "{law:?} {z} {k} {v}: {around}"
                        );
                        let across = k - z * s.collector - law.emitter_resistance * emitter;
                        let collector = law.collector_rest + s.collector;
                        let free = law.asked * s.drive * (1.0 + law.early * across);
                        let size = 1e-12 + 1e-9 * (free.abs() + collector.abs());
                        match s.region {
                            Region::Active => {
                                assert!(
                                    (collector - free).abs() < size,
                                    "{law:?} {z} {k} {v}: {collector} {free}"
                                );
                                assert!(across >= -law.room - 1e-6);
                            }
                            Region::Saturated => {
                                assert!((across + law.room).abs() < 1e-9 * (1.0 + z + k.abs()));
                                assert!(collector <= free + size);
                            }
                            Region::Reversed => {
                                assert!((collector + law.base_rest * s.drive).abs() < size);
                            }
                        }
                    }
                }
            }
        }
    }

    #[test]
    fn the_tangent_is_the_slope_at_rest() {
        for law in some() {
            for z in [10.0, 5e3, 1e6] {
                let (p, q) = law.tangent(z.into());
                // Into the region: a saturated rest has a corner at rest.
                let (v, k) = (1e-6, -1e-6);
                let by_v = law.solve(v, 0.0, z, &State::REST).collector / v;
                let by_k = law.solve(0.0, k, z, &State::REST).collector / k;
                assert!(
                    (by_v - p.re).abs() < 1e-4 * p.re.abs() + 1e-12,
                    "{law:?} {z}"
                );
                assert!(
                    (by_k - q.re).abs() < 1e-4 * q.re.abs() + 1e-12,
                    "{law:?} {z}: {by_k} {q}"
                );
            }
        }
    }

    /// Degenerated gain and output resistance (Gray and Meyer, common emitter with emitter degeneration).
    #[test]
    fn small_signal_matches_the_textbook() {
        let law = stage(0.0, 1e3, 0.01);
        let (gm, r_pi, ro) = (0.04f64, 5e3, 1e5);
        // g_m/(1 + g_m·R_E(1 + 1/β)) without r_o.
        let ideal = stage(0.0, 1e3, 0.0);
        let p = ideal.tangent(1e3.into()).0.re;
        assert!((p / (gm / (1.0 + gm * 1e3 * (1.0 + 1.0 / 200.0))) - 1.0).abs() < 1e-12);
        // r_o(1 + g_m(R_E ∥ r_π)) + R_E ∥ r_π.
        let parallel = 1e3 * r_pi / (1e3 + r_pi);
        let expected = ro * (1.0 + gm * parallel) + parallel;
        assert!((law.collector_resistance() / expected - 1.0).abs() < 1e-12);
    }

    #[test]
    fn the_carried_exponential_is_exact() {
        for k in -249..250 {
            let x = f64::from(k) * 1e-3;
            assert!((exp_near(x) / x.exp() - 1.0).abs() < 4e-16, "{x}");
        }
    }
}
