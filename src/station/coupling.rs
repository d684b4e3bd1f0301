//! A coupling capacitor: blocks DC exactly and makes the corner 1/(2πC(R_source + R_next)).

use num_complex::Complex64;

use super::wiring::{Drive, Load};
use super::{Conditions, Model, Reading, Runner, Share};
use crate::design::Section;
use crate::quantity::Dimension;
use crate::signal::pole::{FirstOrder, FirstOrderLaw};

/// A series capacitor between what stands before it and the input after it.
pub struct Coupling {
    path: String,
    gain: f64,
    high_pass: FirstOrderLaw,
    low_pass: FirstOrderLaw,
    capacitor_rest: f64,
    drive: Drive,
}

impl Coupling {
    /// What it shows to the stage before it, with `next` behind it.
    pub fn input_load(section: &Section, next: &Load) -> Load {
        next.behind_capacitor(section.number("capacitor"))
    }

    /// From its section, between `before` and `next`.
    ///
    /// A further capacitor inside `next` is taken in mid-band, which holds while its corner lies well below this one's or above the audio band's edge.
    pub fn new(section: &Section, before: &Drive, next: &Load) -> Self {
        let capacitance = section.number("capacitor");
        let conductance = next.signal_conductance();
        let rate = if conductance > 0.0 {
            1.0 / (capacitance * (before.series + 1.0 / conductance))
        } else {
            0.0
        };
        // The next input's own capacitance stands across what remains of the resistances.
        let across = before.seen / (1.0 + before.seen * conductance);
        Self {
            path: section.path.clone(),
            gain: before.division(conductance),
            high_pass: FirstOrderLaw::high_pass(rate),
            low_pass: FirstOrderLaw::low_pass(1.0 / (across * next.capacitance)),
            capacitor_rest: before.rest - next.return_voltage,
            drive: Drive {
                rest: next.return_voltage,
                series: 0.0,
                seen: before.seen,
                blocked: Some(
                    before
                        .blocked
                        .map_or(capacitance, |c| c * capacitance / (c + capacitance)),
                ),
            },
        }
    }

    /// What it offers: a node solved with its load.
    pub fn drive(&self) -> Drive {
        self.drive
    }
}

impl Model for Coupling {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "coupling capacitor".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        vec![
            Reading {
                name: "voltage across",
                value: self.capacitor_rest,
                dimension: Dimension::Volt,
            },
            Reading {
                name: "corner",
                value: self.high_pass.rate / std::f64::consts::TAU,
                dimension: Dimension::Hertz,
            },
        ]
    }

    fn curve(&self, x: f64) -> f64 {
        self.gain * x
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.gain * self.high_pass.at(frequency) * self.low_pass.at(frequency)
    }

    fn noise(&self, _: f64) -> Vec<Share> {
        Vec::new()
    }

    fn slowest_time(&self) -> f64 {
        if self.high_pass.rate > 0.0 {
            1.0 / self.high_pass.rate
        } else {
            0.0
        }
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        let mut high_pass = self.high_pass.section(conditions.rate);
        if conditions.cold && self.high_pass.rate > 0.0 {
            // Discharged: the whole quiescent voltage stands at the output and dies away.
            high_pass.start_output(self.capacitor_rest);
        }
        Box::new(CouplingRunner {
            gain: self.gain,
            high_pass,
            low_pass: self.low_pass.section(conditions.rate),
        })
    }
}

struct CouplingRunner {
    gain: f64,
    high_pass: FirstOrder,
    low_pass: FirstOrder,
}

impl Runner for CouplingRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.gain);
        self.high_pass.run(block);
        self.low_pass.run(block);
    }
}
