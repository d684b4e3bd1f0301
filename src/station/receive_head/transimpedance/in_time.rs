//! The transimpedance loop in time.
//!
//! Two states in deviations from rest: the charge of the inverting input, q = Q(x) + C_f·(x − y), q' = −(i + (x − y)/R_f), and
//! the output, y' = S(e − x) held between its limits. Both stages of the TR-BDF2 rule come down to one rising equation in x.
//! An ambient servo adds its own state z, z' = ω·y held between its limits, and the current (z − x)/R into the input.

use std::f64::consts::TAU;

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
        k: tr_bdf2::IMPLICIT / conditions.rate,
        now: State::default(),
        light: [0.0; 2],
        voltage: [0.0; 2],
    };
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
    /// Weight of the implicit stages, s.
    k: f64,
    now: State,
    light: [f64; 2],
    voltage: [f64; 2],
}

/// State at a moment, in deviations from rest.
#[derive(Debug, Clone, Copy, Default)]
struct State {
    input: f64,
    output: f64,
    charge: f64,
    /// dq/dt, A.
    flow: f64,
    /// dy/dt, V/s.
    slope: f64,
    /// The ambient servo's output, V, and its slope, V/s.
    servo: f64,
    servo_slope: f64,
}

/// What an implicit stage starts from.
#[derive(Clone, Copy)]
struct Known {
    charge: f64,
    output: f64,
    servo: f64,
}

impl Loop {
    /// One implicit stage from the known parts of charge, output and servo, under light `i` (A) and noise `e` (V).
    #[inline]
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
            let (slope, follows) = if y == free {
                (rate, -k * steep)
            } else {
                (0.0, 0.0)
            };
            let rise = integrator.rate * (y + integrator.push);
            let asked = servo + k * rise;
            let z = asked.clamp(integrator.low, integrator.high);
            let (servo_slope, adds) = if z == asked {
                (rise, k * integrator.rate * follows)
            } else {
                (0.0, 0.0)
            };
            state = State {
                input: x,
                output: y,
                charge: diode.charge + self.capacitance * x + self.feedback_capacitor * (x - y),
                flow: -(i
                    + diode.current
                    + (x - y) * self.feedback
                    + (x - z) * integrator.conductance),
                slope,
                servo: z,
                servo_slope,
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
                state.charge - k * state.flow - charge,
                slopes.0 + k * slopes.1,
            )
        });
        // The last step is so small that the tangent carries everything over it.
        let step = x - state.input;
        State {
            input: x,
            output: state.output + slopes.2 * step,
            charge: state.charge + slopes.0 * step,
            flow: state.flow - slopes.1 * step,
            slope: state.slope + slopes.2 / k * step,
            servo: state.servo + slopes.3 * step,
            servo_slope: state.servo_slope + slopes.3 / k * step,
        }
    }

    /// One sample: the output away from rest, V.
    #[inline]
    fn step(&mut self, light: f64, voltage: f64, events: &mut Events) -> f64 {
        let (i, e) = (
            tr_bdf2::midway(light, self.light[0], self.light[1]),
            tr_bdf2::midway(voltage, self.voltage[0], self.voltage[1]),
        );
        let was = self.now;
        let middle = self.solve(
            Known {
                charge: was.charge + self.k * was.flow,
                output: was.output + self.k * was.slope,
                servo: was.servo + self.k * was.servo_slope,
            },
            i,
            e,
            was.input,
        );
        let blend = |middle: f64, was: f64| tr_bdf2::MIDDLE * middle + tr_bdf2::FIRST * was;
        let end = self.solve(
            Known {
                charge: blend(middle.charge, was.charge),
                output: blend(middle.output, was.output),
                servo: blend(middle.servo, was.servo),
            },
            light,
            voltage,
            middle.input,
        );
        self.light = [light, self.light[0]];
        self.voltage = [voltage, self.voltage[0]];
        self.now = end;
        if end.output == self.low || end.output == self.high {
            events.clipped += 1;
        } else if end.slope.abs() > 0.99 * self.law.slew {
            events.slewing += 1;
        }
        end.output
    }
}
