//! The far end: the load on the last stage, and the volts that become full scale.

use num_complex::Complex64;

use super::wiring::{Drive, Load};
use super::{Conditions, Limit, Model, Reading, Runner, Share};
use crate::design::Section;
use crate::quantity::Dimension;

/// A line output: `impedance` on the last stage; `full_scale` peak volts become a sample of 1.
pub struct Output {
    path: String,
    gain: f64,
    rest: f64,
    full_scale: f64,
}

impl Output {
    /// What it shows to the last stage.
    pub fn input_load(section: &Section) -> Load {
        Load::resistor(section.number("impedance"), 0.0)
    }

    /// From the section `[output]`, behind `before`.
    pub fn new(section: &Section, before: &Drive) -> Self {
        let load = Self::input_load(section);
        Self {
            path: section.path.clone(),
            gain: before.division(load.signal_conductance()),
            rest: before.loaded_rest(&load),
            full_scale: section.number("full_scale"),
        }
    }

    /// Peak volts of a sample of 1.
    pub fn full_scale(&self) -> f64 {
        self.full_scale
    }
}

impl Model for Output {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "line output".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        vec![Reading {
            name: "rest",
            value: self.rest,
            dimension: Dimension::Volt,
        }]
    }

    fn curve(&self, x: f64) -> f64 {
        self.gain * x
    }

    fn transfer(&self, _: f64) -> Complex64 {
        self.gain.into()
    }

    fn noise(&self, _: f64) -> Vec<Share> {
        Vec::new()
    }

    fn limits(&self) -> Vec<Limit> {
        Vec::new()
    }

    fn runner(&self, _: &Conditions) -> Box<dyn Runner> {
        Box::new(OutputRunner { gain: self.gain })
    }
}

struct OutputRunner {
    gain: f64,
}

impl Runner for OutputRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        if self.gain != 1.0 {
            block.iter_mut().for_each(|x| *x *= self.gain);
        }
    }
}
