//! The monitor loop: a photodiode beside the emitter sees its light, and what the light falls short of the tangent at rest is
//! amplified and added to the driver's input.
//!
//! v_eff = v + w, w' = 2π·bandwidth·(gain·(v − p/p') − w): v the driver's volts and p the emitted flux, both away from rest, p' the slope dp/dv at rest
//! before heat has had time to act. The monitor sees the light as it leaves the emitter, with its self-heating, its carriers'
//! pole and its intensity noise; all of them, the driver's own noise and the curves of driver and emitter are divided by
//! 1 + L, L = gain/(1 + jf/bandwidth) times the emitter's own response. Noise of the monitor and of its amplifier is left out: good while the
//! monitor's photocurrent is far above the receiver's.
//!
//! The loop's amplifier works from the driver's supply: w stays within ± that, and it stands still where it would push the emitter further into darkness
//! (a millionth of the current at rest) or beyond what the supply allows the current (with the junction at its heat of rest). So nothing winds up.

mod balance;
pub(super) mod in_time;

use num_complex::Complex64;
use std::f64::consts::TAU;

use super::driver::Driver;
use super::emitter::Emitter;
use super::{Rest, Tangent};
use crate::design::Section;
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;
use crate::station::Reading;
use balance::Balance;

/// Gain and bandwidth (Hz) beyond which a loop counts as having these: its error is then under a millionth of a millionth.
const HIGHEST_GAIN: f64 = 1e12;
const WIDEST: f64 = 1e18;

/// Share of the current at rest below which the emitter counts as dark to the loop.
const DARK: f64 = 1e-6;

/// Quality of the closed loop above which it is said to ring.
const RINGS: f64 = 1.4;

/// The loop on paper.
#[derive(Debug, Clone)]
pub struct Servo {
    path: String,
    gain: f64,
    /// 2π·bandwidth, rad/s.
    rate: f64,
    /// p', W/V.
    slope: f64,
    /// Driver volts that count as large.
    scale: f64,
    /// The carriers' pole, rad/s; may be infinite.
    carriers: f64,
    /// How far heat lowers (or raises) the slope in the long run, relative.
    heated: f64,
    bounds: Bounds,
}

/// Where the loop stops pushing, in driver volts away from rest.
#[derive(Debug, Clone, Copy)]
struct Bounds {
    /// The emitter is dark below this.
    dark: f64,
    /// The supply allows no more current above this (may be infinite).
    full: f64,
    /// Most that the loop adds, either way.
    reach: f64,
}

impl Bounds {
    /// Lowest and highest v_eff while `base` volts come without the loop.
    #[inline]
    fn around(&self, base: f64) -> (f64, f64) {
        (
            (base - self.reach).max(base.min(self.dark)),
            (base + self.reach).min(base.max(self.full)),
        )
    }
}

impl Servo {
    /// From the driver's section, with the emitter at rest. None where no servo is given, or where the light has no slope at rest.
    pub(super) fn new(
        section: &Section,
        driver: &Driver,
        emitter: &Emitter,
        rest: &Rest,
        tangent: &Tangent,
    ) -> Option<Self> {
        let servo = section.table("servo")?;
        let heat = &tangent.heated;
        let slope = heat.direct;
        let carriers = emitter.carriers();
        if slope <= 0.0 || !slope.is_finite() {
            return None;
        }
        Some(Self {
            path: section.path.clone(),
            gain: servo.number("gain").min(HIGHEST_GAIN),
            rate: TAU * servo.number("bandwidth").min(WIDEST),
            slope,
            scale: (rest.flux / slope).min(driver.supply.abs()),
            carriers: if carriers.is_identity() {
                f64::INFINITY
            } else {
                carriers.rate
            },
            heated: if heat.residue == 0.0 {
                0.0
            } else {
                heat.residue / heat.rate / slope
            },
            bounds: Bounds {
                dark: edge(-1.0, |v| at(driver, rest, v).0 <= DARK * rest.current)
                    .unwrap_or(f64::NEG_INFINITY),
                full: edge(1.0, |v| at(driver, rest, v).1).unwrap_or(f64::INFINITY),
                reach: driver.supply.abs(),
            },
        })
    }

    /// gain/(1 + jf/bandwidth) times the emitter's response `open` (W/V) over its slope.
    fn loop_gain(&self, frequency: f64, open: Complex64) -> Complex64 {
        self.amplifier(frequency) * open / self.slope
    }

    fn amplifier(&self, frequency: f64) -> Complex64 {
        self.gain / Complex64::new(1.0, TAU * frequency / self.rate)
    }

    /// What the loop leaves at `frequency` (Hz) of a disturbance inside it: 1/(1 + L). `open` is the emitter's own response, W/V.
    pub fn leaves(&self, frequency: f64, open: Complex64) -> Complex64 {
        1.0 / (1.0 + self.loop_gain(frequency, open))
    }

    /// What it makes of the signal's own way `open` (W/V): (1 + H)/(1 + L), 1 where the emitter follows its slope.
    pub fn follows(&self, frequency: f64, open: Complex64) -> Complex64 {
        (1.0 + self.amplifier(frequency)) * self.leaves(frequency, open)
    }

    /// Driver volts (away from rest) that the loop settles at when `asked` come, under the static `flux` (W away from rest) at driver volts.
    pub fn settle(&self, asked: f64, flux: impl FnMut(f64) -> f64) -> f64 {
        let lean = 1.0 / (1.0 + self.gain);
        let balance = Balance {
            lean,
            pull: self.gain * lean / self.slope,
            target: asked,
            bounds: self.bounds.around(asked),
        };
        balance.solve(asked, self.slope, self.scale, flux).volts
    }

    /// Frequency, Hz, and quality of the closed loop's pole pair of amplifier and carriers; none where the carriers are at once.
    fn resonance(&self) -> Option<(f64, f64)> {
        let natural = (self.rate * self.carriers * (1.0 + self.gain)).sqrt();
        let quality = natural / (self.rate + self.carriers);
        (natural.is_finite() && quality.is_finite()).then_some((natural / TAU, quality))
    }

    pub fn readings(&self) -> Vec<Reading> {
        vec![
            Reading {
                name: "monitor loop gain",
                value: self.gain,
                dimension: Dimension::Number,
            },
            Reading {
                name: "monitor loop bandwidth, closed",
                value: self.rate / TAU * (1.0 + self.gain),
                dimension: Dimension::Hertz,
            },
        ]
    }

    pub fn warnings(&self) -> Vec<String> {
        let mut warnings = Vec::new();
        if let Some((frequency, quality)) = self.resonance()
            && quality > RINGS
        {
            warnings.push(format!(
                "{}: the servo rings with the emitter's carriers at {} (quality {quality:.1}); a smaller gain or bandwidth calms it",
                self.path,
                Dimension::Hertz.show(frequency)
            ));
        }
        if 1.0 + self.gain * (1.0 + self.heated) <= 0.0 {
            warnings.push(format!(
                "{}: more current makes less light once the junction is warm, and the servo drives it up to its limit",
                self.path
            ));
        }
        warnings
    }

    /// Longest time constant of the closed loop with the heat's pole, s: infinite heat is left to the limits.
    pub fn slowest_time(&self, heat: &FirstOrderLaw) -> f64 {
        let own = 1.0 / (self.rate * (1.0 + self.gain));
        if heat.residue == 0.0 {
            return own;
        }
        // 1 + G(1 + r/(s + λ)) = 0, with the loop fast beside the heat.
        let rate = heat.rate * (1.0 + self.heated * self.gain / (1.0 + self.gain));
        own.max(1.0 / rate.min(heat.rate).max(1e-3 * heat.rate))
    }
}

/// Current, A, and whether it is limited, at `volts` from rest with the junction at its heat of rest.
fn at(driver: &Driver, rest: &Rest, volts: f64) -> (f64, bool) {
    driver.current(rest.input, rest.input + volts, 0.0, rest.current)
}

/// Where `reached` becomes true on the way from 0 in the direction of `step` (V); none where it does not within a million volts.
fn edge(step: f64, reached: impl Fn(f64) -> bool) -> Option<f64> {
    let (mut inside, mut outside) = (0.0, step * 1e-3);
    while !reached(outside) {
        inside = outside;
        outside *= 2.0;
        if outside.abs() > 1e6 {
            return None;
        }
    }
    for _ in 0..60 {
        let middle = 0.5 * (inside + outside);
        if reached(middle) {
            outside = middle;
        } else {
            inside = middle;
        }
    }
    Some(outside)
}
