//! The amplifier's loop in time: dv/dt = S(β(t − v)) with its rails.

use crate::physics::opamp::SlopeLaw;
use crate::signal::implicit::rising_root;
use crate::signal::pole::{FirstOrder, FirstOrderLaw, StepWeights};
use crate::station::noise::{self, NoiseSource};
use crate::station::{Curves, Events, Runner};

/// Above this many closed-loop radians a sample the loop's own lag is gone and the output follows at once, but for the slew rate.
const AT_ONCE: f64 = 1e4;

/// One amplifier in time.
///
/// The linear loop is integrated exactly between samples; what the input pair and the slew limit take away from it is a
/// further input of the same rule (an implicit exponential Adams–Moulton step). As the pair's slope never exceeds the
/// tangent's, the whole is never stiffer than the linear loop and the step is stable at any setting.
pub(in crate::station) struct AmplifierRunner {
    pub gain: f64,
    pub input: FirstOrder,
    pub noises: Vec<NoiseSource>,
    pub low: f64,
    pub high: f64,
    /// Output volts asked for at rest beyond what the limits allow.
    pub excess: f64,
    /// The tangent at a limit: nothing passes.
    pub mute: bool,
    core: Core,
    events: Events,
}

enum Core {
    /// The loop settles within a sample: the output follows, at most `step` volts a sample.
    AtOnce {
        step: f64,
        output: f64,
    },
    Straight(FirstOrder),
    Bent(Bent),
}

struct Bent {
    law: SlopeLaw,
    beta: f64,
    /// λ = 2π·GBW·β.
    lambda: f64,
    weights: StepWeights,
    output: f64,
    /// Forcing λt + (S(u) − 2πGBW·u) at the last two samples.
    last: f64,
    before: f64,
}

impl AmplifierRunner {
    pub fn new(law: SlopeLaw, noise_gain: f64, rate: f64, curves: Curves) -> Self {
        let beta = 1.0 / noise_gain;
        let lambda = law.unity * beta;
        let core = match curves {
            Curves::Straight => Core::Straight(
                FirstOrderLaw::low_pass(if lambda / rate > AT_ONCE {
                    f64::INFINITY
                } else {
                    lambda
                })
                .section(rate),
            ),
            Curves::Bent if lambda / rate > AT_ONCE => Core::AtOnce {
                step: law.slew / rate,
                output: 0.0,
            },
            Curves::Bent => Core::Bent(Bent {
                law,
                beta,
                lambda,
                weights: StepWeights::new(lambda, 1.0 / rate),
                output: 0.0,
                last: 0.0,
                before: 0.0,
            }),
        };
        Self {
            gain: 1.0,
            input: FirstOrderLaw::low_pass(f64::INFINITY).section(rate),
            noises: Vec::new(),
            low: f64::NEG_INFINITY,
            high: f64::INFINITY,
            excess: 0.0,
            mute: false,
            core,
            events: Events::default(),
        }
    }

    /// Puts the output at `output` volts from rest.
    pub fn start_at(&mut self, output: f64) {
        match &mut self.core {
            Core::AtOnce { output: v, .. } => *v = output,
            // A unit-gain low-pass is rate·state.
            Core::Straight(section) => section.start_output(output),
            Core::Bent(bent) => bent.output = output,
        }
    }
}

impl Bent {
    /// One sample: the loop asked for `target` volts.
    #[inline]
    fn step(&mut self, target: f64, low: f64, high: f64, events: &mut Events) -> f64 {
        let Self {
            law,
            beta,
            lambda,
            weights: w,
            ..
        } = *self;
        let known = w.decay * self.output
            + w.last * self.last
            + w.before * self.before
            + w.now * lambda * target;
        // v = known + now·(S(u) − a·u), u = β(target − v); without the bend it is the linear loop, and near it two steps settle it.
        let mut v = known;
        let mut settled = false;
        for _ in 0..3 {
            let (bend, slope) = law.bend(beta * (target - v));
            let step = (v - known - w.now * bend) / (1.0 + w.now * beta * slope);
            v -= step;
            settled = step.abs() <= 1e-13 * (1.0 + target.abs());
            if settled {
                break;
            }
        }
        if !settled {
            v = rising_root(self.output, 1e-13 * (1.0 + target.abs()), |v| {
                let (bend, slope) = law.bend(beta * (target - v));
                (v - known - w.now * bend, 1.0 + w.now * beta * slope)
            });
        }
        let held = v.clamp(low, high);
        let forcing = if held != v {
            events.clipped += 1;
            // Held: whatever the pair pushes, the output stands still.
            lambda * held
        } else {
            let u = beta * (target - v);
            let bend = law.bend(u).0;
            events.slewing += u64::from((law.unity * u + bend).abs() > 0.99 * law.slew);
            lambda * target + bend
        };
        self.before = self.last;
        self.last = forcing;
        self.output = held;
        held
    }
}

impl Runner for AmplifierRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        self.input.run(block);
        block
            .iter_mut()
            .for_each(|x| *x = *x * self.gain + self.excess);
        noise::add_all(&mut self.noises, block);
        if self.mute {
            block.fill(0.0);
            return;
        }
        let (low, high) = (self.low, self.high);
        match &mut self.core {
            Core::Straight(section) => section.run(block),
            Core::AtOnce { step, output } => {
                for x in block {
                    let held = x.clamp(low, high);
                    self.events.clipped += u64::from(held != *x);
                    let move_by = held - *output;
                    self.events.slewing += u64::from(move_by.abs() > *step);
                    *output += move_by.clamp(-*step, *step);
                    *x = *output;
                }
            }
            Core::Bent(bent) => {
                for x in block {
                    *x = bent.step(*x, low, high, &mut self.events);
                }
            }
        }
    }

    fn events(&self) -> Events {
        self.events
    }
}
