//! A power amplifier: gain, rails, output current into its load, and what is left of a class-B gap.

use num_complex::Complex64;
use std::f64::consts::TAU;

use super::noise::{self, Contributor};
use super::opamp::{AmplifierRunner, OpampPart, OutputRest};
use super::wiring::{Drive, Load};
use super::{Conditions, Curves, Events, Limit, Model, Reading, Runner, Share};
use crate::design::Section;
use crate::physics::opamp::{closed_loop_bandwidth, gap};
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;

/// A power amplifier of fixed gain.
///
/// The op-amp's loop with a noise gain of `gain` (1 at least), held between the supply's rails and within `output_current`
/// into what it drives. `dead_zone` is half the gap at the output that its own feedback leaves: y = v − clamp(v, ±dead_zone). It rests in
/// the middle of a single supply (at 0 V of a split one) and takes its input by its deviation from rest, blocked inside by a
/// capacitor whose corner is taken as 0 Hz; the input draws no current.
///
/// With a gap the curve is flat at rest. The straight run and the transfer are those of the line that the curve runs along outside the gap,
/// so that all that the gap does counts as distortion.
pub struct PowerAmplifier {
    path: String,
    part: OpampPart,
    gain: f64,
    gap: f64,
    output: OutputRest,
    noise: Contributor,
    warnings: Vec<String>,
}

impl PowerAmplifier {
    /// What it shows to the stage before it.
    pub fn input_load() -> Load {
        Load::OPEN
    }

    /// From its section, before `next`.
    pub fn new(section: &Section, next: &Load) -> Self {
        let part = OpampPart::new(section);
        let gain = 10f64.powf(section.number("gain") / 20.0);
        let output = part.rest(part.reference, 0.0, next);
        let dead_zone = section.number("dead_zone");
        let volts = |v| Dimension::Volt.show(v);
        let mut warnings: Vec<String> = output.warning(&section.path).into_iter().collect();
        let steady = (output.rest - next.return_voltage) * next.conductance;
        if steady.abs() > 1e-3 {
            warnings.push(format!(
                "{}: it rests at {} and drives {} through what follows; a coupling stage blocks it",
                section.path,
                volts(output.rest),
                Dimension::Ampere.show(steady)
            ));
        }
        if dead_zone > 0.0 {
            warnings.push(format!(
                "{}: what stays within ±{} at its output vanishes in the class-B gap, noise with it; the noise budget and the band edges leave the gap out",
                section.path,
                volts(dead_zone)
            ));
        }
        Self {
            path: section.path.clone(),
            noise: Contributor::white(
                format!("{}.voltage_noise", section.path),
                (section.number("noise_voltage") * gain).powi(2),
            ),
            part,
            gain,
            gap: dead_zone,
            output,
            warnings,
        }
    }

    /// What it offers: a stiff node.
    pub fn drive(&self) -> Drive {
        Drive::stiff(self.output.rest)
    }

    fn noise_gain(&self) -> f64 {
        self.gain.max(1.0)
    }

    fn bandwidth(&self) -> f64 {
        closed_loop_bandwidth(self.part.gain_bandwidth, self.noise_gain())
    }

    fn loop_response(&self, frequency: f64) -> Complex64 {
        if self.output.stuck() {
            0.0.into()
        } else {
            FirstOrderLaw::low_pass(TAU * self.bandwidth()).at(frequency)
        }
    }
}

impl Model for PowerAmplifier {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "power amplifier".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        [
            ("output", self.output.rest, Dimension::Volt),
            ("room above", self.output.high.0, Dimension::Volt),
            ("room below", -self.output.low.0, Dimension::Volt),
            ("gain", self.gain, Dimension::Number),
            ("bandwidth", self.bandwidth(), Dimension::Hertz),
        ]
        .map(|(name, value, dimension)| Reading {
            name,
            value,
            dimension,
        })
        .to_vec()
    }

    fn curve(&self, x: f64) -> f64 {
        gap(self.gain * x + self.output.excess, self.gap)
            .clamp(self.output.low.0, self.output.high.0)
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.gain * self.loop_response(frequency)
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        vec![
            self.noise
                .share(frequency, self.loop_response(frequency).norm_sqr()),
        ]
    }

    fn limits(&self) -> Vec<Limit> {
        self.output.limits(self.part.slew)
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        let mut amplifier = AmplifierRunner::new(
            self.part.slope_law(),
            self.noise_gain(),
            conditions.rate,
            conditions.curves,
        );
        amplifier.gain = self.gain;
        amplifier.noises = noise::sources(std::slice::from_ref(&self.noise), conditions);
        let mut open = 0.0;
        match conditions.curves {
            Curves::Bent => {
                open = self.gap;
                // The limits act on the output, behind the gap.
                amplifier.low = self.output.low.0 - open;
                amplifier.high = self.output.high.0 + open;
                amplifier.excess = self.output.excess;
            }
            Curves::Straight if self.output.stuck() => amplifier.mute = true,
            Curves::Straight => {}
        }
        if conditions.cold {
            amplifier.start_at(-self.output.rest);
        }
        Box::new(PowerRunner {
            amplifier,
            gap: open,
        })
    }
}

struct PowerRunner {
    amplifier: AmplifierRunner,
    gap: f64,
}

impl Runner for PowerRunner {
    fn run(&mut self, block: &mut [f64], ambient: &[f64]) {
        self.amplifier.run(block, ambient);
        if self.gap > 0.0 {
            block.iter_mut().for_each(|x| *x = gap(*x, self.gap));
        }
    }

    fn events(&self) -> Events {
        self.amplifier.events()
    }
}
