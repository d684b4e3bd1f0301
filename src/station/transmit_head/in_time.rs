//! The transmit head in time.

use super::{TransmitHead, driver::Driver, emitter::Emitter};
use crate::signal::pole::{FirstOrder, StepWeights};
use crate::station::noise::{self, NoiseSource};
use crate::station::{Conditions, Curves, Events, Runner};

/// A current below this share of the bias counts as dark.
const DARK: f64 = 0.01;
/// A junction's heat beyond its rest goes no further than this, K.
const RUNAWAY: f64 = 1000.0;

/// Builds the runner of `head`.
pub fn runner(head: &TransmitHead, conditions: &Conditions) -> Box<dyn Runner> {
    let (resistance, time) = head.emitter.thermal();
    let heats = resistance > 0.0 && time > 0.0;
    let mut carriers = head.emitter.carriers().section(conditions.rate);
    if conditions.cold {
        carriers.start_output(-head.rest.flux);
    }
    Box::new(HeadRunner {
        division: head.division,
        flux: head.rest.flux,
        at_input: noise::sources(&head.at_input, conditions),
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
                warmth: if conditions.cold && heats {
                    -head.rest.heating
                } else {
                    0.0
                },
                heat: if heats { resistance / time } else { 0.0 },
                power: head.rest.forward_voltage * head.rest.current - head.rest.flux,
                weights: StepWeights::new(
                    if heats { 1.0 / time } else { 0.0 },
                    1.0 / conditions.rate,
                ),
                last: 0.0,
                before: 0.0,
            })),
        },
        events: Events::default(),
    })
}

struct HeadRunner {
    division: f64,
    flux: f64,
    at_input: Vec<NoiseSource>,
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
    /// Heat of the junction beyond its rest, K.
    warmth: f64,
    /// R_th/τ, K/(W·s).
    heat: f64,
    /// Dissipated power at rest, W.
    power: f64,
    weights: StepWeights,
    last: f64,
    before: f64,
}

impl Bent {
    /// Flux away from rest, W, for driver volts `v` away from rest. The junction's heat is that at the sample's start: it
    /// moves in milliseconds and more.
    #[inline]
    fn step(&mut self, v: f64, events: &mut Events) -> f64 {
        let drift = self.emitter.drift();
        let heat_voltage = drift * self.warmth;
        let (current, limited) =
            self.driver
                .current(self.input, self.input + v, heat_voltage, self.near);
        self.near = current;
        let flux = self.emitter.flux(current, self.heating + self.warmth);
        if self.heat > 0.0 {
            let power = current * self.emitter.forward_voltage(current, self.warmth) - flux;
            let forcing = self.heat * (power - self.power);
            let w = &self.weights;
            let warmth = w.decay * self.warmth
                + w.now * forcing
                + w.last * self.last
                + w.before * self.before;
            // A junction that runs away ends somewhere; the model's own range ended long before.
            let most = self.heating.abs() + RUNAWAY;
            self.warmth = warmth.clamp(-most, most);
            self.before = self.last;
            self.last = forcing;
        }
        events.cut_off += u64::from(current < DARK * self.current);
        events.clipped += u64::from(limited);
        events.peak = Some(events.peak.map_or(current, |p| p.max(current)));
        flux - self.flux
    }
}

impl Runner for HeadRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.division);
        noise::add_all(&mut self.at_input, block);
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
