//! An operational-amplifier stage: the loop of finite gain-bandwidth, slew, rails and output current on paper.

mod loop_in_time;
mod part;

pub(super) use loop_in_time::AmplifierRunner;
pub use part::{OpampPart, OutputRest};

use num_complex::Complex64;
use std::f64::consts::TAU;

use super::noise::{self, Contributor};
use super::wiring::{Drive, Load};
use super::{Conditions, Curves, Limit, Model, Reading, Runner, Share};
use crate::design::{DesignError, Section};
use crate::physics::noise::johnson;
use crate::physics::opamp::closed_loop_bandwidth;
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;

/// One amplifier with its feedback. A stage of several equal amplifiers is several of these in a row.
///
/// The loop: dv/dt = S(β(t − v)), t the output the resistors ask for, β = 1/noise gain, S the input pair's slope law; the
/// output held between the rails and within the output current, the integrator with it. The input capacitance of an inverting
/// stage is left out of the loop: good while 1/(2π·(feedback ∥ ground)·C_in) lies above the closed-loop bandwidth, and a warning says where it does not.
pub struct OpampStage {
    path: String,
    unit: usize,
    inverting: bool,
    part: OpampPart,
    /// Output volts asked for per volt at the node before (divider included).
    gain: f64,
    noise_gain: f64,
    input: FirstOrderLaw,
    output: OutputRest,
    contributors: Vec<Contributor>,
    warnings: Vec<String>,
}

impl OpampStage {
    fn inverting(section: &Section) -> bool {
        section.word("connection") == "inverting"
    }

    /// What the stage shows to the one before it.
    pub fn input_load(section: &Section) -> Load {
        let part = OpampPart::new(section);
        let reference = part.reference;
        if Self::inverting(section) {
            Load::resistor(section.number("ground"), reference)
        } else {
            let bias = section.optional("bias_resistance").unwrap_or(f64::INFINITY);
            Load {
                capacitance: part.input_capacitance,
                ..Load::resistor(bias, reference)
            }
        }
    }

    /// From its section, as the `unit`-th of its equal amplifiers, between `before` and `next`; `temperature` in K.
    ///
    /// # Errors
    /// Where a capacitor drives the non-inverting input and nothing gives it a DC path.
    pub fn new(
        section: &Section,
        unit: usize,
        before: &Drive,
        next: &Load,
        temperature: f64,
    ) -> Result<Self, DesignError> {
        let part = OpampPart::new(section);
        let inverting = Self::inverting(section);
        let (feedback, ground) = (section.number("feedback"), section.number("ground"));
        let load = Self::input_load(section);
        if !inverting && before.blocked.is_some() && load.conductance == 0.0 {
            return Err(section.fault(
                None,
                "the non-inverting input has no DC path: a capacitor drives it and `bias_resistance` is not given",
                "add bias_resistance = \"100 kΩ\" (to the reference) to this stage",
            ));
        }
        let reference = part.reference;
        let name = |cause: &str| format!("{}.{cause}", section.path);
        let node = if before.blocked.is_some() {
            before.rest
        } else {
            before.loaded_rest(&load)
        };
        let division = before.division(load.conductance);

        // Gains: of the signal, and of what stands at the amplifier's own input.
        let source = if inverting {
            ground + before.seen
        } else {
            ground
        };
        let noise_gain = 1.0 + feedback / source;
        let gain = division
            * if inverting {
                -feedback / ground
            } else {
                1.0 + feedback / ground
            };

        // Quiescent output. A capacitor before an inverting input opens its source at DC.
        let dc_noise_gain = if inverting && before.blocked.is_some() {
            1.0
        } else {
            noise_gain
        };
        let bias_at_input = if inverting {
            0.0
        } else {
            let source = if before.blocked.is_some() {
                f64::INFINITY
            } else {
                before.seen
            };
            part.bias_current / (1.0 / source + load.conductance)
        };
        let asked = if inverting {
            let through = if before.blocked.is_some() {
                0.0
            } else {
                feedback / ground
            };
            reference - through * (node - reference)
        } else {
            reference + noise_gain * (node - bias_at_input - reference)
        } + dc_noise_gain * part.offset
            + part.bias_current * feedback;

        // The feedback path draws its current to the reference (the virtual ground, when inverting).
        let feedback_resistance = if inverting {
            feedback
        } else {
            feedback + ground
        };
        let feedback_conductance = if feedback_resistance > 0.0 {
            1.0 / feedback_resistance
        } else {
            0.0
        };
        let output = part.rest(asked, feedback_conductance, next);

        let mut warnings: Vec<String> = output.warning(&section.path).into_iter().collect();
        let parallel = 1.0 / (1.0 / feedback + 1.0 / source);
        let closed_loop = closed_loop_bandwidth(part.gain_bandwidth, noise_gain);
        let input_corner = 1.0 / (TAU * parallel * part.input_capacitance);
        if input_corner < closed_loop && input_corner < 1e6 {
            warnings.push(format!(
                "{}: the input capacitance with the feedback resistors turns at {}, inside the loop's {}; the model leaves this out",
                section.path,
                Dimension::Hertz.show(input_corner),
                Dimension::Hertz.show(closed_loop)
            ));
        }

        let contributors = part.contributors(&name, unit, || {
            let mut list = Vec::new();
            // The voltage noise sees the noise gain, which a series capacitor lowers towards 1.
            let by_noise_gain = match (inverting, before.blocked) {
                (true, Some(c)) => {
                    FirstOrderLaw::shelf(1.0, 1.0 / (c * (source + feedback)), 1.0 / (c * source))
                }
                _ => FirstOrderLaw {
                    direct: noise_gain,
                    residue: 0.0,
                    rate: 1.0,
                },
            };
            list.push((
                "voltage_noise",
                part.voltage_noise,
                part.voltage_corner,
                Some(by_noise_gain),
            ));
            list.push((
                "current_noise",
                (part.current_noise * feedback).powi(2).sqrt(),
                part.current_corner,
                None,
            ));
            if !inverting {
                let z = source_impedance(before, &load);
                let seen = FirstOrderLaw {
                    direct: z.direct * noise_gain,
                    residue: z.residue * noise_gain,
                    rate: z.rate,
                };
                list.push((
                    "source_current_noise",
                    part.current_noise,
                    part.current_corner,
                    Some(seen),
                ));
                list.push((
                    "bias_resistance",
                    johnson_current_amplitude(load.conductance, temperature),
                    0.0,
                    Some(seen),
                ));
            }
            let resistors = johnson(feedback, temperature)
                + if ground.is_finite() {
                    johnson(ground, temperature) * (feedback / source).powi(2)
                } else {
                    0.0
                };
            list.push(("resistors", resistors.sqrt(), 0.0, None));
            list
        });

        let input = if inverting || before.series == 0.0 {
            FirstOrderLaw::low_pass(f64::INFINITY)
        } else {
            let across = before.seen / (1.0 + before.seen * load.conductance);
            FirstOrderLaw::low_pass(1.0 / (across * part.input_capacitance))
        };
        Ok(Self {
            path: section.path.clone(),
            unit,
            inverting,
            gain,
            noise_gain,
            input,
            output,
            contributors,
            warnings,
            part,
        })
    }

    /// What it offers: a stiff node.
    pub fn drive(&self) -> Drive {
        Drive::stiff(self.output.rest)
    }

    /// Closed-loop rate 2π·GBW/noise gain, rad/s; may be infinite.
    fn rate(&self) -> f64 {
        TAU * closed_loop_bandwidth(self.part.gain_bandwidth, self.noise_gain)
    }

    fn loop_response(&self, frequency: f64) -> Complex64 {
        if self.output.stuck() {
            0.0.into()
        } else {
            FirstOrderLaw::low_pass(self.rate()).at(frequency)
        }
    }
}

/// Amplitude density of a conductance's own noise current, A/√Hz.
fn johnson_current_amplitude(conductance: f64, temperature: f64) -> f64 {
    crate::physics::noise::johnson_current(conductance, temperature).sqrt()
}

/// Impedance at a non-inverting input: the bias resistance across what drives it, Ω, as a first-order law.
fn source_impedance(before: &Drive, load: &Load) -> FirstOrderLaw {
    let direct = before.seen / (1.0 + before.seen * load.conductance);
    match before.blocked {
        Some(c) => {
            let bias = 1.0 / load.conductance;
            let rate = 1.0 / (c * (bias + before.seen));
            FirstOrderLaw {
                direct,
                residue: (bias - direct) * rate,
                rate,
            }
        }
        None => FirstOrderLaw {
            direct,
            residue: 0.0,
            rate: 1.0,
        },
    }
}

impl Model for OpampStage {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        let connection = if self.inverting {
            "inverting"
        } else {
            "non-inverting"
        };
        if self.unit == 0 {
            format!("op-amp, {connection}")
        } else {
            format!("op-amp, {connection}, amplifier {}", self.unit + 1)
        }
    }

    fn operating_point(&self) -> Vec<Reading> {
        vec![
            Reading {
                name: "output",
                value: self.output.rest,
                dimension: Dimension::Volt,
            },
            Reading {
                name: "room above",
                value: self.output.high.0,
                dimension: Dimension::Volt,
            },
            Reading {
                name: "room below",
                value: -self.output.low.0,
                dimension: Dimension::Volt,
            },
            Reading {
                name: "gain",
                value: self.gain,
                dimension: Dimension::Number,
            },
            Reading {
                name: "noise gain",
                value: self.noise_gain,
                dimension: Dimension::Number,
            },
            Reading {
                name: "bandwidth",
                value: self.rate() / TAU,
                dimension: Dimension::Hertz,
            },
        ]
    }

    fn curve(&self, x: f64) -> f64 {
        (self.gain * x + self.output.excess).clamp(self.output.low.0, self.output.high.0)
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.gain * self.input.at(frequency) * self.loop_response(frequency)
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        let gain_squared = self.loop_response(frequency).norm_sqr();
        self.contributors
            .iter()
            .map(|c| c.share(frequency, gain_squared))
            .collect()
    }

    fn limits(&self) -> Vec<Limit> {
        self.output.limits(self.part.slew)
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        let mut runner = AmplifierRunner::new(
            self.part.slope_law(),
            self.noise_gain,
            conditions.rate,
            conditions.curves,
        );
        runner.gain = self.gain;
        runner.input = self.input.section(conditions.rate);
        runner.noises = noise::sources(&self.contributors, conditions);
        match conditions.curves {
            Curves::Bent => {
                runner.low = self.output.low.0;
                runner.high = self.output.high.0;
                runner.excess = self.output.excess;
            }
            // A tangent at a limit is flat: nothing passes.
            Curves::Straight if self.output.stuck() => runner.mute = true,
            Curves::Straight => {}
        }
        if conditions.cold {
            runner.start_at(-self.output.rest);
        }
        Box::new(runner)
    }
}
