//! A design compiled into stations, with their loading solved.

mod budget;
mod chain;
mod wire;

pub use budget::{BudgetLine, budget};
pub use chain::{Chain, StationEvents};

use num_complex::Complex64;

use crate::design::{Design, DesignError};
use crate::station::ambient::Lamp;
use crate::station::output::Sound;
use crate::station::{Conditions, Curves, Model};

/// The whole link: its stations in the order of the light's way.
pub struct Link {
    stations: Vec<Box<dyn Model>>,
    lamps: Vec<Lamp>,
    /// Peak volts of a sample of 1, at the source and at the output.
    source_full_scale: f64,
    output_full_scale: f64,
    sound: Option<Sound>,
    max_current: f64,
    measured_to: Option<f64>,
    /// Index of the receive head, and its detector's A/W.
    receiver: usize,
    responsivity: f64,
    silence: Vec<String>,
    warnings: Vec<String>,
}

impl Link {
    /// Compiles `design`.
    ///
    /// # Errors
    /// Where values of the design contradict each other in a way that no section's own check sees.
    pub fn new(design: &Design) -> Result<Self, DesignError> {
        wire::wire(design)
    }

    /// The stations, source first.
    pub fn stations(&self) -> &[Box<dyn Model>] {
        &self.stations
    }

    /// The lights that are not ours.
    pub fn lamps(&self) -> &[Lamp] {
        &self.lamps
    }

    /// Peak volts of a sample of 1 at the source.
    pub fn source_full_scale(&self) -> f64 {
        self.source_full_scale
    }

    /// Peak volts at the output that become a sample of 1.
    pub fn output_full_scale(&self) -> f64 {
        self.output_full_scale
    }

    /// How loud the output is, where it sounds.
    pub fn sound(&self) -> Option<Sound> {
        self.sound
    }

    /// Largest current that the emitter may carry, A.
    pub fn max_current(&self) -> f64 {
        self.max_current
    }

    /// The current up to which the emitter's light–current curve was measured, A, where it is given as one.
    pub fn measured_to(&self) -> Option<f64> {
        self.measured_to
    }

    /// Small-signal transfer from the source's open-circuit volts to the output's volts at `frequency` (Hz).
    pub fn transfer(&self, frequency: f64) -> Complex64 {
        self.stations[1..]
            .iter()
            .map(|s| s.transfer(frequency))
            .product()
    }

    /// Output volts per ampere of photocurrent at `frequency` (Hz), in size.
    fn gain_after_light(&self, frequency: f64) -> f64 {
        let onwards: f64 = self.stations[self.receiver..]
            .iter()
            .map(|s| s.transfer(frequency).norm())
            .product();
        onwards / self.responsivity
    }

    /// What an engineer ought to know about this design's operating point.
    pub fn warnings(&self) -> Vec<String> {
        let stations = self.stations.iter().flat_map(|s| s.warnings());
        self.warnings.iter().cloned().chain(stations).collect()
    }

    /// The longest time constant along the way that a signal excites, s.
    pub fn slowest_time(&self) -> f64 {
        self.stations
            .iter()
            .map(|s| s.slowest_time())
            .fold(0.0, f64::max)
    }

    /// Conditions of a whole run at `rate` (Hz) under `seed`: everything bends, sounds and flickers.
    pub fn conditions(&self, rate: f64, seed: u64) -> Conditions {
        Conditions {
            rate,
            curves: Curves::Bent,
            noise: true,
            lamps: true,
            fades: true,
            start: 0.0,
            seed,
            channel: 0,
            cold: false,
            silence: self.silence.clone(),
        }
    }

    /// The link in time.
    pub fn chain(&self, conditions: &Conditions) -> Chain {
        Chain::new(self, conditions)
    }
}
