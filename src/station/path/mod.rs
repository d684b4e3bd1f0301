//! The light's way from emitter to detector: watts emitted in, watts on the detector out.
//!
//! Air, fibre and room are one kind of thing, a share of the flux, a pole and what makes the light fade, and share one Model and one Runner;
//! each file holds how its share comes about.

mod air;
mod diffuse;
mod fades;
mod fibre;
mod interruption;
mod scintillation;
mod sway;

use num_complex::Complex64;

use super::optics::Optics;
use super::{Conditions, Events, Limit, Model, Reading, Runner, Share};
use crate::design::{DesignError, Section};
use crate::quantity::Dimension;
use crate::signal::pole::{FirstOrder, FirstOrderLaw};
use fades::{Fades, Fading};
use interruption::Interruption;

/// A path on paper. The operating point and the test figures are those of the steady path, without fades.
pub struct LightPath {
    path: String,
    title: &'static str,
    /// Share of the emitted flux that reaches the detector.
    gain: f64,
    /// What the way does to fast changes, 1 at rest.
    pole: FirstOrderLaw,
    /// Emitted flux at rest, W.
    flux: f64,
    fades: Fades,
    readings: Vec<Reading>,
    warnings: Vec<String>,
}

impl LightPath {
    /// From `[path]`, its interruptions, `[transmitter.emitter]` and the optics; `flux` is the emitted flux at rest, W.
    ///
    /// # Errors
    /// Where a value and another contradict each other.
    pub fn new(
        section: &Section,
        interruptions: &[Section],
        emitter: &Section,
        optics: &Optics,
        flux: f64,
    ) -> Result<Self, DesignError> {
        let mut path = Self {
            path: section.path.clone(),
            title: "air",
            gain: 0.0,
            pole: FirstOrderLaw::low_pass(f64::INFINITY),
            flux,
            fades: Fades {
                interruptions: interruptions.iter().map(Interruption::new).collect(),
                ..Fades::default()
            },
            readings: Vec::new(),
            warnings: Vec::new(),
        };
        match section.kind.as_deref() {
            Some("fibre") => fibre::lay(&mut path, section, emitter, optics),
            Some("diffuse") => diffuse::lay(&mut path, section, optics)?,
            _ => air::lay(&mut path, section, emitter, optics),
        }
        path.pass_filter(emitter, optics);
        let (gain, received) = (path.gain, path.received());
        path.readings.splice(
            0..0,
            [
                ("share of the flux", 10.0 * gain.log10(), Dimension::Decibel),
                ("on the detector", received, Dimension::Watt),
            ]
            .map(|(name, value, dimension)| Reading {
                name,
                value,
                dimension,
            }),
        );
        Ok(path)
    }

    /// Light on the detector at rest, W.
    pub fn received(&self) -> f64 {
        self.gain * self.flux
    }

    fn pass_filter(&mut self, emitter: &Section, optics: &Optics) {
        let Some(filter) = optics.filter else { return };
        let wavelength = emitter.number("wavelength");
        let passes = filter.passes(wavelength, emitter.number("linewidth"));
        if passes < 0.1 * filter.transmission {
            self.warnings.push(format!(
                "receiver.optics.filter: centred at {}, it passes {} of the emitter's light at {}",
                Dimension::Metre.show(filter.centre),
                Dimension::Share.show(passes),
                Dimension::Metre.show(wavelength)
            ));
        }
        self.gain *= passes;
    }

    fn add_reading(&mut self, name: &'static str, value: f64, dimension: Dimension) {
        self.readings.push(Reading {
            name,
            value,
            dimension,
        });
    }
}

impl Model for LightPath {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        self.title.into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        self.readings.clone()
    }

    fn curve(&self, x: f64) -> f64 {
        self.gain * x
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.gain * self.pole.at(frequency)
    }

    fn noise(&self, _: f64) -> Vec<Share> {
        Vec::new()
    }

    fn limits(&self) -> Vec<Limit> {
        vec![Limit::Level {
            cause: "darkness",
            at: -self.received(),
        }]
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }

    fn slowest_time(&self) -> f64 {
        if self.pole.is_identity() {
            0.0
        } else {
            1.0 / self.pole.rate
        }
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        Box::new(PathRunner {
            gain: self.gain,
            flux: self.flux,
            pole: self.pole.section(conditions.rate),
            fading: self.fades.in_time(conditions),
            shares: Vec::new(),
        })
    }
}

struct PathRunner {
    gain: f64,
    flux: f64,
    pole: FirstOrder,
    fading: Option<Fading>,
    shares: Vec<f64>,
}

impl Runner for PathRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        if let Some(fading) = &mut self.fading {
            self.shares.resize(block.len(), 0.0);
            fading.fill(&mut self.shares);
            for (x, share) in block.iter_mut().zip(&self.shares) {
                // The whole flux fades, what stands at rest as well.
                *x = self.gain * (share * *x + (share - 1.0) * self.flux);
            }
        } else {
            block.iter_mut().for_each(|x| *x *= self.gain);
        }
        self.pole.run(block);
    }

    fn events(&self) -> Events {
        Events {
            interruptions: self.fading.as_ref().map_or(0, Fading::interruptions),
            ..Events::default()
        }
    }
}
