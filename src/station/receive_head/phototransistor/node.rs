//! The two nodes of a phototransistor into its load, base and collector, around their rest.
//!
//! Unknowns are the deviations x of V_BE and y of V_BC; the drop across the load moves by u = y − x. With the photocurrent I_ph
//! from collector to base beside the transistor:
//! - base: d(Q_BE + Q_BC)/dt = I_ph − I_BE − I_BC − V_BE/R_b;
//! - load: d(C·u + Q_BC)/dt = I_ph + I_T − I_BC − G·u − branch.

use crate::physics::phototransistor::{Flows, Transistor};
use crate::signal::implicit::{Pair, Reach, paired_root, tr_bdf2};
use crate::station::wiring::Branch;

/// The transistor around a rest, bent or as its tangent.
#[derive(Debug, Clone, Copy)]
pub struct Around {
    pub v_be: f64,
    pub v_bc: f64,
    pub rest: Flows,
    /// From base to emitter besides the transistor, S.
    pub base_conductance: f64,
    bent: Option<Transistor>,
}

/// What leaves the base and what enters the load, away from rest, A, with slopes against x and y, S; and the charges, C, with theirs, F.
#[derive(Debug, Clone, Copy, Default)]
pub struct Moved {
    pub base: f64,
    pub base_slope: [f64; 2],
    pub load: f64,
    pub load_slope: [f64; 2],
    pub emitter_charge: f64,
    pub emitter_capacitance: f64,
    pub collector_charge: f64,
    pub collector_capacitance: f64,
}

impl Around {
    pub fn new(part: &Transistor, base_conductance: f64, rest: [f64; 2], straight: bool) -> Self {
        Self {
            v_be: rest[0],
            v_bc: rest[1],
            rest: part.at(rest[0], rest[1]),
            base_conductance,
            bent: (!straight).then_some(*part),
        }
    }

    /// Whether it bends.
    pub fn is_bent(&self) -> bool {
        self.bent.is_some()
    }

    /// Everything at the deviations `x` and `y` (V).
    #[inline]
    pub fn at(&self, x: f64, y: f64) -> Moved {
        let r = &self.rest;
        let Some(part) = &self.bent else {
            let base_slope = [r.base_emitter_x + self.base_conductance, r.base_collector_y];
            let load_slope = [r.transport_x, r.transport_y - r.base_collector_y];
            return Moved {
                base: base_slope[0] * x + base_slope[1] * y,
                base_slope,
                load: load_slope[0] * x + load_slope[1] * y,
                load_slope,
                emitter_charge: r.emitter_charge_x * x,
                emitter_capacitance: r.emitter_charge_x,
                collector_charge: r.collector_charge_y * y,
                collector_capacitance: r.collector_charge_y,
            };
        };
        let f = part.at(self.v_be + x, self.v_bc + y);
        let collector = f.base_collector - r.base_collector;
        Moved {
            base: f.base_emitter - r.base_emitter + collector + self.base_conductance * x,
            base_slope: [f.base_emitter_x + self.base_conductance, f.base_collector_y],
            load: f.transport - r.transport - collector,
            load_slope: [f.transport_x, f.transport_y - f.base_collector_y],
            emitter_charge: f.emitter_charge - r.emitter_charge,
            emitter_capacitance: f.emitter_charge_x,
            collector_charge: f.collector_charge - r.collector_charge,
            collector_capacitance: f.collector_charge_y,
        }
    }
}

/// State at a moment, in deviations from rest.
#[derive(Debug, Clone, Copy, Default)]
pub struct State {
    /// Of V_BE and V_BC, V.
    pub x: f64,
    pub y: f64,
    /// Of the base and of the load's node, C, and what flows in, A.
    pub base_charge: f64,
    pub load_charge: f64,
    pub base_flow: f64,
    pub load_flow: f64,
    /// Voltage on the branch's capacitor, V.
    pub behind: f64,
    /// What x and y have moved in the last sample, V.
    pub pace: [f64; 2],
}

impl State {
    /// Of the drop across the load, V.
    pub fn drop(&self) -> f64 {
        self.y - self.x
    }
}

/// One implicit stage: charge − k·flow = a target, for both nodes.
#[derive(Debug, Clone, Copy)]
pub struct Nodes {
    pub device: Around,
    /// Conductance and capacitance across the load, S and F.
    pub conductance: f64,
    pub capacitance: f64,
    /// k over the branch's time constant, and its conductance with its own implicit part; 0 without a branch.
    pub branch_ratio: f64,
    pub branch_conductance: f64,
    /// Weight of the flows, s, and of the charges (0: the static law).
    pub k: f64,
    pub charges: f64,
    pub reach: Reach,
}

/// Size of a last step, V: the tangent that carries over it errs by half its square over V_T², 3·10⁻¹¹ of a current.
const SCALE: f64 = 2e-7;

impl Nodes {
    /// The static law with `conductance` across the load.
    pub fn at_rest(device: Around, conductance: f64) -> Self {
        Self {
            reach: reach(&device),
            device,
            conductance,
            capacitance: 0.0,
            branch_ratio: 0.0,
            branch_conductance: 0.0,
            k: 1.0,
            charges: 0.0,
        }
    }

    /// State under the currents `base_in` and `load_in` (A, away from rest) into the nodes; `base`, `load` and `behind` are the
    /// known parts of charges and of the branch's capacitor voltage.
    #[inline]
    pub fn solve(
        &self,
        [base, load, behind]: [f64; 3],
        [base_in, load_in]: [f64; 2],
        start: &State,
    ) -> State {
        let (k, w) = (self.k, self.charges);
        let across = self.conductance + self.branch_conductance;
        let own = w * self.capacitance + k * across;
        // What is known: all charge that the unknowns must make up, the currents' share included.
        let base_known = base + k * base_in;
        let load_known = load + k * (load_in + self.branch_conductance * behind);
        let mut at = Moved::default();
        let (from, step) = paired_root([start.x, start.y], SCALE, &self.reach, |x, y| {
            at = self.device.at(x, y);
            let collector = w * at.collector_capacitance;
            Pair {
                value: [
                    w * (at.emitter_charge + at.collector_charge) + k * at.base - base_known,
                    w * at.collector_charge + own * (y - x) - k * at.load - load_known,
                ],
                slope: [
                    [
                        w * at.emitter_capacitance + k * at.base_slope[0],
                        collector + k * at.base_slope[1],
                    ],
                    [
                        -own - k * at.load_slope[0],
                        own + collector - k * at.load_slope[1],
                    ],
                ],
            }
        });
        // The last step is so small that the tangents carry everything over it.
        let [dx, dy] = step;
        let (x, y) = (from[0] + dx, from[1] + dy);
        let u = y - x;
        let collector_charge = at.collector_charge + at.collector_capacitance * dy;
        let emitter_charge = at.emitter_charge + at.emitter_capacitance * dx;
        let base_moved = at.base + at.base_slope[0] * dx + at.base_slope[1] * dy;
        let load_moved = at.load + at.load_slope[0] * dx + at.load_slope[1] * dy;
        State {
            x,
            y,
            base_charge: w * (emitter_charge + collector_charge),
            load_charge: w * (self.capacitance * u + collector_charge),
            base_flow: base_in - base_moved,
            load_flow: load_in + load_moved - across * u + self.branch_conductance * behind,
            behind: (behind + self.branch_ratio * u) / (1.0 + self.branch_ratio),
            pace: [0.0; 2],
        }
    }
}

/// The nodes from sample to sample.
///
/// The TR-BDF2 rule, but for the samples within which the base loses its charge: there the rule's straight lines would lead to
/// less charge than an empty base holds, and a backward Euler step, which cannot, takes their place.
#[derive(Debug, Clone, Copy)]
pub struct Advance {
    rule: Nodes,
    backward: Nodes,
    /// Least base charge, away from rest, C.
    empty: f64,
}

/// Volts at both junctions by which a base may be emptier than in the dark before it counts as out of the law: noise pulls it about.
const SLACK: f64 = 0.02;

impl Advance {
    /// At `rate` (Hz), with `conductance` (S), `capacitance` (F) and a `branch` at the load; `dark` is V_BC without any light, V.
    pub fn new(
        device: Around,
        (conductance, capacitance, branch): (f64, f64, Option<Branch>),
        dark: f64,
        rate: f64,
    ) -> Self {
        let nodes = |k: f64| {
            let branch_ratio = branch.map_or(0.0, |b| k / (b.resistance * b.capacitance));
            Nodes {
                capacitance,
                branch_ratio,
                branch_conductance: branch
                    .map_or(0.0, |b| 1.0 / ((1.0 + branch_ratio) * b.resistance)),
                k,
                charges: 1.0,
                ..Nodes::at_rest(device, conductance)
            }
        };
        let empty = device.bent.map_or(f64::NEG_INFINITY, |part| {
            let at = |x, y| {
                let f = part.at(x, y);
                f.emitter_charge + f.collector_charge
            };
            at(-SLACK, dark.min(0.0) - SLACK) - at(device.v_be, device.v_bc)
        });
        Self {
            rule: nodes(tr_bdf2::IMPLICIT / rate),
            backward: nodes(1.0 / rate),
            empty,
        }
    }

    /// The transistor around its rest.
    pub fn device(&self) -> &Around {
        &self.rule.device
    }

    /// The state of deviations `x` and `y`, the branch's capacitor at `behind`.
    pub fn charged(&self, [x, y]: [f64; 2], behind: f64) -> State {
        let n = &self.rule;
        let at = n.device.at(x, y);
        let drop = y - x;
        let branch = n.branch_conductance * (1.0 + n.branch_ratio);
        State {
            x,
            y,
            base_charge: at.emitter_charge + at.collector_charge,
            load_charge: n.capacitance * drop + at.collector_charge,
            base_flow: -at.base,
            load_flow: at.load - n.conductance * drop - branch * (drop - behind),
            behind,
            pace: [0.0; 2],
        }
    }

    /// One sample from `was`, under the currents into base and load between and at its end (A, away from rest).
    #[inline]
    pub fn step(&self, was: &State, between: [f64; 2], end: [f64; 2]) -> State {
        let n = &self.rule;
        let first = was.base_charge + n.k * was.base_flow;
        if first < self.empty {
            return self.backward(was, end);
        }
        let middle = n.solve(
            [
                first,
                was.load_charge + n.k * was.load_flow,
                was.behind + n.branch_ratio * (was.drop() - was.behind),
            ],
            between,
            &State {
                x: was.x + tr_bdf2::GAMMA * was.pace[0],
                y: was.y + tr_bdf2::GAMMA * was.pace[1],
                ..*was
            },
        );
        let join = |middle: f64, first: f64| tr_bdf2::MIDDLE * middle + tr_bdf2::FIRST * first;
        let second = join(middle.base_charge, was.base_charge);
        if second < self.empty {
            return self.backward(was, end);
        }
        // Onwards at the pace so far.
        let guess = State {
            x: was.x + (middle.x - was.x) / tr_bdf2::GAMMA,
            y: was.y + (middle.y - was.y) / tr_bdf2::GAMMA,
            ..middle
        };
        let now = n.solve(
            [
                second,
                join(middle.load_charge, was.load_charge),
                join(middle.behind, was.behind),
            ],
            end,
            &guess,
        );
        State {
            pace: [now.x - was.x, now.y - was.y],
            ..now
        }
    }

    #[cold]
    fn backward(&self, was: &State, end: [f64; 2]) -> State {
        self.backward
            .solve([was.base_charge, was.load_charge, was.behind], end, was)
    }
}

/// How far a Newton step may trust `device`: both exponentials lead above the voltage at which the junctions carry what flows at rest.
fn reach(device: &Around) -> Reach {
    let Some(part) = &device.bent else {
        return Reach::UNBOUND;
    };
    let flowing = device.rest.transport.abs() / part.gain;
    let knee = part.thermal_voltage * (flowing / part.saturation).ln_1p();
    Reach {
        knee: [knee - device.v_be, knee - device.v_bc],
        fold: part.thermal_voltage,
    }
}
