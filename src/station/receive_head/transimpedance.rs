//! A photodiode into a transimpedance amplifier, on paper.
//!
//! The cathode stands at the inverting input, so that more light raises the output: reference + R_f·I. The loop is of second
//! order; with one-pole gain A = ω_t/s its transimpedance is R_f/(1 + s(R_f·C_f + 1/ω_t) + s²·R_f·(C_in + C_f)/ω_t) (Graeme 1996).
//!
//! An ambient servo is an integrator of the output's deviation from reference + offset, which sends its current through a
//! resistor into the inverting input: `servo.rs`.

use num_complex::Complex64;
use std::f64::consts::TAU;

use super::detector::{AroundRest, Detector};
use super::{LightAtRest, MovingShot};
use crate::design::Section;
use crate::physics::noise::{johnson_current, shot};
use crate::physics::opamp::SlopeLaw;
use crate::quantity::Dimension;
use crate::station::noise::{self, Contributor};
use crate::station::opamp::{OpampPart, OutputRest};
use crate::station::wiring::{Drive, Load};
use crate::station::{Conditions, Curves, Limit, Model, Reading, Runner, Share};

mod in_time;
mod near;
mod servo;

use servo::{AmbientServo, Quiescent};

/// Detector, amplifier and feedback on paper.
pub struct TransimpedanceHead {
    path: String,
    detector: Detector,
    diode: AroundRest,
    part: OpampPart,
    feedback: f64,
    feedback_capacitor: f64,
    light: LightAtRest,
    output: OutputRest,
    servo: Option<AmbientServo>,
    /// Inverting input at rest, counted from the reference, V.
    input: f64,
    /// Noise currents at the inverting input: the shot noise first.
    currents: Vec<Contributor>,
    voltage: Contributor,
}

impl TransimpedanceHead {
    /// From `[receiver.front_end]` with its detector, the light at rest and the `next` stage's load; `temperature` in K.
    pub fn new(
        section: &Section,
        detector: Detector,
        light: LightAtRest,
        next: &Load,
        temperature: f64,
    ) -> Self {
        let part = OpampPart::new(section);
        let feedback = section.number("feedback");
        let bias = section.number("bias");
        let drawn = |x: f64| {
            let (i, g) = detector.junction.reverse_current(bias + x);
            (light.total() + i + part.bias_current, g)
        };
        let Quiescent {
            output,
            input,
            servo,
        } = servo::rest(section, &part, feedback, next, drawn);
        let diode = detector.around(bias + input, false);
        let own = |cause: &str| format!("{}.{cause}", section.path);
        let mut currents = vec![
            Contributor::white(
                format!("{}.shot", detector.path),
                shot(light.total() + detector.junction.shot_current(bias + input)),
            ),
            Contributor::white(
                format!("{}.shunt", detector.path),
                johnson_current(detector.junction.shunt, temperature),
            ),
            Contributor::white(
                own("feedback"),
                johnson_current(1.0 / feedback, temperature),
            ),
            Contributor::white(own("current_noise"), part.current_noise.powi(2))
                .with_corner(part.current_corner),
        ];
        currents.extend(servo.iter().map(|s| {
            Contributor::white(
                own("ambient_servo"),
                johnson_current(s.conductance, temperature),
            )
        }));
        let voltage = Contributor::white(own("voltage_noise"), part.voltage_noise.powi(2))
            .with_corner(part.voltage_corner);
        Self {
            path: section.path.clone(),
            detector,
            diode,
            part,
            feedback,
            feedback_capacitor: section.number("feedback_capacitor"),
            light,
            output,
            servo,
            input,
            currents,
            voltage,
        }
    }

    /// What it offers: a stiff node.
    pub fn drive(&self) -> Drive {
        Drive::stiff(self.output.rest)
    }

    /// Capacitance at the inverting input besides the feedback's, F.
    fn input_capacitance(&self) -> f64 {
        self.diode.capacitance + self.part.input_capacitance
    }

    /// Conductance of the ambient servo's resistor, S; 0 without one.
    fn servo_conductance(&self) -> f64 {
        self.servo.as_ref().map_or(0.0, |s| s.conductance)
    }

    /// Admittances at `frequency` (Hz): of the input node to ground with the feedback, and of the feedback alone, S.
    fn admittances(&self, frequency: f64) -> (Complex64, Complex64) {
        let s = Complex64::new(0.0, TAU * frequency);
        let feedback = 1.0 / self.feedback + s * self.feedback_capacitor;
        (
            feedback
                + self.servo_conductance()
                + self.diode.conductance
                + s * self.input_capacitance(),
            feedback,
        )
    }

    /// Output volts per ampere of photocurrent at `frequency` (Hz), Ω.
    fn transimpedance(&self, frequency: f64) -> Complex64 {
        if self.output.stuck() {
            return 0.0.into();
        }
        let (node, feedback) = self.admittances(frequency);
        // 1/A = s/ω_t.
        let lag = Complex64::new(0.0, frequency / self.part.gain_bandwidth);
        let integrated = self.servo.as_ref().map_or(0.0.into(), |servo| {
            Complex64::new(0.0, -servo.corner() / frequency / self.feedback)
        });
        1.0 / (feedback + integrated + lag * node)
    }

    /// Natural frequency, Hz, and quality of the loop's pole pair; none for an unlimited amplifier.
    fn resonance(&self) -> Option<(f64, f64)> {
        let unity = TAU * self.part.gain_bandwidth;
        let total = self.input_capacitance() + self.feedback_capacitor;
        let natural = (unity / (self.feedback * total)).sqrt();
        let quality = 1.0
            / (natural
                * (self.feedback * self.feedback_capacitor
                    + (1.0 + self.feedback * (self.diode.conductance + self.servo_conductance()))
                        / unity));
        (natural.is_finite() && quality.is_finite()).then_some((natural / TAU, quality))
    }
}

impl Model for TransimpedanceHead {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "photodiode into a transimpedance amplifier".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        let mut readings = vec![
            Reading {
                name: "signal photocurrent",
                value: self.light.signal,
                dimension: Dimension::Ampere,
            },
            Reading {
                name: "ambient photocurrent",
                value: self.light.ambient,
                dimension: Dimension::Ampere,
            },
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
                name: "junction capacitance",
                value: self.diode.capacitance,
                dimension: Dimension::Farad,
            },
        ];
        readings.extend(self.servo.iter().flat_map(AmbientServo::readings));
        if let Some((frequency, quality)) = self.resonance() {
            readings.push(Reading {
                name: "loop frequency",
                value: frequency,
                dimension: Dimension::Hertz,
            });
            readings.push(Reading {
                name: "loop quality",
                value: quality,
                dimension: Dimension::Number,
            });
        }
        readings
    }

    fn curve(&self, x: f64) -> f64 {
        let asked = self.feedback * self.detector.responsivity * x + self.output.excess;
        asked.clamp(self.output.low.0, self.output.high.0)
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.detector.responsivity * self.transimpedance(frequency)
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        let z = self.transimpedance(frequency);
        let mut shares: Vec<Share> = self
            .currents
            .iter()
            .map(|c| c.share(frequency, z.norm_sqr()))
            .collect();
        let noise_gain = self.admittances(frequency).0 * z;
        shares.push(self.voltage.share(frequency, noise_gain.norm_sqr()));
        shares
    }

    fn limits(&self) -> Vec<Limit> {
        let mut limits = self.output.limits(self.part.slew);
        limits.push(Limit::Level {
            cause: "darkness",
            at: -self.feedback * self.light.total(),
        });
        limits
    }

    fn warnings(&self) -> Vec<String> {
        let mut warnings: Vec<String> = self.output.warning(&self.path).into_iter().collect();
        warnings.extend(self.servo.iter().filter_map(|s| s.warning(&self.path)));
        if let Some((frequency, quality)) = self.resonance()
            && quality > 1.4
        {
            warnings.push(format!(
                "{}: the loop rings at {} (quality {quality:.1}); a larger feedback_capacitor calms it",
                self.path,
                Dimension::Hertz.show(frequency)
            ));
        }
        warnings
    }

    fn slowest_time(&self) -> f64 {
        let servo = self.servo.as_ref().map_or(0.0, AmbientServo::time);
        servo.max(self.feedback * self.feedback_capacitor)
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        in_time::runner(self, conditions)
    }
}
