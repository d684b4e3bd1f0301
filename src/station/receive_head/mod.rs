//! The receive head: a detector with its front end and what loads it, which share one node. Watts in, volts out.

mod detector;
mod load;
mod transimpedance;

pub use detector::Detector;
pub use load::LoadHead;
pub use transimpedance::TransimpedanceHead;

use super::Conditions;
use super::noise::{Contributor, NoiseSource};

/// The light on the detector at rest, as photocurrents in A.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LightAtRest {
    pub signal: f64,
    pub ambient: f64,
}

impl LightAtRest {
    /// Both together.
    pub fn total(&self) -> f64 {
        self.signal + self.ambient
    }
}

/// Shot noise that follows the light from sample to sample: density 2q·I(t).
///
/// Normal draws: good while many electrons pass in a sample (1 nA at 384 kHz: 16 000). What the junction itself adds is taken at rest.
struct MovingShot {
    unit: Option<NoiseSource>,
    at_rest: f64,
    buffer: Vec<f64>,
}

impl MovingShot {
    /// `junction` is the part of the density that stands still, as a current, A.
    fn new(name: String, junction: f64, conditions: &Conditions) -> Self {
        Self {
            unit: Contributor::white(name, 1.0).source(conditions),
            at_rest: junction,
            buffer: Vec::new(),
        }
    }

    /// Adds the shot noise of photocurrents `current` + `rest` (A) to `current`.
    fn add_to(&mut self, current: &mut [f64], rest: f64) {
        let Some(unit) = &mut self.unit else { return };
        self.buffer.clear();
        self.buffer.resize(current.len(), 0.0);
        unit.add_to(&mut self.buffer);
        for (i, n) in current.iter_mut().zip(&self.buffer) {
            let flowing = (rest + *i).max(0.0) + self.at_rest;
            *i += n * crate::physics::noise::shot(flowing).sqrt();
        }
    }
}
