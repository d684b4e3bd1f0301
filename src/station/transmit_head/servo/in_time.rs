//! The transmit head with its monitor loop in time.
//!
//! Two states in deviations from rest, the light behind the carriers' pole and the loop's output w; both stages of the TR-BDF2 rule come
//! down to one rising equation in the driver's volts. The junction's heat is that at the sample's start, as without the loop.

use super::{Balance, Servo};
use crate::signal::implicit::tr_bdf2;
use crate::signal::pole::{FirstOrder, StepWeights};
use crate::station::noise::{self, NoiseSource};
use crate::station::transmit_head::in_time::{Junction, count};
use crate::station::transmit_head::{Driver, Emitter, TransmitHead};
use crate::station::{Conditions, Curves, Events, Runner};

/// Builds the runner of `head` with its `servo`.
pub fn runner(servo: &Servo, head: &TransmitHead, conditions: &Conditions) -> Box<dyn Runner> {
    let k = tr_bdf2::IMPLICIT / conditions.rate;
    let share = |rate: f64| {
        let z = k * rate;
        if z.is_finite() { z / (1.0 + z) } else { 1.0 }
    };
    let law = match conditions.curves {
        Curves::Bent => Law::Bent(Box::new(Bent {
            driver: head.driver.clone(),
            emitter: head.emitter.clone(),
            input: head.rest.input,
            rest: head.rest.current,
            near: head.rest.current,
            limited: false,
            flux: head.rest.flux,
            heating: head.rest.heating,
            junction: Junction::new(head, conditions),
        })),
        Curves::Straight => {
            let heat = &head.tangent.heated;
            let cold = conditions.cold && head.heats() && heat.residue != 0.0;
            Law::Straight(Straight {
                direct: heat.direct,
                residue: heat.residue,
                weights: StepWeights::new(heat.rate, 1.0 / conditions.rate),
                state: if cold {
                    -head.emitter.flux_by_heat(head.rest.current) * head.rest.heating / heat.residue
                } else {
                    0.0
                },
                last: 0.0,
                before: 0.0,
            })
        }
    };
    let carriers = share(servo.carriers);
    Box::new(ServoRunner {
        division: head.division,
        at_input: noise::sources(&head.at_input, conditions),
        input_pole: head.input_pole.section(conditions.rate),
        noise_pole: head.input_pole.section(conditions.rate),
        behind_pole: noise::sources(&head.behind_pole, conditions),
        intensity: head.intensity.source(conditions),
        inside: Vec::new(),
        relative: Vec::new(),
        monitor: Monitor {
            servo: servo.clone(),
            flux: head.rest.flux,
            carriers,
            amplifier: share(servo.rate),
            law,
            now: State {
                light: if conditions.cold && carriers < 1.0 {
                    -head.rest.flux
                } else {
                    0.0
                },
                ..State::default()
            },
            slope: servo.slope,
            asked: [0.0; 3],
            inside: [0.0; 3],
            relative: [0.0; 3],
        },
        events: Events::default(),
    })
}

struct ServoRunner {
    division: f64,
    at_input: Vec<NoiseSource>,
    /// The driver's own pole before the loop: of the signal, which the loop is asked for, and of the noise, which it is not.
    input_pole: FirstOrder,
    noise_pole: FirstOrder,
    behind_pole: Vec<NoiseSource>,
    intensity: Option<NoiseSource>,
    inside: Vec<f64>,
    relative: Vec<f64>,
    monitor: Monitor,
    events: Events,
}

impl Runner for ServoRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        for buffer in [&mut self.inside, &mut self.relative] {
            buffer.clear();
            buffer.resize(block.len(), 0.0);
        }
        block.iter_mut().for_each(|x| *x *= self.division);
        self.input_pole.run(block);
        noise::add_all(&mut self.at_input, &mut self.inside);
        self.noise_pole.run(&mut self.inside);
        noise::add_all(&mut self.behind_pole, &mut self.inside);
        noise::add_all(self.intensity.as_mut_slice(), &mut self.relative);
        for ((x, e), n) in block.iter_mut().zip(&self.inside).zip(&self.relative) {
            *x = self.monitor.step(*x, *e, *n, &mut self.events);
        }
    }

    fn events(&self) -> Events {
        self.events
    }
}

struct Monitor {
    servo: Servo,
    /// W, at rest.
    flux: f64,
    /// kλ/(1 + kλ) of the carriers' and the amplifier's pole, k the weight of the implicit stages.
    carriers: f64,
    amplifier: f64,
    law: Law,
    now: State,
    /// Last slope of the flux, W/V.
    slope: f64,
    /// The last three inputs, the latest first.
    asked: [f64; 3],
    inside: [f64; 3],
    relative: [f64; 3],
}

/// State at a moment, in deviations from rest.
#[derive(Debug, Clone, Copy, Default)]
struct State {
    /// Driver volts v + w and noise.
    volts: f64,
    /// Flux that the current would have without the carriers' pole, W.
    prompt: f64,
    /// Light behind the carriers' pole, W, and k times its slope.
    light: f64,
    light_flow: f64,
    /// The loop's output w, V, and k times its slope.
    added: f64,
    added_flow: f64,
}

impl Monitor {
    /// One implicit stage from the known parts of `light` and `added`, under driver volts `asked`, noise volts `inside` and relative light noise `relative`.
    #[inline]
    fn solve(
        &mut self,
        known: (f64, f64),
        asked: f64,
        inside: f64,
        relative: f64,
        start: f64,
    ) -> State {
        let (light, added) = known;
        let servo = &self.servo;
        let (c, a) = (self.carriers, self.amplifier);
        // Light cannot be less than none.
        let factor = (1.0 + relative).max(0.0);
        let base = asked + inside;
        let gain = servo.gain * a;
        let lean = 1.0 / (1.0 + gain);
        let pull = gain * lean / servo.slope;
        let stays = factor * (1.0 - c) * light + self.flux * (factor - 1.0);
        let balance = Balance {
            lean,
            pull: pull * factor * c,
            target: lean * (base + (1.0 - a) * added) + gain * lean * asked - pull * stays,
            bounds: servo.bounds.around(base),
        };
        let (volts, prompt, held) = match &mut self.law {
            Law::Straight(straight) => {
                let slow = straight.residue * straight.state;
                let volts = (balance.target - balance.pull * slow)
                    / (balance.lean + balance.pull * straight.direct);
                (volts, straight.direct * volts + slow, false)
            }
            Law::Bent(bent) => {
                let found = balance.solve(start, self.slope, servo.scale, |u| bent.flux(u));
                self.slope = found.slope;
                (found.volts, found.flux, found.held)
            }
        };
        let next = (1.0 - c) * light + c * prompt;
        let w = volts - base;
        State {
            volts,
            prompt,
            light: next,
            light_flow: next - light,
            added: w,
            // Held at a bound it stands still.
            added_flow: if held { 0.0 } else { w - added },
        }
    }

    /// One sample: the emitted flux away from rest, W.
    #[inline]
    fn step(&mut self, asked: f64, inside: f64, relative: f64, events: &mut Events) -> f64 {
        let was = self.now;
        let v = tr_bdf2::midway_of_four(asked, self.asked);
        let middle = self.solve(
            (was.light + was.light_flow, was.added + was.added_flow),
            v,
            tr_bdf2::midway_of_four(inside, self.inside),
            tr_bdf2::midway_of_four(relative, self.relative),
            was.volts + v - self.asked[0],
        );
        let blend = |middle: f64, was: f64| tr_bdf2::MIDDLE * middle + tr_bdf2::FIRST * was;
        let end = self.solve(
            (
                blend(middle.light, was.light),
                blend(middle.added, was.added),
            ),
            asked,
            inside,
            relative,
            middle.volts + asked - v,
        );
        for (past, now) in [
            (&mut self.asked, asked),
            (&mut self.inside, inside),
            (&mut self.relative, relative),
        ] {
            *past = [now, past[0], past[1]];
        }
        self.now = end;
        match &mut self.law {
            Law::Straight(straight) => straight.advance(end.volts),
            Law::Bent(bent) => bent.advance(end.prompt, events),
        }
        let factor = (1.0 + relative).max(0.0);
        factor * end.light + self.flux * (factor - 1.0)
    }
}

/// The light of the driver's volts, the carriers apart.
enum Law {
    Straight(Straight),
    Bent(Box<Bent>),
}

/// The tangent with its heat: direct·u + residue·state, state' = u − rate·state.
struct Straight {
    direct: f64,
    residue: f64,
    weights: StepWeights,
    state: f64,
    last: f64,
    before: f64,
}

impl Straight {
    #[inline]
    fn advance(&mut self, volts: f64) {
        let w = &self.weights;
        self.state =
            w.decay * self.state + w.now * volts + w.last * self.last + w.before * self.before;
        self.before = self.last;
        self.last = volts;
    }
}

struct Bent {
    driver: Driver,
    emitter: Emitter,
    input: f64,
    /// Current at rest, A.
    rest: f64,
    /// Current last looked at, A, and whether it was all that the supply allows.
    near: f64,
    limited: bool,
    flux: f64,
    heating: f64,
    junction: Junction,
}

impl Bent {
    /// Flux away from rest, W, at driver volts `u` away from rest.
    #[inline]
    fn flux(&mut self, u: f64) -> f64 {
        let warmth = self.junction.warmth;
        let heat_voltage = self.emitter.drift() * warmth;
        (self.near, self.limited) =
            self.driver
                .current(self.input, self.input + u, heat_voltage, self.near);
        self.emitter.flux(self.near, self.heating + warmth) - self.flux
    }

    /// A sample on, which ended at `flux` (W away from rest).
    #[inline]
    fn advance(&mut self, flux: f64, events: &mut Events) {
        self.junction
            .advance(&self.emitter, self.near, self.flux + flux);
        count(events, self.near, self.rest, self.limited);
    }
}
