//! A transistor stage: the common emitter with its collector load and what hangs on it.

mod base_loop;
mod in_time;
mod part;
mod quiescent;

pub use base_loop::BaseLoop;
pub use part::BipolarPart;

use num_complex::Complex64;
use std::f64::consts::TAU;

use super::noise::Contributor;
use super::wiring::{Branch, Drive, Load};
use super::{Conditions, Limit, Model, Reading, Runner, Share};
use crate::design::Section;
use crate::physics::bipolar::{CommonEmitter, State};
use crate::physics::noise::johnson_current;
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;
use quiescent::Quiescent;

/// A common-emitter stage on paper; inverting.
///
/// The base divider is taken to set the collector current to `bias` whatever stands before, and the bypass capacitor to be a
/// short at every frequency of the signal: neither has a corner here. The base loop is solved with the source's own resistance
/// (mid-band), so that a stage driven by a current is as straight as on the bench. What a bent base current leaves on the
/// coupling capacitor before the base shifts the bias, and blocks the stage after an overload. The collector node is solved
/// with the next stage's load, its coupling capacitor included.
///
/// In frequency: one input pole (C_π = g_m/(2π·f_T), and Miller's share of C_µ, at rest, against the whole source resistance) and
/// the collector node's lag, both linear. Good for poles above the audio band; a clipped stage really is faster than its pole, and
/// one out of saturation slower. The input shows no capacitance to the stage before: it is counted here.
pub struct TransistorStage {
    path: String,
    quiescent: Quiescent,
    /// As the quiescent's, with all of the base loop's resistance.
    law: CommonEmitter,
    /// Volts of the base loop per volt at the node before.
    input_gain: f64,
    input_pole: FirstOrderLaw,
    /// The coupling capacitor before the base.
    blocking: Option<Blocking>,
    /// The next stage's resistance behind its coupling capacitor.
    branch: Option<Branch>,
    /// Where the coupling capacitor's far side rests, V.
    next_rest: f64,
    lag: FirstOrderLaw,
    /// Noise voltages in the base loop, before the input pole.
    at_base: Vec<Contributor>,
    /// Noise currents drawn from the collector node.
    at_collector: Vec<Contributor>,
    warnings: Vec<String>,
}

/// What a coupling capacitor before the base does to the base loop besides its linear corner.
#[derive(Debug, Clone, Copy)]
struct Blocking {
    /// Rate at which it recovers while the base takes nothing, 1/s: 1/(C(R_source + R_divider)).
    leak: f64,
    /// Loop volts for each coulomb that the base takes, 1/F.
    stiffness: f64,
}

impl TransistorStage {
    /// What the stage shows to the one before it, with `next` behind it; `temperature` in K.
    pub fn input_load(section: &Section, next: &Load, temperature: f64) -> Load {
        let quiescent = Quiescent::new(section, next, temperature);
        Load {
            conductance: quiescent.input_conductance(),
            return_voltage: quiescent.base,
            ..Load::OPEN
        }
    }

    /// From its section, between `before` and `next`; `temperature` in K.
    pub fn new(section: &Section, before: &Drive, next: &Load, temperature: f64) -> Self {
        let quiescent = Quiescent::new(section, next, temperature);
        let part = quiescent.part;
        let shown = quiescent.input_conductance();
        let divider = quiescent.divider;
        let source = before.seen / (1.0 + before.seen * divider);
        let law = CommonEmitter {
            base_resistance: source + part.base_resistance,
            ..quiescent.law
        };
        // The node before was reckoned with the small-signal load: back to the open-circuit voltage, then to the divider's.
        let open_circuit = before.division(shown) * (1.0 + shown * before.seen);
        let mut stage = Self {
            path: section.path.clone(),
            input_gain: open_circuit / (1.0 + before.seen * divider),
            law,
            branch: next.branch,
            blocking: before.blocked.map(|c| {
                let divided = 1.0 + divider * before.seen;
                Blocking {
                    leak: divider / (c * divided),
                    stiffness: 1.0 / (c * divided * divided),
                }
            }),
            next_rest: next.return_voltage,
            input_pole: FirstOrderLaw::low_pass(f64::INFINITY),
            lag: FirstOrderLaw::low_pass(f64::INFINITY),
            at_base: Vec::new(),
            at_collector: Vec::new(),
            warnings: Vec::new(),
            quiescent,
        };
        let mid = stage.mid_band();
        let straight = CommonEmitter {
            base_resistance: 0.0,
            ..law
        };
        let miller = -mid * straight.tangent(mid.into()).0.re;
        let capacitance =
            part.input_capacitance(law.transconductance(), law.emitter_resistance, miller);
        let across = 1.0 / (1.0 / law.base_resistance + 1.0 / law.junction_resistance());
        stage.input_pole = FirstOrderLaw::low_pass(1.0 / (across * capacitance));
        let node = part.collector_capacitance + next.capacitance;
        // A saturated transistor without a resistor at its emitter holds the node: what rounding leaves of its impedance may have either sign.
        let held = stage.output_impedance(mid.into()).re.max(0.0);
        stage.lag = FirstOrderLaw::low_pass(1.0 / (held * node));
        stage.add_noises(before, temperature);
        stage.warn(before);
        stage
    }

    /// What it offers: a node solved with its load.
    pub fn drive(&self) -> Drive {
        let own = 1.0 / self.quiescent.collector_resistor;
        Drive {
            rest: self.quiescent.collector,
            series: 0.0,
            seen: 1.0 / (own + 1.0 / self.law.collector_resistance()),
            blocked: None,
        }
    }

    /// Load of the collector in mid-band, Ω.
    fn mid_band(&self) -> f64 {
        1.0 / (self.quiescent.conductance + self.branch.map_or(0.0, |b| 1.0 / b.resistance))
    }

    /// Load of the collector at `frequency` (Hz), Ω.
    fn load(&self, frequency: f64) -> Complex64 {
        let hung = Load {
            conductance: self.quiescent.conductance,
            branch: self.branch,
            ..Load::OPEN
        };
        1.0 / hung.admittance(frequency)
    }

    /// Impedance of the node whose load is `z`, Ω.
    fn output_impedance(&self, z: Complex64) -> Complex64 {
        z * (1.0 - z * self.law.tangent(z).1)
    }

    /// Output volts per volt in the base loop behind the input pole, at `frequency` (Hz).
    fn gain(&self, frequency: f64) -> Complex64 {
        let z = self.load(frequency);
        -z * self.law.tangent(z).0 * self.lag.at(frequency)
    }

    fn add_noises(&mut self, before: &Drive, temperature: f64) {
        let Self { law, quiescent, .. } = &*self;
        let inner = quiescent.part.base_resistance;
        let base_loop = BaseLoop::new(
            &self.path,
            law,
            inner,
            quiescent.divider,
            before,
            temperature,
        );
        let mid = self.mid_band().into();
        let by_emitter = if law.emitter_resistance > 0.0 {
            (mid * law.tangent(mid).0 / self.output_impedance(mid)).re
        } else {
            // No resistor, no noise of its own; a saturated transistor would make this nought over nought.
            0.0
        };
        let at_base = base_loop.outer(quiescent.divider);
        let mut at_collector = base_loop.behind(by_emitter, law.collector_noise_gain());
        at_collector.push(Contributor::white(
            format!("{}.collector_resistor", self.path),
            johnson_current(1.0 / quiescent.collector_resistor, temperature),
        ));
        self.at_base = at_base;
        self.at_collector = at_collector;
    }

    fn warn(&mut self, before: &Drive) {
        let Self {
            quiescent: q, path, ..
        } = &*self;
        let volt = |v| Dimension::Volt.show(v);
        let ampere = |i| Dimension::Ampere.show(i);
        let mut warnings = Vec::new();
        if q.saturated() {
            warnings.push(format!(
                "{path}: saturated at rest; the bias asks for {}, supply and resistors leave {}; no small signal passes",
                ampere(q.bias),
                ampere(q.law.collector_rest)
            ));
        }
        if q.base > q.rails.1 {
            warnings.push(format!(
                "{path}: the base has to rest at {}, above the supply's {}; no divider can set this bias",
                volt(q.base),
                volt(q.rails.1)
            ));
        }
        if before.blocked.is_none() {
            warnings.push(format!(
                "{path}: no coupling capacitor stands before the base ({} there, the base rests at {}); the divider is taken to hold the bias all the same",
                volt(before.rest),
                volt(q.base)
            ));
        }
        if self.input_pole.rate < TAU * 20e3 {
            warnings.push(format!(
                "{path}: the input turns at {}, inside the audio band (Miller capacitance against the source resistance)",
                Dimension::Hertz.show(self.input_pole.rate / TAU)
            ));
        }
        if q.part.too_slow() {
            warnings.push(format!(
                "{path}: a transition frequency of {} is below the model's range; only the input pole is counted",
                Dimension::Hertz.show(q.part.transition_frequency)
            ));
        }
        self.warnings = warnings;
    }
}

impl Model for TransistorStage {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "transistor, common emitter".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        let q = &self.quiescent;
        let reading = |name, value, dimension| Reading {
            name,
            value,
            dimension,
        };
        let mut readings = vec![
            reading(
                "collector current",
                self.law.collector_rest,
                Dimension::Ampere,
            ),
            reading("output", q.collector, Dimension::Volt),
            reading(
                "collector to emitter",
                q.collector - q.emitter,
                Dimension::Volt,
            ),
            reading("base", q.base, Dimension::Volt),
            reading(
                "gain",
                self.input_gain * -self.mid_band() * self.law.tangent(self.mid_band().into()).0.re,
                Dimension::Number,
            ),
            reading(
                "input resistance",
                1.0 / q.input_conductance(),
                Dimension::Ohm,
            ),
            reading("output resistance", self.drive().seen, Dimension::Ohm),
        ];
        if !self.input_pole.is_identity() {
            readings.push(reading(
                "input pole",
                self.input_pole.rate / TAU,
                Dimension::Hertz,
            ));
        }
        readings
    }

    fn curve(&self, x: f64) -> f64 {
        let z = self.mid_band();
        -z * self
            .law
            .solve(self.input_gain * x, 0.0, z, &State::REST)
            .collector
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.input_gain * self.input_pole.at(frequency) * self.gain(frequency)
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        let by_base = (self.input_pole.at(frequency) * self.gain(frequency)).norm_sqr();
        let z = self.load(frequency);
        let by_collector = (self.output_impedance(z) * self.lag.at(frequency)).norm_sqr();
        let base = self.at_base.iter().map(|c| c.share(frequency, by_base));
        let collector = self.at_collector.iter();
        base.chain(collector.map(|c| c.share(frequency, by_collector)))
            .collect()
    }

    fn limits(&self) -> Vec<Limit> {
        let z = self.mid_band();
        vec![
            Limit::Level {
                cause: "cut-off",
                at: z * self.law.collector_rest,
            },
            Limit::Level {
                cause: "saturation",
                at: -self.law.room * z / (z + self.law.emitter_resistance),
            },
        ]
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }

    fn slowest_time(&self) -> f64 {
        self.branch.map_or(0.0, |b| {
            b.capacitance * (b.resistance + 1.0 / self.quiescent.conductance)
        })
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        in_time::runner(self, conditions)
    }
}
