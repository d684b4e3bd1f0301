//! The phototransistor in time, by the TR-BDF2 rule on the charges of its two nodes.

use super::PhototransistorHead;
use super::node::{Advance, Around, State};
use crate::physics::noise::shot;
use crate::signal::implicit::tr_bdf2;
use crate::station::noise::{self, Contributor, NoiseSource};
use crate::station::{Conditions, Curves, Events, Runner};

/// Builds the runner of `head`.
pub fn runner(head: &PhototransistorHead, conditions: &Conditions) -> Box<dyn Runner> {
    let straight = conditions.curves == Curves::Straight;
    let rest = [head.device.v_be, head.device.v_bc];
    let device = Around::new(&head.part, head.device.base_conductance, rest, straight);
    let nodes = Advance::new(
        device,
        (head.conductance, head.capacitance, head.branch),
        head.dark,
        conditions.rate,
    );
    let mut now = State::default();
    if conditions.cold {
        // Discharged: no base charge, the whole supply across the transistor, nothing on the next stage's capacitor.
        let x = -head.device.v_be;
        now = nodes.charged([x, x - head.rest], -head.branch_rest);
    }
    let n = &head.contributors;
    let unit = |c: &Contributor| MovingNoise::new(c, conditions);
    Box::new(HeadRunner {
        responsivity: head.responsivity,
        sign: head.sign,
        light: head.light.total(),
        through: unit(&n.through),
        base: unit(&n.base[0]),
        load: unit(&n.load[0]),
        at_base: n.base[1].source(conditions),
        at_load: n.load[1].source(conditions),
        base_noise: Vec::new(),
        load_noise: Vec::new(),
        head: Phototransistor {
            part: head.part,
            nodes,
            // A floating base takes no less than nothing: light is never negative.
            floor: if straight {
                f64::NEG_INFINITY
            } else {
                -head.light.total()
            },
            floats: head.device.base_conductance == 0.0,
            now,
            last: [[0.0; 2]; 2],
        },
        events: Events::default(),
    })
}

/// Shot noise of a current that moves from sample to sample.
struct MovingNoise {
    unit: Option<NoiseSource>,
    buffer: Vec<f64>,
}

impl MovingNoise {
    fn new(contributor: &Contributor, conditions: &Conditions) -> Self {
        let unit = Contributor::white(contributor.name.clone(), 1.0).source(conditions);
        Self {
            unit,
            buffer: Vec::new(),
        }
    }

    /// Draws for a block of `length` samples.
    fn draw(&mut self, length: usize) {
        self.buffer.clear();
        self.buffer.resize(length, 0.0);
        noise::add_all(self.unit.as_mut_slice(), &mut self.buffer);
    }
}

struct HeadRunner {
    responsivity: f64,
    sign: f64,
    light: f64,
    through: MovingNoise,
    base: MovingNoise,
    load: MovingNoise,
    at_base: Option<NoiseSource>,
    at_load: Option<NoiseSource>,
    base_noise: Vec<f64>,
    load_noise: Vec<f64>,
    head: Phototransistor,
    events: Events,
}

impl HeadRunner {
    /// Draws every noise of a block; whether any sounds.
    fn draw(&mut self, length: usize) -> bool {
        let moving = [&mut self.through, &mut self.base, &mut self.load];
        let mut sounds = self.at_base.is_some() || self.at_load.is_some();
        for n in moving {
            sounds |= n.unit.is_some();
            n.draw(length);
        }
        for (buffer, source) in [
            (&mut self.base_noise, &mut self.at_base),
            (&mut self.load_noise, &mut self.at_load),
        ] {
            buffer.clear();
            buffer.resize(length, 0.0);
            noise::add_all(source.as_mut_slice(), buffer);
        }
        sounds
    }
}

impl Runner for HeadRunner {
    fn run(&mut self, block: &mut [f64], ambient: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.responsivity);
        block.iter_mut().zip(ambient).for_each(|(x, a)| *x += a);
        let sounds = self.draw(block.len());
        for (n, x) in block.iter_mut().enumerate() {
            let head = &mut self.head;
            let mut light = x.max(head.floor);
            let (mut at_base, mut at_load) = (0.0, 0.0);
            if sounds {
                let [transport, recombining, injected] = head.shot_currents();
                let flowing = (self.light + light).max(0.0) + injected;
                light = (light + self.through.buffer[n] * shot(flowing).sqrt()).max(head.floor);
                at_base = self.base.buffer[n] * shot(recombining).sqrt() + self.base_noise[n];
                at_load = self.load.buffer[n] * shot(transport).sqrt() + self.load_noise[n];
            }
            let drop = head.step([light + at_base, light + at_load]);
            self.events.clipped += u64::from(head.is_saturated(self.light + light));
            *x = self.sign * drop;
        }
    }

    fn events(&self) -> Events {
        self.events
    }
}

struct Phototransistor {
    part: crate::physics::phototransistor::Transistor,
    nodes: Advance,
    /// Least photocurrent, away from rest, A.
    floor: f64,
    /// Whether nothing but the transistor itself leads away from the base.
    floats: bool,
    now: State,
    /// Currents into base and load at the last sample and the one before, A.
    last: [[f64; 2]; 2],
}

impl Phototransistor {
    /// Currents whose shot noise the transistor makes as it stands, A.
    fn shot_currents(&self) -> [f64; 3] {
        let d = self.nodes.device();
        if d.is_bent() {
            self.part
                .shot_currents(d.v_be + self.now.x, d.v_bc + self.now.y)
        } else {
            self.part.shot_currents(d.v_be, d.v_bc)
        }
    }

    /// Whether the base–collector junction takes more than half of the photocurrent `light` (A).
    fn is_saturated(&self, light: f64) -> bool {
        let d = self.nodes.device();
        let v_bc = d.v_bc + self.now.y;
        d.is_bent() && v_bc > 0.0 && 2.0 * self.part.at(0.0, v_bc).base_collector > light
    }

    /// One sample with the currents `input` (A, away from rest) into base and load; the drop away from rest, V.
    #[inline]
    fn step(&mut self, input: [f64; 2]) -> f64 {
        let between = |n: usize| tr_bdf2::midway(input[n], self.last[0][n], self.last[1][n]);
        let least = if self.floats {
            self.floor
        } else {
            f64::NEG_INFINITY
        };
        let middle_in = [between(0).max(least), between(1)];
        let input_now = [input[0].max(least), input[1]];
        self.now = self.nodes.step(&self.now, middle_in, input_now);
        self.last = [input, self.last[0]];
        self.now.drop()
    }
}
