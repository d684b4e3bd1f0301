//! The transmit head in time.

use super::{TransmitHead, driver::Driver, emitter::Emitter, servo};
use crate::signal::pole::{FirstOrder, StepWeights};
use crate::station::noise::{self, NoiseSource};
use crate::station::{Conditions, Curves, Events, Runner};

/// A current below this share of the bias counts as dark.
const DARK: f64 = 0.01;
/// A junction's heat beyond its rest goes no further than this, K.
const RUNAWAY: f64 = 1000.0;

/// Builds the runner of `head`.
pub fn runner(head: &TransmitHead, conditions: &Conditions) -> Box<dyn Runner> {
    if let Some(servo) = &head.servo {
        return servo::in_time::runner(servo, head, conditions);
    }
    let heats = head.heats();
    let mut carriers = head.emitter.carriers().section(conditions.rate);
    if conditions.cold {
        carriers.start_output(-head.rest.flux);
    }
    Box::new(HeadRunner {
        division: head.division,
        flux: head.rest.flux,
        at_input: noise::sources(&head.at_input, conditions),
        input_pole: head.input_pole.section(conditions.rate),
        behind_pole: noise::sources(&head.behind_pole, conditions),
        intensity: head.intensity.source(conditions),
        carriers,
        relative: Vec::new(),
        law: match conditions.curves {
            Curves::Straight => {
                let mut heated = head.tangent.heated.section(conditions.rate);
                if conditions.cold && heats {
                    heated.start_output(
                        -head.emitter.flux_by_heat(head.rest.current) * head.rest.heating,
                    );
                }
                Law::Straight(heated)
            }
            Curves::Bent => Law::Bent(Box::new(Bent {
                driver: head.driver.clone(),
                emitter: head.emitter.clone(),
                input: head.rest.input,
                current: head.rest.current,
                near: head.rest.current,
                flux: head.rest.flux,
                heating: head.rest.heating,
                junction: Junction::new(head, conditions),
            })),
        },
        events: Events::default(),
    })
}

struct HeadRunner {
    division: f64,
    flux: f64,
    at_input: Vec<NoiseSource>,
    input_pole: FirstOrder,
    behind_pole: Vec<NoiseSource>,
    intensity: Option<NoiseSource>,
    carriers: FirstOrder,
    relative: Vec<f64>,
    law: Law,
    events: Events,
}

enum Law {
    Straight(FirstOrder),
    Bent(Box<Bent>),
}

struct Bent {
    driver: Driver,
    emitter: Emitter,
    input: f64,
    current: f64,
    /// Current of the last sample, A.
    near: f64,
    flux: f64,
    heating: f64,
    junction: Junction,
}

/// The junction's heat in time.
pub(super) struct Junction {
    /// Heat beyond its rest, K.
    pub warmth: f64,
    /// R_th/τ, K/(W·s).
    heat: f64,
    /// Dissipated power at rest, W.
    power: f64,
    /// Furthest that the heat goes either way, K.
    most: f64,
    weights: StepWeights,
    last: f64,
    before: f64,
}

impl Junction {
    pub fn new(head: &TransmitHead, conditions: &Conditions) -> Self {
        let (resistance, time) = head.emitter.thermal();
        let heats = head.heats();
        let pick = |value| if heats { value } else { 0.0 };
        Self {
            warmth: pick(if conditions.cold {
                -head.rest.heating
            } else {
                0.0
            }),
            heat: pick(resistance / time),
            power: head.rest.forward_voltage * head.rest.current - head.rest.flux,
            most: head.rest.heating.abs() + RUNAWAY,
            weights: StepWeights::new(pick(1.0 / time), 1.0 / conditions.rate),
            last: 0.0,
            before: 0.0,
        }
    }

    /// One sample on, under `current` (A) and the `flux` (W) that leaves.
    #[inline]
    pub fn advance(&mut self, emitter: &Emitter, current: f64, flux: f64) {
        if self.heat > 0.0 {
            let power = current * emitter.forward_voltage(current, self.warmth) - flux;
            let forcing = self.heat * (power - self.power);
            let w = &self.weights;
            let warmth = w.decay * self.warmth
                + w.now * forcing
                + w.last * self.last
                + w.before * self.before;
            // A junction that runs away ends somewhere; the model's own range ended long before.
            self.warmth = warmth.clamp(-self.most, self.most);
            self.before = self.last;
            self.last = forcing;
        }
    }
}

impl Bent {
    /// Flux away from rest, W, for driver volts `v` away from rest. The junction's heat is that at the sample's start: it
    /// moves in milliseconds and more.
    #[inline]
    fn step(&mut self, v: f64, events: &mut Events) -> f64 {
        let warmth = self.junction.warmth;
        let heat_voltage = self.emitter.drift() * warmth;
        let (current, limited) =
            self.driver
                .current(self.input, self.input + v, heat_voltage, self.near);
        self.near = current;
        let flux = self.emitter.flux(current, self.heating + warmth);
        self.junction.advance(&self.emitter, current, flux);
        count(events, current, self.current, limited);
        flux - self.flux
    }
}

/// Counts a sample at `current` (A), all that the supply allows or not, of an emitter that rests at `rest` (A).
#[inline]
pub(super) fn count(events: &mut Events, current: f64, rest: f64, limited: bool) {
    events.cut_off += u64::from(current < DARK * rest);
    events.clipped += u64::from(limited);
    events.peak = Some(events.peak.map_or(current, |p| p.max(current)));
}

impl Runner for HeadRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.division);
        noise::add_all(&mut self.at_input, block);
        self.input_pole.run(block);
        noise::add_all(&mut self.behind_pole, block);
        match &mut self.law {
            Law::Straight(heated) => heated.run(block),
            Law::Bent(bent) => {
                for x in block.iter_mut() {
                    *x = bent.step(*x, &mut self.events);
                }
            }
        }
        self.carriers.run(block);
        if let Some(intensity) = &mut self.intensity {
            self.relative.clear();
            self.relative.resize(block.len(), 0.0);
            intensity.add_to(&mut self.relative);
            for (x, n) in block.iter_mut().zip(&self.relative) {
                *x += (self.flux + *x) * n;
            }
        }
    }

    fn events(&self) -> Events {
        self.events
    }
}
