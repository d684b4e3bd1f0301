//! Lights that are not ours, as photocurrent on the detector: its mean and its flicker.

use std::f64::consts::{FRAC_PI_2, TAU};

use super::air::Optics;
use super::{Conditions, Reading};
use crate::design::{DesignError, Section};
use crate::physics::sunlight;
use crate::quantity::Dimension;

/// One lamp, or the sky.
pub struct Lamp {
    path: String,
    kind: String,
    /// Mean photocurrent, A.
    mean: f64,
    /// Hz
    mains: f64,
    /// Relative flicker: (frequency Hz, depth, phase rad) of each line, value mean·depth·cos(2πft + phase).
    lines: Vec<(f64, f64, f64)>,
}

impl Lamp {
    /// From `[[ambient]]`; `responsivity` in A/W, `wavelength` of the emitter in m.
    ///
    /// The detector's responsivity at the emitter's wavelength serves for the lamp's light too, as it passes the same filter;
    /// without a filter a broad spectrum is overstated by up to a factor of two.
    ///
    /// # Errors
    /// A daylight with neither a value of its own nor a filter to take it from, or a filter outside the table of sunlight.
    pub fn new(section: &Section, optics: &Optics, responsivity: f64) -> Result<Self, DesignError> {
        let kind = section.kind.clone().unwrap_or_default();
        let transmission = optics.filter.map_or(1.0, |f| f.transmission);
        let per_irradiance = optics.area * optics.concentrator * transmission * responsivity;
        let mean = if let Some(photocurrent) = section.optional("photocurrent") {
            photocurrent
        } else if let Some(irradiance) = section.optional("irradiance") {
            irradiance * per_irradiance
        } else {
            let Some(filter) = optics.filter else {
                return Err(section.fault(
                    section
                        .given("spectral_irradiance")
                        .then_some("spectral_irradiance"),
                    "a light known by its spectrum needs the width of an optical filter",
                    "give `irradiance` or `photocurrent` here, or `filter` under [receiver.optics]",
                ));
            };
            let density = match section.optional("spectral_irradiance") {
                Some(density) => density,
                None => sunlight::spectral_irradiance(filter.centre, section.optional_word("sun") == Some("in"))
                    .ok_or_else(|| {
                        section.fault(
                            None,
                            "sunlight is known here from 400 nm to 1100 nm only, and the filter lies outside",
                            "give `spectral_irradiance` or `irradiance`",
                        )
                    })?,
            };
            density * filter.width * per_irradiance
        };
        let mut lines = Vec::new();
        if kind == "incandescent" {
            // The filament follows the power, which beats at twice the mains.
            let phase = section.number("phase");
            // It starts in the middle of its swing, so that a settled run sees no step.
            lines.push((
                2.0 * section.number("mains"),
                section.number("ripple"),
                2.0 * phase - FRAC_PI_2,
            ));
        }
        Ok(Self {
            path: section.path.clone(),
            kind,
            mean,
            mains: section.number("mains"),
            lines,
        })
    }

    /// Mean photocurrent, A.
    pub fn mean(&self) -> f64 {
        self.mean
    }

    /// Mains frequency that it hangs on, Hz.
    pub fn mains(&self) -> f64 {
        self.mains
    }

    /// Its place in the design.
    pub fn path(&self) -> &str {
        &self.path
    }

    /// Its kind.
    pub fn kind(&self) -> &str {
        &self.kind
    }

    /// Name of its flicker among the noise contributors.
    pub fn hum_name(&self) -> String {
        format!("{}.hum", self.path)
    }

    /// What it lays on the detector.
    pub fn operating_point(&self) -> Vec<Reading> {
        vec![Reading {
            name: "photocurrent",
            value: self.mean,
            dimension: Dimension::Ampere,
        }]
    }

    /// The lines of its flicker: frequency, Hz, and amplitude, A peak.
    pub fn lines(&self) -> impl Iterator<Item = (f64, f64)> + '_ {
        self.lines
            .iter()
            .map(|&(f, depth, _)| (f, self.mean * depth))
            .filter(|(_, amplitude)| *amplitude != 0.0)
    }

    /// The lamp in time: photocurrent away from its mean; none where it stands still or is silent.
    pub fn flicker(&self, conditions: &Conditions) -> Option<Flicker> {
        let sounds = conditions.lamps && conditions.sounds(&self.hum_name());
        let lines: Vec<Line> = self
            .lines
            .iter()
            .filter(|l| l.1 * self.mean != 0.0)
            .map(|&(frequency, depth, phase)| {
                Line::new(frequency / conditions.rate, self.mean * depth, phase)
            })
            .collect();
        (sounds && !lines.is_empty()).then_some(Flicker { lines })
    }
}

/// A lamp's flicker that runs.
pub struct Flicker {
    lines: Vec<Line>,
}

impl Flicker {
    /// Adds the next samples, A, to `block`.
    pub fn add_to(&mut self, block: &mut [f64]) {
        for line in &mut self.lines {
            block.iter_mut().for_each(|x| *x += line.next());
        }
    }
}

/// A cosine by rotation, set right again by the exact phase every so often.
struct Line {
    turns_a_sample: f64,
    amplitude: f64,
    phase: f64,
    sample: u64,
    step: (f64, f64),
    now: (f64, f64),
}

impl Line {
    /// Samples between two exact phases: rounding grows to about 1e-14 in between.
    const RENEW: u64 = 64;

    fn new(turns_a_sample: f64, amplitude: f64, phase: f64) -> Self {
        let step = (TAU * turns_a_sample).sin_cos();
        Self {
            turns_a_sample,
            amplitude,
            phase,
            sample: 0,
            step: (step.1, step.0),
            now: (0.0, 0.0),
        }
    }

    fn next(&mut self) -> f64 {
        if self.sample.is_multiple_of(Self::RENEW) {
            let turns = (self.turns_a_sample * self.sample as f64).fract();
            let (s, c) = (TAU * turns + self.phase).sin_cos();
            self.now = (c, s);
        }
        self.sample += 1;
        let (c, s) = self.now;
        self.now = (
            c * self.step.0 - s * self.step.1,
            c * self.step.1 + s * self.step.0,
        );
        self.amplitude * c
    }
}
