//! A plain resistor and capacitor, with what drives them and what loads them.

use num_complex::Complex64;
use std::f64::consts::TAU;

use crate::design::Section as DesignSection;
use crate::physics::noise::{johnson, johnson_current};
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;
use crate::signal::pole_pair::{Section, SectionLaw};
use crate::station::noise::{self, Contributor, NoiseSource};
use crate::station::wiring::{Branch, Drive, Load};
use crate::station::{Conditions, Limit, Model, Reading, Runner, Share};

/// Low-pass: the resistor in series, the capacitor to ground. High-pass: the capacitor in series, the resistor to the next
/// stage's reference.
///
/// The node is solved with the resistance before it and everything that hangs on it, a coupling capacitor behind a low-pass included.
/// What drives a low-pass is loaded with the resistor and what follows; the capacitor's load on it is counted here, by the
/// resistance seen looking back. What follows sees the resistance of the pass band.
pub struct RcFilter {
    path: String,
    low_pass: bool,
    law: SectionLaw,
    /// Mid-band gain, and gain for a steady voltage.
    gain: f64,
    corner: f64,
    thermal: Contributor,
    /// Steady voltage at the input, against rest, that leaves the capacitor discharged.
    discharged: f64,
    drive: Drive,
}

impl RcFilter {
    fn is_low_pass(section: &DesignSection) -> bool {
        section.word("shape") == "low-pass"
    }

    /// What it shows to the stage before it, with `next` behind it.
    pub fn input_load(section: &DesignSection, next: &Load) -> Load {
        let resistor = section.number("resistor");
        if !Self::is_low_pass(section) {
            return with_resistor(resistor, next).behind_capacitor(section.number("capacitor"));
        }
        let through = |g: f64| g / (1.0 + resistor * g);
        let direct = through(next.conductance);
        let branch = next.branch.and_then(|b| {
            let extra = through(next.signal_conductance()) - direct;
            let around = 1.0 / (next.conductance + 1.0 / resistor);
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
    pub fn new(section: &DesignSection, before: &Drive, next: &Load, temperature: f64) -> Self {
        if Self::is_low_pass(section) {
            Self::low_pass(section, before, next, temperature)
        } else {
            Self::high_pass(section, before, next, temperature)
        }
    }

    fn low_pass(section: &DesignSection, before: &Drive, next: &Load, temperature: f64) -> Self {
        let resistor = section.number("resistor");
        let capacitance = section.number("capacitor") + next.capacitance;
        let (seen, series) = (resistor + before.seen, resistor + before.series);
        let steady = 1.0 + seen * next.conductance;
        let signal = 1.0 + seen * next.signal_conductance();
        // A node before that was solved with its load has the division by what it saw behind it already.
        let gain = 1.0 / (1.0 + series * next.signal_conductance());
        let solved = gain * signal;
        // gain·… over 1 + seen·(g + sC + sC₂/(1 + sC₂R₂)).
        let law = match next.branch {
            None => {
                let pole = -steady / (seen * capacitance);
                SectionLaw {
                    gain: solved / (seen * capacitance),
                    zeros: Vec::new(),
                    poles: vec![pole.into()],
                }
            }
            Some(b) => {
                let time = b.resistance * b.capacitance;
                let a = seen * capacitance * time;
                let half = (seen * capacitance + time * steady + seen * b.capacitance) / (2.0 * a);
                let product = steady / a;
                // Two real poles: of a network of resistors and capacitors.
                let fast = -half - (half * half - product).max(0.0).sqrt();
                SectionLaw {
                    gain: solved * time / a,
                    zeros: vec![(-1.0 / time).into()],
                    poles: vec![fast.into(), (product / fast).into()],
                }
            }
        };
        let held = series * next.conductance;
        let rest = (before.rest + held * next.return_voltage) / (1.0 + held);
        let through = law.at(0.0).re;
        // An open node may as well be divided by what follows, which then knows the resistance.
        let open = next.signal_conductance() == 0.0 && next.capacitance == 0.0;
        Self {
            path: section.path.clone(),
            low_pass: true,
            gain,
            corner: signal / (TAU * seen * capacitance),
            thermal: Contributor::white(
                format!("{}.resistor", section.path),
                johnson(resistor, temperature) / (solved * solved),
            ),
            discharged: -rest / through,
            law,
            drive: Drive {
                rest,
                series: if open { series } else { 0.0 },
                seen,
                blocked: before.blocked,
            },
        }
    }

    fn high_pass(section: &DesignSection, before: &Drive, next: &Load, temperature: f64) -> Self {
        let (resistor, capacitance) = (section.number("resistor"), section.number("capacitor"));
        let next = with_resistor(resistor, next);
        let conductance = next.signal_conductance();
        let gain = before.division(conductance);
        let corner = 1.0 / (capacitance * (before.series + 1.0 / conductance));
        // The next input's own capacitance stands across what remains of the resistances.
        let across = before.seen / (1.0 + before.seen * conductance);
        let upper = 1.0 / (across * next.capacitance);
        let law = if upper.is_finite() {
            SectionLaw {
                gain: gain * upper,
                zeros: vec![0.0.into()],
                poles: vec![(-corner).into(), (-upper).into()],
            }
        } else {
            SectionLaw {
                gain,
                zeros: vec![0.0.into()],
                poles: vec![(-corner).into()],
            }
        };
        // The resistor's noise current meets itself alone at 0 Hz and what drives the node as well in mid-band.
        let rate = 1.0 / (capacitance * (before.seen + 1.0 / conductance));
        let impedance = FirstOrderLaw {
            direct: across,
            residue: (1.0 / conductance - across) * rate,
            rate,
        };
        let thermal = Contributor::white(
            format!("{}.resistor", section.path),
            johnson_current(1.0 / resistor, temperature),
        );
        Self {
            path: section.path.clone(),
            low_pass: false,
            law,
            gain,
            corner: corner / TAU,
            thermal: thermal.through(impedance),
            discharged: next.return_voltage - before.rest,
            drive: Drive {
                rest: next.return_voltage,
                series: 0.0,
                seen: 1.0 / (1.0 / before.seen + 1.0 / resistor),
                blocked: None,
            },
        }
    }

    /// What it offers.
    pub fn drive(&self) -> Drive {
        self.drive
    }
}

/// `next` with a resistor (Ω) across it, to the same reference.
fn with_resistor(resistor: f64, next: &Load) -> Load {
    Load {
        conductance: next.conductance + 1.0 / resistor,
        ..*next
    }
}

impl Model for RcFilter {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        let shape = if self.low_pass {
            "low-pass"
        } else {
            "high-pass"
        };
        format!("{shape}, resistor and capacitor")
    }

    fn operating_point(&self) -> Vec<Reading> {
        vec![
            Reading {
                name: "output",
                value: self.drive.rest,
                dimension: Dimension::Volt,
            },
            Reading {
                name: "corner",
                value: self.corner,
                dimension: Dimension::Hertz,
            },
        ]
    }

    fn curve(&self, x: f64) -> f64 {
        self.gain * x
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.law.at(frequency)
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        // A low-pass has its resistor in series with the signal.
        let passed = if self.low_pass {
            self.law.at(frequency).norm_sqr()
        } else {
            1.0
        };
        vec![self.thermal.share(frequency, passed)]
    }

    fn limits(&self) -> Vec<Limit> {
        Vec::new()
    }

    fn slowest_time(&self) -> f64 {
        self.law.slowest_time()
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        let mut section = self.law.section(conditions.rate);
        if conditions.cold {
            section.settle(self.discharged);
        }
        Box::new(RcRunner {
            noise_first: self.low_pass,
            section,
            noise: self.thermal.source(conditions),
        })
    }
}

struct RcRunner {
    noise_first: bool,
    section: Section,
    noise: Option<NoiseSource>,
}

impl Runner for RcRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        if self.noise_first {
            noise::add_all(self.noise.as_mut_slice(), block);
            self.section.run(block);
        } else {
            self.section.run(block);
            noise::add_all(self.noise.as_mut_slice(), block);
        }
    }
}
