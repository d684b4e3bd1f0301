//! Signals, records and readings.

use std::f64::consts::TAU;

use harklight::figures::Conditions as Taken;
use harklight::figures::distortion::{Distortion, DistortionMeter};
use harklight::link::Link;
use harklight::station::{Conditions, Curves, Model};
use num_complex::Complex64;

/// The first station at `path`.
pub fn station<'a>(link: &'a Link, path: &str) -> &'a dyn Model {
    let found = link.stations().iter().find(|s| s.path() == path);
    found
        .unwrap_or_else(|| panic!("no station at {path}"))
        .as_ref()
}

/// A quantity of a station's operating point.
pub fn reading(model: &dyn Model, name: &str) -> f64 {
    let point = model.operating_point();
    let found = point.iter().find(|r| r.name == name);
    found.unwrap_or_else(|| panic!("no reading {name}")).value
}

/// A run at `rate` Hz with bent curves and nothing random.
pub fn quiet(rate: f64) -> Conditions {
    Conditions {
        rate,
        curves: Curves::Bent,
        noise: false,
        lamps: false,
        seed: 1,
        channel: 0,
        fades: false,
        start: 0.0,
        cold: false,
        silence: Vec::new(),
    }
}

/// What a fresh runner of `model` makes of `input`.
pub fn run(model: &dyn Model, conditions: &Conditions, input: &[f64]) -> Vec<f64> {
    let mut block = input.to_vec();
    model.runner(conditions).run(&mut block, &[]);
    block
}

/// A sine of `peak` at `frequency` Hz, phase 0, in its own right without any onset.
pub fn tone(rate: f64, frequency: f64, peak: f64, samples: usize) -> Vec<f64> {
    (0..samples)
        .map(|n| peak * (TAU * (frequency * n as f64 / rate).fract()).sin())
        .collect()
}

/// Complex amplitude of `frequency` (Hz) in a record of whole periods.
pub fn phasor(record: &[f64], rate: f64, frequency: f64) -> Complex64 {
    let sum: Complex64 = record
        .iter()
        .enumerate()
        .map(|(n, x)| x * Complex64::from_polar(1.0, -TAU * (frequency * n as f64 / rate).fract()))
        .sum();
    sum * 2.0 / record.len() as f64
}

pub fn rms(record: &[f64]) -> f64 {
    (record.iter().map(|x| x * x).sum::<f64>() / record.len() as f64).sqrt()
}

pub fn largest(record: &[f64]) -> f64 {
    record.iter().fold(0.0f64, |m, x| m.max(x.abs()))
}

/// Harmonics up to `top` Hz of a settled record under a tone.
pub fn distortion(record: &[f64], rate: f64, frequency: f64, top: f64) -> Distortion {
    let taken = Taken {
        rate,
        tone: frequency,
        band: (frequency / 2.0, top),
    };
    DistortionMeter::new(taken, record.len())
        .and_then(|meter| meter.harmonics(record))
        .unwrap()
}

/// Sines of equal size on multiples of 20 Hz, their phases spread so that the peaks do not meet.
pub struct Multisine {
    rate: f64,
    pub frequencies: Vec<f64>,
}

impl Multisine {
    /// Distance of the grid, Hz.
    const GRID: f64 = 20.0;
    const CANDIDATES: [f64; 14] = [
        20.0, 40.0, 80.0, 160.0, 320.0, 640.0, 1000.0, 2000.0, 3200.0, 5000.0, 8000.0, 12_000.0,
        16_000.0, 20_000.0,
    ];

    /// At `rate` Hz, up to `top` Hz.
    pub fn new(rate: f64, top: f64) -> Self {
        let frequencies = Self::CANDIDATES.into_iter().filter(|f| *f <= top).collect();
        Self { rate, frequencies }
    }

    /// `seconds` of it, each sine of amplitude `peak`/count, so that the sum stays within `peak`.
    pub fn samples(&self, peak: f64, seconds: f64) -> Vec<f64> {
        let count = self.frequencies.len() as f64;
        let mut samples = vec![0.0; (seconds * self.rate) as usize];
        for (k, f) in self.frequencies.iter().enumerate() {
            let phase = std::f64::consts::PI * (k * k) as f64 / count;
            for (n, x) in samples.iter_mut().enumerate() {
                *x += peak / count * (TAU * (f * n as f64 / self.rate).fract() + phase).sin();
            }
        }
        samples
    }

    /// Output over input at each frequency, from the last grid period of both.
    pub fn response(&self, input: &[f64], output: &[f64]) -> Vec<Complex64> {
        let length = (self.rate / Self::GRID).round() as usize;
        let tail = |record: &[f64]| record[record.len() - length..].to_vec();
        let (input, output) = (tail(input), tail(output));
        self.frequencies
            .iter()
            .map(|&f| phasor(&output, self.rate, f) / phasor(&input, self.rate, f))
            .collect()
    }
}
