//! A noise contributor: one density with its two faces, on paper and in time.

use crate::physics::noise::flicker_factor;
use crate::signal::noise::{FlickerShaper, Gaussian};
use crate::signal::pole::{FirstOrder, FirstOrderLaw};

use super::{Conditions, Share};

/// A random source at one node of a station.
#[derive(Debug, Clone, PartialEq)]
pub struct Contributor {
    /// Full name, as the noise budget lists it.
    pub name: String,
    /// White squared density at the node, unit²/Hz, one-sided.
    pub density: f64,
    /// Corner below which a 1/f part outweighs the white one, Hz (0: none).
    pub corner: f64,
    /// What the noise passes on its way to the node.
    pub shape: Option<FirstOrderLaw>,
    /// Which of several equal parts it belongs to.
    pub unit: usize,
}

impl Contributor {
    /// A white source.
    pub fn white(name: String, density: f64) -> Self {
        Self {
            name,
            density,
            corner: 0.0,
            shape: None,
            unit: 0,
        }
    }

    /// Gives it a 1/f corner, Hz.
    pub fn with_corner(mut self, corner: f64) -> Self {
        self.corner = corner;
        self
    }

    /// Sends it through a first-order law.
    pub fn through(mut self, law: FirstOrderLaw) -> Self {
        self.shape = Some(law);
        self
    }

    /// Squared density at the node, unit²/Hz, at `frequency` (Hz).
    pub fn at(&self, frequency: f64) -> f64 {
        let shape = self.shape.map_or(1.0, |law| law.at(frequency).norm_sqr());
        self.density * flicker_factor(frequency, self.corner) * shape
    }

    /// Its share at a station's output, `gain_squared` times the node.
    pub fn share(&self, frequency: f64, gain_squared: f64) -> Share {
        Share {
            name: self.name.clone(),
            density: self.at(frequency) * gain_squared,
        }
    }

    /// The source in time; none where it is silent.
    pub fn source(&self, conditions: &Conditions) -> Option<NoiseSource> {
        if self.density <= 0.0 {
            return None;
        }
        let white = conditions.stream(&self.name, self.unit)?;
        let scale = (self.density * conditions.rate / 2.0).sqrt();
        // The 1/f part is independent of the white part and has a stream of its own.
        let flicker = (self.corner > 0.0).then(|| Flicker {
            stream: Gaussian::new(
                conditions.seed,
                conditions.channel,
                &self.name,
                &format!("{} flicker", self.unit),
            ),
            shaper: FlickerShaper::new(conditions.rate),
            scale: scale * self.corner.sqrt(),
        });
        let shape = self.shape.map(|law| law.section(conditions.rate));
        Some(NoiseSource {
            white,
            scale,
            flicker,
            shape,
            buffer: Vec::new(),
        })
    }
}

struct Flicker {
    stream: Gaussian,
    shaper: FlickerShaper,
    scale: f64,
}

/// A contributor that runs.
pub struct NoiseSource {
    white: Gaussian,
    scale: f64,
    flicker: Option<Flicker>,
    shape: Option<FirstOrder>,
    buffer: Vec<f64>,
}

impl NoiseSource {
    /// Adds the next samples to `block`.
    pub fn add_to(&mut self, block: &mut [f64]) {
        self.buffer.resize(block.len(), 0.0);
        self.white.fill(&mut self.buffer);
        self.buffer.iter_mut().for_each(|x| *x *= self.scale);
        if let Some(flicker) = &mut self.flicker {
            for x in &mut self.buffer {
                *x += flicker.scale * flicker.shaper.shape(flicker.stream.draw());
            }
        }
        if let Some(shape) = &mut self.shape {
            shape.run(&mut self.buffer);
        }
        for (x, n) in block.iter_mut().zip(&self.buffer) {
            *x += n;
        }
    }
}

/// The sources of those `contributors` that sound.
pub fn sources(contributors: &[Contributor], conditions: &Conditions) -> Vec<NoiseSource> {
    contributors
        .iter()
        .filter_map(|c| c.source(conditions))
        .collect()
}

/// Adds every source to `block`.
pub fn add_all(sources: &mut [NoiseSource], block: &mut [f64]) {
    sources.iter_mut().for_each(|s| s.add_to(block));
}
