//! The receive head: a detector with its front end and what loads it, which share one node. Watts in, volts out.

mod detector;
mod load;
mod photocell;
mod phototransistor;
mod transimpedance;

pub use detector::{Detector, Sensitivity};
pub use load::LoadHead;
pub use photocell::PhotocellHead;
pub use phototransistor::PhototransistorHead;
pub use transimpedance::TransimpedanceHead;

use super::noise::{Contributor, NoiseSource};
use super::wiring::{Drive, Load};
use super::{Conditions, Model};
use crate::design::Section;
use crate::physics::constants::thermal_voltage;

/// The receive head of a design, by the kinds of its detector and its front end, and what it offers to the `next` stage.
///
/// `sensitivity` is the detector's at `wavelength` (m), `light` what stands on it at rest, `temperature` in K.
pub fn receive_head(
    front_end: &Section,
    detector: &Section,
    (sensitivity, wavelength): (Sensitivity, f64),
    light: LightAtRest,
    next: &Load,
    temperature: f64,
) -> (Box<dyn Model>, Drive) {
    let diode = || {
        Detector::new(
            detector,
            wavelength,
            temperature,
            thermal_voltage(temperature),
        )
    };
    match (detector.kind.as_deref(), front_end.kind.as_deref()) {
        (Some("phototransistor"), _) => {
            let head = PhototransistorHead::new(
                front_end,
                detector,
                sensitivity,
                light,
                next,
                temperature,
            );
            let drive = head.drive();
            (Box::new(head), drive)
        }
        (Some("photocell"), _) => {
            let head =
                PhotocellHead::new(front_end, detector, sensitivity, light, next, temperature);
            let drive = head.drive();
            (Box::new(head), drive)
        }
        (_, Some("transimpedance")) => {
            let head = TransimpedanceHead::new(front_end, diode(), light, next, temperature);
            let drive = head.drive();
            (Box::new(head), drive)
        }
        _ => {
            let head = LoadHead::new(front_end, diode(), light, next, temperature);
            let drive = head.drive();
            (Box::new(head), drive)
        }
    }
}

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
