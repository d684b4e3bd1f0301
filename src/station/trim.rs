//! A potentiometer: its upper part in series, its lower part to the next stage's reference.

use num_complex::Complex64;

use super::noise::{self, Contributor, NoiseSource};
use super::wiring::{Branch, Drive, Load};
use super::{Conditions, Limit, Model, Reading, Runner, Share};
use crate::design::Section;
use crate::physics::noise::johnson;
use crate::quantity::Dimension;

/// Share of the resistance below the wiper, for a turn of 0…1. The audio taper is the exponential with a tenth at half a
/// turn, (81^w − 1)/80 (common practice: 10 % at mid-turn).
fn below_wiper(section: &Section) -> f64 {
    let turn = section.number("wiper");
    match section.word("taper") {
        "audio" => (81f64.powf(turn) - 1.0) / 80.0,
        _ => turn,
    }
}

/// A pot of total `resistance`; its foot returns to the reference of what follows.
pub struct Trim {
    path: String,
    gain: f64,
    drive: Drive,
    contributor: Contributor,
}

impl Trim {
    fn parts(section: &Section) -> (f64, f64) {
        let total = section.number("resistance");
        let lower = total * below_wiper(section);
        (total - lower, lower)
    }

    /// What it shows to the stage before it, with `next` on its wiper: exact for one capacitor behind the wiper.
    pub fn input_load(section: &Section, next: &Load) -> Load {
        let (upper, lower) = Self::parts(section);
        let through = |below: f64| 1.0 / (upper + below);
        let parallel = |g: f64| {
            if lower > 0.0 {
                1.0 / (1.0 / lower + g)
            } else {
                0.0
            }
        };
        let direct = through(parallel(next.conductance));
        let branch = next.branch.and_then(|b| {
            let extra = through(parallel(next.signal_conductance())) - direct;
            let around = if upper > 0.0 {
                parallel(next.conductance + 1.0 / upper)
            } else {
                0.0
            };
            (extra > 0.0).then(|| Branch {
                resistance: 1.0 / extra,
                capacitance: extra * b.capacitance * (b.resistance + around),
            })
        });
        Load {
            conductance: direct,
            return_voltage: next.return_voltage,
            branch,
            capacitance: 0.0,
        }
    }

    /// From its section, between `before` and `next`; `temperature` in K.
    pub fn new(section: &Section, before: &Drive, next: &Load, temperature: f64) -> Self {
        let (upper, lower) = Self::parts(section);
        let above = upper + before.series;
        let total = above + lower;
        let gain = lower / total;
        let foot = next.return_voltage;
        // The pot's own noise, with whatever feeds it standing in series with the upper part.
        let behind = upper + before.seen;
        let whole = behind + lower;
        let density = johnson(upper, temperature) * (lower / whole).powi(2)
            + johnson(lower, temperature) * (behind / whole).powi(2);
        Self {
            path: section.path.clone(),
            gain,
            drive: Drive {
                rest: foot + (before.rest - foot) * gain,
                series: lower * above / total,
                seen: lower * behind / whole,
                blocked: None,
            },
            contributor: Contributor::white(format!("{}.thermal", section.path), density),
        }
    }

    /// What it offers.
    pub fn drive(&self) -> Drive {
        self.drive
    }
}

impl Model for Trim {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "trim".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        vec![
            Reading {
                name: "wiper, open",
                value: self.drive.rest,
                dimension: Dimension::Volt,
            },
            Reading {
                name: "output resistance",
                value: self.drive.series,
                dimension: Dimension::Ohm,
            },
        ]
    }

    fn curve(&self, x: f64) -> f64 {
        self.gain * x
    }

    fn transfer(&self, _: f64) -> Complex64 {
        self.gain.into()
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        vec![self.contributor.share(frequency, 1.0)]
    }

    fn limits(&self) -> Vec<Limit> {
        Vec::new()
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        Box::new(TrimRunner {
            gain: self.gain,
            noise: self.contributor.source(conditions),
        })
    }
}

struct TrimRunner {
    gain: f64,
    noise: Option<NoiseSource>,
}

impl Runner for TrimRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.gain);
        noise::add_all(self.noise.as_mut_slice(), block);
    }
}
