//! What drives the transmitter: samples become volts behind a resistance.

use num_complex::Complex64;

use super::noise::{self, Contributor, NoiseSource};
use super::wiring::Drive;
use super::{Conditions, Model, Reading, Runner, Share};
use crate::design::Section;
use crate::physics::noise::johnson;
use crate::quantity::Dimension;

/// v(t) = full_scale · x(t), behind `resistance`.
pub struct Source {
    path: String,
    full_scale: f64,
    resistance: f64,
    contributors: Vec<Contributor>,
}

impl Source {
    /// From the section `[source]`; `temperature` in K.
    pub fn new(section: &Section, temperature: f64) -> Self {
        let resistance = section.number("resistance");
        let name = |cause: &str| format!("{}.{cause}", section.path);
        let contributors = vec![
            Contributor::white(name("noise"), section.number("noise").powi(2)),
            Contributor::white(name("resistance"), johnson(resistance, temperature)),
        ];
        Self {
            path: section.path.clone(),
            full_scale: section.number("full_scale"),
            resistance,
            contributors,
        }
    }

    /// What it offers.
    pub fn drive(&self) -> Drive {
        Drive {
            rest: 0.0,
            series: self.resistance,
            seen: self.resistance,
            blocked: None,
        }
    }

    /// Peak volts of a sample of 1.
    pub fn full_scale(&self) -> f64 {
        self.full_scale
    }
}

impl Model for Source {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "source".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        vec![Reading {
            name: "full scale",
            value: self.full_scale,
            dimension: Dimension::Volt,
        }]
    }

    fn curve(&self, x: f64) -> f64 {
        self.full_scale * x
    }

    fn transfer(&self, _: f64) -> Complex64 {
        self.full_scale.into()
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        self.contributors
            .iter()
            .map(|c| c.share(frequency, 1.0))
            .collect()
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        Box::new(SourceRunner {
            full_scale: self.full_scale,
            noises: noise::sources(&self.contributors, conditions),
        })
    }
}

struct SourceRunner {
    full_scale: f64,
    noises: Vec<NoiseSource>,
}

impl Runner for SourceRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.full_scale);
        noise::add_all(&mut self.noises, block);
    }
}
