//! The cell in time: junction voltage v and leads' voltage u, by the TR-BDF2 rule on the charges of both.
//!
//! The load is linear, so that u follows from v and each stage is one rising equation in v. The current that leaves the junction
//! is counted on the load's side, which holds without series resistance as well.

use super::{Cell, PhotocellHead};
use crate::signal::implicit::{rising_root, tr_bdf2};
use crate::station::noise::{self, NoiseSource};
use crate::station::receive_head::MovingShot;
use crate::station::{Conditions, Curves, Events, Runner};

/// Builds the runner of `head`.
pub fn runner(head: &PhotocellHead, conditions: &Conditions) -> Box<dyn Runner> {
    let straight = conditions.curves == Curves::Straight;
    let k = tr_bdf2::IMPLICIT / conditions.rate;
    let branch_ratio = head
        .branch
        .map_or(0.0, |b| k / (b.resistance * b.capacitance));
    let mut nodes = Nodes {
        cell: head.cell,
        junction: head.junction,
        lost: head.lost,
        straight,
        junction_capacitance: head.junction_capacitance,
        conductance: head.conductance,
        capacitance: head.capacitance,
        branch_ratio,
        branch_conductance: head
            .branch
            .map_or(0.0, |b| 1.0 / ((1.0 + branch_ratio) * b.resistance)),
        k,
        floor: if straight {
            f64::NEG_INFINITY
        } else {
            -head.light.total()
        },
        now: State::default(),
        last: [[0.0; 3]; 2],
    };
    if conditions.cold {
        nodes.now = State {
            v: -head.junction,
            u: -head.rest,
            junction_charge: -head.junction_capacitance * head.junction,
            load_charge: -head.capacitance * head.rest,
            behind: -head.branch_rest,
            ..State::default()
        };
    }
    Box::new(CellRunner {
        responsivity: head.responsivity,
        light: head.light.total(),
        shot: MovingShot::new(
            head.at_junction[0].name.clone(),
            head.cell.junction.shot_current(-head.junction),
            conditions,
        ),
        shunt: head.at_junction[1].source(conditions),
        series: head.in_series.source(conditions),
        load: head.at_load.source(conditions),
        volts: Vec::new(),
        amperes: Vec::new(),
        nodes,
    })
}

struct CellRunner {
    responsivity: f64,
    light: f64,
    shot: MovingShot,
    shunt: Option<NoiseSource>,
    series: Option<NoiseSource>,
    load: Option<NoiseSource>,
    volts: Vec<f64>,
    amperes: Vec<f64>,
    nodes: Nodes,
}

impl Runner for CellRunner {
    fn run(&mut self, block: &mut [f64], ambient: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.responsivity);
        block.iter_mut().zip(ambient).for_each(|(x, a)| *x += a);
        // Light is never negative.
        let floor = self.nodes.floor;
        block.iter_mut().for_each(|x| *x = x.max(floor));
        self.shot.add_to(block, self.light);
        noise::add_all(self.shunt.as_mut_slice(), block);
        for (buffer, source) in [
            (&mut self.volts, &mut self.series),
            (&mut self.amperes, &mut self.load),
        ] {
            buffer.clear();
            buffer.resize(block.len(), 0.0);
            noise::add_all(source.as_mut_slice(), buffer);
        }
        for ((x, e), i) in block.iter_mut().zip(&self.volts).zip(&self.amperes) {
            *x = self.nodes.step([*x, *e, *i]);
        }
    }

    fn events(&self) -> Events {
        Events::default()
    }
}

/// State at a moment, in deviations from rest.
#[derive(Debug, Clone, Copy, Default)]
struct State {
    /// Junction and leads, V.
    v: f64,
    u: f64,
    /// Charges there, C, and what flows in, A.
    junction_charge: f64,
    load_charge: f64,
    junction_flow: f64,
    load_flow: f64,
    /// Voltage on the branch's capacitor, V.
    behind: f64,
}

struct Nodes {
    cell: Cell,
    /// Junction voltage, V, and lost current, A, with its slope, S, at rest.
    junction: f64,
    lost: (f64, f64),
    straight: bool,
    junction_capacitance: f64,
    conductance: f64,
    capacitance: f64,
    /// k over the branch's time constant, and its conductance with its own implicit part; 0 without a branch.
    branch_ratio: f64,
    branch_conductance: f64,
    /// Weight of the implicit stages, s.
    k: f64,
    /// Least photocurrent, away from rest, A.
    floor: f64,
    now: State,
    /// Inputs at the last sample and the one before.
    last: [[f64; 3]; 2],
}

impl Nodes {
    /// Lost current away from rest, A, and its slope, S, at the deviation `v`.
    #[inline]
    fn lost_at(&self, v: f64) -> (f64, f64) {
        if self.straight {
            (self.lost.1 * v, self.lost.1)
        } else {
            let (i, g) = self.cell.lost(self.junction + v);
            (i - self.lost.0, g)
        }
    }

    /// One implicit stage from the known parts of both charges and the branch's capacitor voltage, under a photocurrent, a voltage
    /// in series and a current into the load, from the junction voltage `start`.
    #[inline]
    fn solve(&self, [junction, load, behind]: [f64; 3], input: [f64; 3], start: f64) -> State {
        let [light, volts, amperes] = input;
        let (k, r) = (self.k, self.cell.series);
        // What the load takes over one stage, as charge: own·u − given.
        let own = self.capacitance + k * (self.conductance + self.branch_conductance);
        let given = load + k * (amperes + self.branch_conductance * behind);
        // (v + e − u)·k = R_s·(own·u − given).
        let share = k / (k + r * own);
        let offset = (k * volts + r * given) / (k + r * own);
        let mut lost = (0.0, 0.0);
        let mut at = start;
        let v = rising_root(start, 1e-9, |v| {
            at = v;
            lost = self.lost_at(v);
            let taken = own * (share * v + offset) - given;
            (
                self.junction_capacitance * v + k * (lost.0 - light) + taken - junction,
                self.junction_capacitance + k * lost.1 + own * share,
            )
        });
        // The last step is so small that the tangent carries over it.
        let lost = lost.0 + lost.1 * (v - at);
        let u = share * v + offset;
        State {
            v,
            u,
            junction_charge: self.junction_capacitance * v,
            load_charge: self.capacitance * u,
            junction_flow: light - lost - (own * u - given) / k,
            load_flow: (self.capacitance * u - load) / k,
            behind: (behind + self.branch_ratio * u) / (1.0 + self.branch_ratio),
        }
    }

    /// One sample under a photocurrent (A), a voltage in series (V) and a current into the load (A), away from rest; the output
    /// away from rest, V.
    #[inline]
    fn step(&mut self, input: [f64; 3]) -> f64 {
        let mut middle_in = [0.0; 3];
        for (n, x) in middle_in.iter_mut().enumerate() {
            *x = tr_bdf2::midway(input[n], self.last[0][n], self.last[1][n]);
        }
        let (k, was) = (self.k, self.now);
        let middle = self.solve(
            [
                was.junction_charge + k * was.junction_flow,
                was.load_charge + k * was.load_flow,
                was.behind + self.branch_ratio * (was.u - was.behind),
            ],
            middle_in,
            was.v,
        );
        let join = |middle: f64, first: f64| tr_bdf2::MIDDLE * middle + tr_bdf2::FIRST * first;
        self.now = self.solve(
            [
                join(middle.junction_charge, was.junction_charge),
                join(middle.load_charge, was.load_charge),
                join(middle.behind, was.behind),
            ],
            input,
            was.v + (middle.v - was.v) / tr_bdf2::GAMMA,
        );
        self.last = [input, self.last[0]];
        self.now.u
    }
}
