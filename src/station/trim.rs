//! A potentiometer: its upper part in series, its lower part to the next stage's reference.

use num_complex::Complex64;

use super::noise::{self, Contributor, NoiseSource};
use super::wiring::{Branch, Drive, Load};
use super::{Conditions, Model, Reading, Runner, Share};
use crate::design::Section;
use crate::physics::noise::johnson;
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;

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
    contributors: Vec<Contributor>,
}

/// What stands around the two parts of the track.
struct Around {
    upper: f64,
    lower: f64,
    /// The upper part with what feeds it, Ω.
    behind: f64,
    /// Resistance that the next station reckons the division by its load with, Ω.
    series: f64,
    /// The next station's load, S.
    load: f64,
    /// Capacitor that feeds it, F.
    blocked: Option<f64>,
}

/// Noise of the upper and of the lower part, at the wiper before the next station's division.
fn thermal(name: String, around: &Around, temperature: f64) -> Vec<Contributor> {
    let Around {
        upper,
        lower,
        behind,
        series,
        load,
        blocked,
    } = *around;
    // Both by Kirchhoff at the wiper under its load, which the next station divides by.
    let share = 1.0 / (1.0 + load * lower);
    let whole = behind + lower * share;
    let division = 1.0 + load * series;
    let from_upper = lower * share / whole * division;
    let from_lower = share * division;
    let laws = match blocked {
        Some(c) => {
            let (zero, pole) = (1.0 / (c * behind), 1.0 / (c * whole));
            let high_pass = FirstOrderLaw::high_pass(pole);
            let upper = FirstOrderLaw {
                direct: from_upper,
                residue: from_upper * high_pass.residue,
                rate: pole,
            };
            [upper, FirstOrderLaw::shelf(from_lower, zero, pole)]
        }
        None => [from_upper, from_lower * behind / whole].map(|direct| FirstOrderLaw {
            direct,
            residue: 0.0,
            rate: 1.0,
        }),
    };
    [upper, lower]
        .into_iter()
        .zip(laws)
        .enumerate()
        .map(|(unit, (part, law))| Contributor {
            unit,
            ..Contributor::white(name.clone(), johnson(part, temperature)).through(law)
        })
        .collect()
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
        let (series, behind) = (lower * above / total, upper + before.seen);
        let seen = lower * behind / (behind + lower);
        let name = format!("{}.thermal", section.path);
        let contributors = thermal(
            name,
            &Around {
                upper,
                lower,
                behind,
                series,
                load: next.signal_conductance(),
                blocked: before.blocked,
            },
            temperature,
        );
        Self {
            path: section.path.clone(),
            gain,
            drive: Drive {
                rest: foot + (before.rest - foot) * gain,
                series,
                seen,
                blocked: None,
            },
            contributors,
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
        self.contributors
            .iter()
            .map(|c| c.share(frequency, 1.0))
            .collect()
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        Box::new(TrimRunner {
            gain: self.gain,
            noises: noise::sources(&self.contributors, conditions),
        })
    }
}

struct TrimRunner {
    gain: f64,
    noises: Vec<NoiseSource>,
}

impl Runner for TrimRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.gain);
        noise::add_all(&mut self.noises, block);
    }
}
