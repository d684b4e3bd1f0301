//! A single line of a flicker.

use std::f64::consts::TAU;

/// A cosine by rotation, set right again by the exact phase every so often.
pub struct Rotation {
    turns_a_sample: f64,
    amplitude: f64,
    phase: f64,
    sample: u64,
    step: (f64, f64),
    now: (f64, f64),
}

impl Rotation {
    /// Samples between two exact phases: rounding grows to about 1e-14 in between.
    const RENEW: u64 = 64;

    /// From its frequency in turns a sample, its amplitude and its phase (rad).
    pub fn new(turns_a_sample: f64, amplitude: f64, phase: f64) -> Self {
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

    /// The next sample.
    #[inline]
    pub fn step(&mut self) -> f64 {
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
