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
        let flicker = (self.corner > 0.0).then(|| Flicker::new(self, conditions));
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

/// The 1/f part of a contributor: independent of the white part, with a stream of its own.
///
/// It is made at a lower rate and joined by straight lines, as nothing of it is heard beside the white part above many times
/// the corner: at half the lower rate it lies 17 dB under it.
struct Flicker {
    stream: Gaussian,
    shaper: FlickerShaper,
    scale: f64,
    /// Samples between two values.
    stride: u32,
    phase: u32,
    value: f64,
    slope: f64,
}

impl Flicker {
    /// The lower rate over the corner, at least, and the lower rate itself, Hz.
    const RATIO: f64 = 100.0;
    const LOWEST_RATE: f64 = 4000.0;
    const LONGEST_STRIDE: u32 = 64;

    fn new(contributor: &Contributor, conditions: &Conditions) -> Self {
        let lowest = (Self::RATIO * contributor.corner).max(Self::LOWEST_RATE);
        let mut stride = 1;
        while stride < Self::LONGEST_STRIDE && conditions.rate / f64::from(2 * stride) >= lowest {
            stride *= 2;
        }
        let rate = conditions.rate / f64::from(stride);
        let cause = format!("{} flicker", contributor.unit);
        Self {
            stream: Gaussian::new(
                conditions.seed,
                conditions.channel,
                &contributor.name,
                &cause,
            ),
            shaper: FlickerShaper::new(rate),
            scale: (contributor.density * contributor.corner * rate / 2.0).sqrt(),
            stride,
            phase: stride,
            value: 0.0,
            slope: 0.0,
        }
    }

    fn add_to(&mut self, block: &mut [f64]) {
        for x in block {
            if self.phase == self.stride {
                self.phase = 0;
                let next = self.scale * self.shaper.shape(self.stream.draw());
                self.slope = (next - self.value) / f64::from(self.stride);
            }
            self.phase += 1;
            self.value += self.slope;
            *x += self.value;
        }
    }
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
            flicker.add_to(&mut self.buffer);
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
