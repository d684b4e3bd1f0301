//! The transimpedance loop in time.
//!
//! Two states in deviations from rest: the charge of the inverting input, q = Q(x) + C_f·(x − y), q' = −(i + (x − y)/R_f), and
//! the output, y' = S(e − x) held between its limits. Both stages of the TR-BDF2 rule come down to one rising equation in x.
//! An ambient servo adds its own state z, z' = ω·y held between its limits, and the current (z − x)/R into the input.

use std::f64::consts::TAU;

use super::near::Near;
use super::servo::Integrator;
use super::{AmbientServo, AroundRest, Conditions, Curves, MovingShot, TransimpedanceHead, noise};
use crate::physics::opamp::SlopeLaw;
use crate::signal::implicit::{rising_root, tr_bdf2};
use crate::station::noise::NoiseSource;
use crate::station::{Events, Runner};

/// Gain-bandwidth beyond which an amplifier counts as this fast, in multiples of the sample rate: at a twentieth of the rate
/// its loop then errs by less than a millionth.
const FASTEST: f64 = 1e6;

/// Builds the runner of `head`.
pub fn runner(head: &TransimpedanceHead, conditions: &Conditions) -> Box<dyn Runner> {
    let straight = conditions.curves == Curves::Straight;
    let mut law = head.part.slope_law();
    law.unity = law.unity.min(TAU * FASTEST * conditions.rate);
    if law.linear == 0.0 {
        law.linear = law.slew / law.unity;
    }
    if straight {
        law = SlopeLaw {
            unity: law.unity,
            linear: f64::INFINITY,
            slew: f64::INFINITY,
        };
    }
    let (low, high) = if straight {
        (f64::NEG_INFINITY, f64::INFINITY)
    } else {
        (head.output.low.0, head.output.high.0)
    };
    let bias = head.diode.reverse;
    let mut amplifier = Loop {
        diode: head.detector.around(bias, straight),
        law,
        capacitance: head.part.input_capacitance,
        feedback_capacitor: head.feedback_capacitor,
        feedback: 1.0 / head.feedback,
        // A stuck output is pushed by what the input stands off.
        push: if straight {
            0.0
        } else {
            head.part.offset - head.input
        },
        servo: match &head.servo {
            Some(servo) if straight => servo.straight(),
            Some(servo) => servo.bent(),
            None => Integrator::default(),
        },
        low,
        high,
        near: None,
        k: tr_bdf2::IMPLICIT / conditions.rate,
        now: State::default(),
        light: [0.0; 2],
        voltage: [0.0; 2],
    };
    if amplifier.push == 0.0 {
        let passive = (
            amplifier.feedback,
            amplifier.feedback_capacitor,
            amplifier.capacitance,
        );
        amplifier.near = Near::new(
            (&head.detector, bias),
            law,
            passive,
            amplifier.servo,
            (low, high),
            amplifier.k,
            straight,
        );
    }
    if conditions.cold {
        amplifier.now.output = -(head.output.rest).clamp(low, high);
        amplifier.now.charge = -amplifier.feedback_capacitor * amplifier.now.output;
        amplifier.now.servo = head.servo.as_ref().map_or(0.0, AmbientServo::discharged);
    }
    Box::new(TransimpedanceRunner {
        responsivity: head.detector.responsivity,
        light: head.light.total(),
        shot: MovingShot::new(
            head.currents[0].name.clone(),
            head.detector.junction.shot_current(bias),
            conditions,
        ),
        currents: noise::sources(&head.currents[1..], conditions),
        voltage: head.voltage.source(conditions),
        volts: Vec::new(),
        mute: straight && head.output.stuck(),
        amplifier,
        events: Events::default(),
    })
}

struct TransimpedanceRunner {
    responsivity: f64,
    light: f64,
    shot: MovingShot,
    currents: Vec<NoiseSource>,
    voltage: Option<NoiseSource>,
    volts: Vec<f64>,
    mute: bool,
    amplifier: Loop,
    events: Events,
}

impl Runner for TransimpedanceRunner {
    fn run(&mut self, block: &mut [f64], ambient: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.responsivity);
        block.iter_mut().zip(ambient).for_each(|(x, a)| *x += a);
        self.shot.add_to(block, self.light);
        noise::add_all(&mut self.currents, block);
        self.volts.clear();
        self.volts.resize(block.len(), 0.0);
        noise::add_all(self.voltage.as_mut_slice(), &mut self.volts);
        for (x, e) in block.iter_mut().zip(&self.volts) {
            *x = self.amplifier.step(*x, *e, &mut self.events);
        }
        if self.mute {
            block.fill(0.0);
        }
    }

    fn events(&self) -> Events {
        self.events
    }
}

struct Loop {
    diode: AroundRest,
    law: SlopeLaw,
    /// The amplifier's own input capacitance, F.
    capacitance: f64,
    feedback_capacitor: f64,
    /// S
    feedback: f64,
    push: f64,
    servo: Integrator,
    low: f64,
    high: f64,
    near: Option<Near>,
    /// Weight of the implicit stages, s.
    k: f64,
    now: State,
    light: [f64; 2],
    voltage: [f64; 2],
}

/// State at a moment, in deviations from rest.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct State {
    pub input: f64,
    pub output: f64,
    pub charge: f64,
    /// The ambient servo's output, V.
    pub servo: f64,
    /// What the last stage's implicit part k·d/dt moved, in the same units.
    pub output_move: f64,
    pub charge_move: f64,
    pub servo_move: f64,
}

impl State {
    /// What the trapezoid stage starts from.
    #[inline(always)]
    pub fn onwards(&self) -> Known {
        Known {
            charge: self.charge + self.charge_move,
            output: self.output + self.output_move,
            servo: self.servo + self.servo_move,
        }
    }

    /// What the stage of the backward difference starts from, this state midway and `was` the first.
    #[inline(always)]
    pub fn after(&self, was: &Self) -> Known {
        let blend = |middle: f64, was: f64| tr_bdf2::MIDDLE * middle + tr_bdf2::FIRST * was;
        Known {
            charge: blend(self.charge, was.charge),
            output: blend(self.output, was.output),
            servo: blend(self.servo, was.servo),
        }
    }
}

/// What an implicit stage starts from.
#[derive(Clone, Copy)]
pub(super) struct Known {
    pub charge: f64,
    pub output: f64,
    pub servo: f64,
}

impl Loop {
    /// One implicit stage from the known parts of charge, output and servo, under light `i` (A) and noise `e` (V).
    fn solve(&self, known: Known, i: f64, e: f64, start: f64) -> State {
        let Known {
            charge,
            output,
            servo,
        } = known;
        let k = self.k;
        let integrator = &self.servo;
        let mut state = State::default();
        let mut slopes = (0.0, 0.0, 0.0, 0.0);
        let x = rising_root(start, 1e-9, |x| {
            let u = self.push + e - x;
            let (bend, bent) = self.law.bend(u);
            let (rate, steep) = (self.law.unity * u + bend, self.law.unity + bent);
            let free = output + k * rate;
            let y = free.clamp(self.low, self.high);
            let diode = self.diode.at(x);
            // Held at a limit, the output stands still.
            let (output_move, follows) = if y == free {
                (k * rate, -k * steep)
            } else {
                (0.0, 0.0)
            };
            let rise = k * integrator.rate * (y + integrator.push);
            let asked = servo + rise;
            let z = asked.clamp(integrator.low, integrator.high);
            let (servo_move, adds) = if z == asked {
                (rise, k * integrator.rate * follows)
            } else {
                (0.0, 0.0)
            };
            state = State {
                input: x,
                output: y,
                charge: diode.charge + self.capacitance * x + self.feedback_capacitor * (x - y),
                servo: z,
                output_move,
                charge_move: -k
                    * (i + diode.current
                        + (x - y) * self.feedback
                        + (x - z) * integrator.conductance),
                servo_move,
            };
            slopes = (
                diode.capacitance + self.capacitance + self.feedback_capacitor * (1.0 - follows),
                diode.conductance
                    + (1.0 - follows) * self.feedback
                    + (1.0 - adds) * integrator.conductance,
                follows,
                adds,
            );
            (
                state.charge - state.charge_move - charge,
                slopes.0 + k * slopes.1,
            )
        });
        // The last step is so small that the tangent carries everything over it.
        let step = x - state.input;
        State {
            input: x,
            output: state.output + slopes.2 * step,
            charge: state.charge + slopes.0 * step,
            servo: state.servo + slopes.3 * step,
            output_move: state.output_move + slopes.2 * step,
            charge_move: state.charge_move - k * slopes.1 * step,
            servo_move: state.servo_move + slopes.3 * step,
        }
    }

    /// One sample: the output away from rest, V.
    #[inline]
    fn step(&mut self, light: f64, voltage: f64, events: &mut Events) -> f64 {
        let now = (light, voltage);
        let midway = (
            tr_bdf2::midway(light, self.light[0], self.light[1]),
            tr_bdf2::midway(voltage, self.voltage[0], self.voltage[1]),
        );
        self.light = [light, self.light[0]];
        self.voltage = [voltage, self.voltage[0]];
        if let Some(near) = &self.near
            && let Some(end) = near.step(&self.now, midway, now)
        {
            self.now = end;
        } else {
            self.step_anywhere(midway, now, events);
        }
        self.now.output
    }

    /// One sample wherever the loop stands: an output held, a diode that conducts, a pair that slews.
    #[inline(never)]
    fn step_anywhere(&mut self, midway: (f64, f64), now: (f64, f64), events: &mut Events) {
        let was = self.now;
        let middle = self.solve(was.onwards(), midway.0, midway.1, was.input);
        let end = self.solve(middle.after(&was), now.0, now.1, middle.input);
        self.now = end;
        if end.output == self.low || end.output == self.high {
            events.clipped += 1;
        } else if end.output_move.abs() > 0.99 * self.law.slew * self.k {
            events.slewing += 1;
        }
    }
}
