//! The bipolar transistor with its emitter resistor, between a source at its base and a load at its collector.

mod search;

use num_complex::Complex64;

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

#[cfg(test)]
mod tests {
    use super::*;

    pub(super) fn stage(base: f64, emitter: f64, early: f64) -> CommonEmitter {
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

    pub(super) fn some() -> Vec<CommonEmitter> {
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
}
