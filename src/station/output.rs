//! The far end: the load on the last stage, what a loudspeaker or headphone makes of its voltage, and the volts that become full scale.

use num_complex::Complex64;
use std::f64::consts::{SQRT_2, TAU};

use super::wiring::{Drive, Load};
use super::{Conditions, Model, Reading, Runner, Share};
use crate::design::Section as DesignSection;
use crate::physics::sound;
use crate::quantity::Dimension;
use crate::signal::pole_pair::{Section, SectionLaw};

/// A steady voltage across a voice coil that is worth a word, V (common practice: tens of millivolts).
const STEADY: f64 = 0.05;

/// An output: `impedance` on the last stage; `full_scale` peak volts become a sample of 1.
///
/// A loudspeaker's or headphone's impedance is taken as the resistance `impedance` at every frequency. Its sound follows the voltage
/// across it through a high-pass of second order at `resonance` with `quality` (a closed box: Small 1972, from memory) and
/// a low-pass of first order at `voice_coil`; the received samples are that shaped voltage over `full_scale`.
pub struct Output {
    path: String,
    kind: &'static str,
    gain: f64,
    shape: Vec<SectionLaw>,
    rest: f64,
    full_scale: f64,
    sound: Option<Sound>,
}

/// How loud a loudspeaker or headphone is.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Sound {
    /// dB re 20 µPa at 1 W (and 1 m).
    sensitivity: f64,
    /// Ω
    impedance: f64,
    /// Of the listener, m; none on the ear.
    pub distance: Option<f64>,
}

impl Sound {
    /// Predicted sound pressure level, dB re 20 µPa, unweighted, of `rms` volts of the output (its shaped voltage). −∞ of nothing.
    pub fn level(&self, rms: f64) -> f64 {
        let power = rms * rms / self.impedance;
        sound::level(self.sensitivity, power, self.distance.unwrap_or(1.0))
    }
}

impl Output {
    /// What it shows to the last stage.
    pub fn input_load(section: &DesignSection) -> Load {
        Load::resistor(section.number("impedance"), 0.0)
    }

    /// From the section `[output]`, behind `before`.
    pub fn new(section: &DesignSection, before: &Drive) -> Self {
        let load = Self::input_load(section);
        let impedance = section.number("impedance");
        let (kind, sound) = match section.kind.as_deref() {
            Some("loudspeaker") => (
                "loudspeaker",
                Some(Sound {
                    sensitivity: section.number("sensitivity"),
                    impedance,
                    distance: Some(section.number("distance")),
                }),
            ),
            Some("headphone") => (
                "headphone",
                Some(Sound {
                    // Stated at 1 mW.
                    sensitivity: section.number("sensitivity") + 30.0,
                    impedance,
                    distance: None,
                }),
            ),
            _ => ("line output", None),
        };
        let mut shape = Vec::new();
        if sound.is_some() {
            if let (Some(resonance), Some(quality)) =
                (section.optional("resonance"), section.optional("quality"))
            {
                shape.push(SectionLaw::high_pass(resonant(TAU * resonance, quality)));
            }
            let corner = TAU * section.number("voice_coil");
            if corner.is_finite() {
                shape.push(SectionLaw::low_pass(vec![(-corner).into()]));
            }
        }
        Self {
            path: section.path.clone(),
            kind,
            gain: before.division(load.signal_conductance()),
            shape,
            rest: before.loaded_rest(&load),
            full_scale: section.number("full_scale"),
            sound,
        }
    }

    /// Peak volts of a sample of 1.
    pub fn full_scale(&self) -> f64 {
        self.full_scale
    }

    /// How loud it is, where it sounds.
    pub fn sound(&self) -> Option<Sound> {
        self.sound
    }

    /// Predicted sound pressure level, dB re 20 µPa, of `rms` volts of the output; none of a line.
    pub fn sound_level(&self, rms: f64) -> Option<f64> {
        self.sound.map(|s| s.level(rms))
    }
}

/// The poles of s² + ω₀s/Q + ω₀².
fn resonant(rate: f64, quality: f64) -> Vec<Complex64> {
    let half = Complex64::from(0.5 / quality);
    let larger = half + (half * half - 1.0).sqrt();
    vec![-rate * larger, -rate / larger]
}

impl Model for Output {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        self.kind.into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        let mut readings = vec![Reading {
            name: "rest",
            value: self.rest,
            dimension: Dimension::Volt,
        }];
        if let Some(sound) = self.sound {
            readings.push(Reading {
                name: "full scale power",
                value: self.full_scale * self.full_scale / (2.0 * sound.impedance),
                dimension: Dimension::Watt,
            });
            readings.push(Reading {
                name: "full scale sound level",
                value: sound.level(self.full_scale / SQRT_2),
                dimension: Dimension::Decibel,
            });
        }
        readings
    }

    fn curve(&self, x: f64) -> f64 {
        self.gain * x
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.gain
            * self
                .shape
                .iter()
                .map(|s| s.at(frequency))
                .product::<Complex64>()
    }

    fn noise(&self, _: f64) -> Vec<Share> {
        Vec::new()
    }

    fn warnings(&self) -> Vec<String> {
        let coil = self.sound.filter(|_| self.rest.abs() > STEADY);
        let warning = coil.map(|sound| {
            format!(
                "{}: {} stands across the {} at rest and heats it with {}; a coupling stage before it blocks it",
                self.path,
                Dimension::Volt.show(self.rest),
                self.kind,
                Dimension::Watt.show(self.rest * self.rest / sound.impedance)
            )
        });
        warning.into_iter().collect()
    }

    fn slowest_time(&self) -> f64 {
        self.shape
            .iter()
            .map(SectionLaw::slowest_time)
            .fold(0.0, f64::max)
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        let mut shape: Vec<Section> = self
            .shape
            .iter()
            .map(|s| s.section(conditions.rate))
            .collect();
        if conditions.cold {
            // No voltage has stood across it so far.
            shape
                .iter_mut()
                .fold(-self.rest, |x, section| section.settle(x));
        }
        Box::new(OutputRunner {
            gain: self.gain,
            shape,
        })
    }
}

struct OutputRunner {
    gain: f64,
    shape: Vec<Section>,
}

impl Runner for OutputRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        if self.gain != 1.0 {
            block.iter_mut().for_each(|x| *x *= self.gain);
        }
        self.shape.iter_mut().for_each(|s| s.run(block));
    }
}
