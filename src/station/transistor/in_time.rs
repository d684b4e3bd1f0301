//! The transistor stage in time.
//!
//! One state is the voltage behind the next stage's coupling capacitor, u' = (v − u)/(RC), with the collector's voltage v as
//! its input. Stepped by [`StepWeights`], whose newest weight makes the collector's load of this sample a plain resistance behind
//! a known voltage: one equation a sample. v grows by less than u does, so that the step is stable at any setting. The other is
//! the shift of the bias by what the base takes beyond the tangent's share; its newest weight is a resistance in the base loop.

use super::TransistorStage;
use crate::physics::bipolar::{CommonEmitter, Region, State};
use crate::signal::pole::{FirstOrder, StepWeights};
use crate::station::noise::{self, NoiseSource};
use crate::station::{Conditions, Curves, Events, Runner};

/// A collector current below this share of its rest counts as cut off.
const DARK: f64 = 0.01;
/// Samples after which the carried exponential is taken anew, so that roundings do not add up.
const RENEWAL: u32 = 256;

/// Builds the runner of `stage`.
pub fn runner(stage: &TransistorStage, conditions: &Conditions) -> Box<dyn Runner> {
    let mut output = Output::new(stage, conditions.rate);
    if conditions.cold && stage.branch.is_some() {
        // The coupling capacitor is discharged.
        output.start_at(stage.next_rest - stage.quiescent.collector);
    }
    let core = match conditions.curves {
        Curves::Bent => {
            let shift = Shift::new(stage, conditions.rate);
            Core::Bent {
                law: CommonEmitter {
                    base_resistance: stage.law.base_resistance + shift.weights.now,
                    ..stage.law
                },
                near: State::REST,
                age: 0,
                shift,
            }
        }
        Curves::Straight => {
            let (p, q) = stage.law.tangent(output.impedance.into());
            Core::Straight { p: p.re, q: q.re }
        }
    };
    Box::new(StageRunner {
        input_gain: stage.input_gain,
        at_base: noise::sources(&stage.at_base, conditions),
        input_pole: stage.input_pole.section(conditions.rate),
        at_collector: noise::sources(&stage.at_collector, conditions),
        currents: Vec::new(),
        core,
        output,
        lag: stage.lag.section(conditions.rate),
        least: (DARK - 1.0) * stage.law.collector_rest,
        events: Events::default(),
    })
}

struct StageRunner {
    input_gain: f64,
    at_base: Vec<NoiseSource>,
    input_pole: FirstOrder,
    at_collector: Vec<NoiseSource>,
    /// Noise currents drawn from the collector node, A.
    currents: Vec<f64>,
    core: Core,
    output: Output,
    lag: FirstOrder,
    /// Collector current away from rest at which it is cut off, A.
    least: f64,
    events: Events,
}

enum Core {
    Straight {
        p: f64,
        q: f64,
    },
    Bent {
        law: CommonEmitter,
        near: State,
        age: u32,
        shift: Shift,
    },
}

impl Runner for StageRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.input_gain);
        noise::add_all(&mut self.at_base, block);
        self.input_pole.run(block);
        self.currents.clear();
        self.currents.resize(block.len(), 0.0);
        noise::add_all(&mut self.at_collector, &mut self.currents);
        let z = self.output.impedance;
        match &mut self.core {
            Core::Straight { p, q } => {
                for (x, drawn) in block.iter_mut().zip(&self.currents) {
                    let k = self.output.open(*drawn);
                    *x = self.output.settle(k - z * (*p * *x + *q * k));
                }
            }
            Core::Bent {
                law,
                near,
                age,
                shift,
            } => {
                // Copies, that the compiler may keep in registers.
                let (held, mut at, mut charge, mut output) = (*law, *near, *shift, self.output);
                let least = self.least;
                let mut limited = 0;
                for (x, drawn) in block.iter_mut().zip(&self.currents) {
                    *age += 1;
                    if *age == RENEWAL {
                        *age = 0;
                        at.renew();
                    }
                    let k = output.open(*drawn);
                    at = held.solve(charge.loop_voltage(*x), k, z, &at);
                    charge.settle(held.base_rest * (at.drive - 1.0));
                    limited += u64::from(at.region != Region::Active || at.collector < least);
                    *x = output.settle(k - z * at.collector);
                }
                (*near, *shift, self.output) = (at, charge, output);
                self.events.clipped += limited;
            }
        }
        self.lag.run(block);
    }

    fn events(&self) -> Events {
        self.events
    }
}

/// The bias shift q: q' = −leak·q + stiffness·(tangent's base current − base current).
#[derive(Clone, Copy)]
struct Shift {
    /// With the stiffness in them, Ω.
    weights: StepWeights,
    /// Base current for each volt in the loop at rest, S.
    tangent: f64,
    shift: f64,
    /// Of this sample: what is known of the next shift, V, and the tangent's current, A.
    known: f64,
    straight: f64,
    last: f64,
    before: f64,
}

impl Shift {
    fn new(stage: &TransistorStage, rate: f64) -> Self {
        let step = 1.0 / rate;
        let (leak, stiffness) = stage.blocking.map_or((0.0, 0.0), |b| (b.leak, b.stiffness));
        let mut weights = StepWeights::new(leak, step);
        // A capacitor that a conducting base charges within a sample: first order, but stable.
        if stiffness * step > stage.law.base_resistance {
            weights = StepWeights {
                now: weights.now + weights.last + weights.before,
                last: 0.0,
                before: 0.0,
                ..weights
            };
        }
        Self {
            weights: StepWeights {
                now: weights.now * stiffness,
                last: weights.last * stiffness,
                before: weights.before * stiffness,
                ..weights
            },
            tangent: stage.law.base_tangent(stage.mid_band()),
            shift: 0.0,
            known: 0.0,
            straight: 0.0,
            last: 0.0,
            before: 0.0,
        }
    }

    /// Voltage in the base loop, V, whose resistance holds the newest weight, under the input's `v` (V).
    #[inline]
    fn loop_voltage(&mut self, v: f64) -> f64 {
        let w = &self.weights;
        self.known = w.decay * self.shift + w.last * self.last + w.before * self.before;
        self.straight = self.tangent * v;
        v + self.known + w.now * self.straight
    }

    /// Takes the base current away from rest, A.
    #[inline]
    fn settle(&mut self, base: f64) {
        let excess = self.straight - base;
        self.shift = self.known + self.weights.now * excess;
        self.before = self.last;
        self.last = excess;
    }
}

/// What hangs on the collector.
#[derive(Clone, Copy)]
struct Output {
    /// Ω, of this sample.
    impedance: f64,
    /// Conductance of the branch, S; 0 without one.
    conductance: f64,
    weights: StepWeights,
    /// Voltage behind the branch's capacitor, away from rest, V, and what is known of its next value.
    behind: f64,
    known: f64,
    last: f64,
    before: f64,
}

impl Output {
    fn new(stage: &TransistorStage, rate: f64) -> Self {
        let (conductance, lambda) = stage.branch.map_or((0.0, 0.0), |b| {
            (1.0 / b.resistance, 1.0 / (b.resistance * b.capacitance))
        });
        // Past this the capacitor settles within a sample whatever happens.
        let lambda = lambda.min(1e9 * rate);
        let plain = StepWeights::new(lambda, 1.0 / rate);
        let weights = StepWeights {
            now: plain.now * lambda,
            last: plain.last * lambda,
            before: plain.before * lambda,
            ..plain
        };
        Self {
            impedance: 1.0 / (stage.quiescent.conductance + (1.0 - weights.now) * conductance),
            conductance,
            weights,
            behind: 0.0,
            known: 0.0,
            last: 0.0,
            before: 0.0,
        }
    }

    fn start_at(&mut self, behind: f64) {
        self.behind = behind;
    }

    /// Voltage at the collector, V away from rest, if its current stood at rest; `drawn` (A) leaves the node besides.
    #[inline]
    fn open(&mut self, drawn: f64) -> f64 {
        let w = &self.weights;
        self.known = w.decay * self.behind + w.last * self.last + w.before * self.before;
        self.impedance * (self.known * self.conductance - drawn)
    }

    /// Takes the collector's voltage and gives it on.
    #[inline]
    fn settle(&mut self, v: f64) -> f64 {
        self.behind = self.known + self.weights.now * v;
        self.before = self.last;
        self.last = v;
        v
    }
}
