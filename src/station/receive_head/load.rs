//! A reverse-biased photodiode into a load: i_ph + i_junction = v/R + what the next stage draws + C·dv/dt.

use num_complex::Complex64;

use super::detector::{AroundRest, Detector};
use super::{LightAtRest, MovingShot};
use crate::design::Section;
use crate::physics::noise::{johnson_current, shot};
use crate::quantity::Dimension;
use crate::signal::implicit::{rising_root, tr_bdf2};
use crate::station::noise::{self, Contributor, NoiseSource};
use crate::station::wiring::{Branch, Drive, Load};
use crate::station::{Conditions, Curves, Events, Limit, Model, Reading, Runner, Share};

/// Detector and load on paper. Works in the drop `u` across the load; the output is u (anode side) or supply − u (cathode side).
///
/// Once the drop has used up the supply the junction conducts and the output grows with the logarithm of the light. The
/// junction's diffusion capacitance is left out: good while the forward current stays under about 10 µA.
pub struct LoadHead {
    path: String,
    supply: f64,
    sign: f64,
    detector: Detector,
    diode: AroundRest,
    /// Conductance that carries DC: the load's own and the next stage's, S.
    conductance: f64,
    /// Capacitance besides the junction's, F.
    capacitance: f64,
    branch: Option<Branch>,
    own_conductance: f64,
    light: LightAtRest,
    /// Drop at rest, V.
    rest: f64,
    contributors: Vec<Contributor>,
}

impl LoadHead {
    /// From `[receiver.front_end]` with its detector, the light at rest and the `next` stage's load; `temperature` in K.
    pub fn new(
        section: &Section,
        detector: Detector,
        light: LightAtRest,
        next: &Load,
        temperature: f64,
    ) -> Self {
        let supply = section.number("supply");
        let cathode = section.optional_word("load_at") == Some("cathode");
        let own_conductance = 1.0 / section.number("load");
        let conductance = own_conductance + next.conductance;
        let returns = if cathode {
            supply - next.return_voltage
        } else {
            next.return_voltage
        };
        let from_next = next.conductance * returns;
        // At rest: u·G = what the next stage's return sends + photocurrent + junction, all falling or level in u.
        let rest = rising_root(0.0, 1e-12, |u| {
            let (i, g) = detector.junction.reverse_current(supply - u);
            (
                u * conductance - from_next - light.total() - i,
                conductance + g,
            )
        });
        let diode = detector.around(supply - rest, false);
        let name = |place: &str, cause: &str| format!("{place}.{cause}");
        let contributors = vec![
            Contributor::white(
                name(&detector.path, "shot"),
                shot(light.total() + detector.junction.shot_current(supply - rest)),
            ),
            Contributor::white(
                name(&detector.path, "shunt"),
                johnson_current(detector.junction.shunt, temperature),
            ),
            Contributor::white(
                name(&section.path, "load"),
                johnson_current(own_conductance, temperature),
            ),
        ];
        Self {
            path: section.path.clone(),
            supply,
            sign: if cathode { -1.0 } else { 1.0 },
            detector,
            diode,
            conductance,
            capacitance: section.number("capacitance") + next.capacitance,
            branch: next.branch,
            own_conductance,
            light,
            rest,
            contributors,
        }
    }

    /// Voltage at the output at rest, V.
    fn output(&self) -> f64 {
        if self.sign > 0.0 {
            self.rest
        } else {
            self.supply - self.rest
        }
    }

    /// What it offers: a node solved with its load.
    pub fn drive(&self) -> Drive {
        let seen = 1.0 / (self.own_conductance + self.diode.conductance);
        Drive {
            rest: self.output(),
            series: 0.0,
            seen,
            blocked: None,
        }
    }

    /// Impedance of the node at `frequency` (Hz), Ω.
    fn impedance(&self, frequency: f64) -> Complex64 {
        let hung = Load {
            conductance: self.conductance + self.diode.conductance,
            return_voltage: 0.0,
            branch: self.branch,
            capacitance: self.capacitance + self.diode.capacitance,
        };
        1.0 / hung.admittance(frequency)
    }
}

impl Model for LoadHead {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "photodiode into a load".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        vec![
            Reading {
                name: "signal photocurrent",
                value: self.light.signal,
                dimension: Dimension::Ampere,
            },
            Reading {
                name: "ambient photocurrent",
                value: self.light.ambient,
                dimension: Dimension::Ampere,
            },
            Reading {
                name: "output",
                value: self.output(),
                dimension: Dimension::Volt,
            },
            Reading {
                name: "reverse bias left",
                value: self.supply - self.rest,
                dimension: Dimension::Volt,
            },
            Reading {
                name: "junction capacitance",
                value: self.diode.capacitance,
                dimension: Dimension::Farad,
            },
        ]
    }

    fn curve(&self, x: f64) -> f64 {
        let light = self.detector.responsivity * x;
        let g = self.conductance + self.branch.map_or(0.0, |b| 1.0 / b.resistance);
        let drop = rising_root(0.0, 1e-12, |d| {
            let diode = self.diode.at(-d);
            (d * g - light - diode.current, g + diode.conductance)
        });
        self.sign * drop
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.sign * self.detector.responsivity * self.impedance(frequency)
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        let squared = self.impedance(frequency).norm_sqr();
        self.contributors
            .iter()
            .map(|c| c.share(frequency, squared))
            .collect()
    }

    fn limits(&self) -> Vec<Limit> {
        let darkness = self.light.total()
            / (self.conductance + self.branch.map_or(0.0, |b| 1.0 / b.resistance));
        vec![
            Limit::Level {
                cause: "bias used up",
                at: self.sign * (self.supply - self.rest),
            },
            Limit::Level {
                cause: "darkness",
                at: -self.sign * darkness,
            },
        ]
    }

    fn warnings(&self) -> Vec<String> {
        let left = self.supply - self.rest;
        if left > 0.0 {
            return Vec::new();
        }
        vec![format!(
            "{}: the light at rest ({} of photocurrent, {} of it ambient) uses up the reverse bias; the detector compresses",
            self.path,
            Dimension::Ampere.show(self.light.total()),
            Dimension::Ampere.show(self.light.ambient)
        )]
    }

    fn slowest_time(&self) -> f64 {
        (self.capacitance + self.diode.capacitance) / (self.conductance + self.diode.conductance)
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        let straight = conditions.curves == Curves::Straight;
        let k = tr_bdf2::IMPLICIT / conditions.rate;
        let branch_ratio = self
            .branch
            .map_or(0.0, |b| k / (b.resistance * b.capacitance));
        let mut node = Node {
            diode: self.detector.around(self.supply - self.rest, straight),
            conductance: self.conductance,
            capacitance: self.capacitance,
            branch_ratio,
            branch_conductance: self
                .branch
                .map_or(0.0, |b| 1.0 / ((1.0 + branch_ratio) * b.resistance)),
            k,
            drop: 0.0,
            charge: 0.0,
            flow: 0.0,
            behind: 0.0,
            last: 0.0,
            before: 0.0,
        };
        if conditions.cold {
            node.start_at(-self.rest);
        }
        // The shunt and the load; the shot noise follows the light.
        let quiet = noise::sources(&self.contributors[1..], conditions);
        Box::new(LoadRunner {
            responsivity: self.detector.responsivity,
            sign: self.sign,
            light: self.light.total(),
            shot: MovingShot::new(
                self.contributors[0].name.clone(),
                self.detector.junction.shot_current(self.supply - self.rest),
                conditions,
            ),
            quiet,
            node,
            bias_left: self.supply - self.rest,
            events: Events::default(),
        })
    }
}

struct LoadRunner {
    responsivity: f64,
    sign: f64,
    light: f64,
    shot: MovingShot,
    quiet: Vec<NoiseSource>,
    node: Node,
    bias_left: f64,
    events: Events,
}

impl Runner for LoadRunner {
    fn run(&mut self, block: &mut [f64], ambient: &[f64]) {
        block.iter_mut().for_each(|x| *x *= self.responsivity);
        block.iter_mut().zip(ambient).for_each(|(x, a)| *x += a);
        self.shot.add_to(block, self.light);
        noise::add_all(&mut self.quiet, block);
        for x in block {
            let drop = self.node.step(*x);
            self.events.clipped += u64::from(drop > self.bias_left);
            *x = self.sign * drop;
        }
    }

    fn events(&self) -> Events {
        self.events
    }
}

/// The node in time by the TR-BDF2 rule, in deviations from rest; with no capacitance at all it is solved as algebra.
struct Node {
    diode: AroundRest,
    conductance: f64,
    capacitance: f64,
    /// k over the branch's time constant, and its conductance with its own implicit part; 0 without a branch.
    branch_ratio: f64,
    branch_conductance: f64,
    /// Weight of the implicit stages, s.
    k: f64,
    drop: f64,
    charge: f64,
    /// Current into the capacitances, A.
    flow: f64,
    /// Voltage behind the branch's capacitor side, V.
    behind: f64,
    last: f64,
    before: f64,
}

impl Node {
    fn start_at(&mut self, drop: f64) {
        self.drop = drop;
        self.charge = self.charge_at(drop);
    }

    /// Charge away from rest at a drop, C.
    fn charge_at(&self, drop: f64) -> f64 {
        self.capacitance * drop - self.diode.at(-drop).charge
    }

    /// Solves charge(d) − k·flow(d) = `charge`, the branch's capacitor standing at `behind` before its own implicit part.
    #[inline]
    fn solve(&self, charge: f64, behind: f64, light: f64, start: f64) -> Solved {
        let k = self.k;
        let mut solved = Solved::default();
        let drop = rising_root(start, 1e-9, |d| {
            let diode = self.diode.at(-d);
            let conductance = self.conductance + diode.conductance + self.branch_conductance;
            let capacitance = self.capacitance + diode.capacitance;
            solved = Solved {
                drop: d,
                charge: self.capacitance * d - diode.charge,
                flow: light + diode.current
                    - self.conductance * d
                    - (d - behind) * self.branch_conductance,
                behind,
                capacitance,
                conductance,
            };
            (
                solved.charge - k * solved.flow - charge,
                capacitance + k * conductance,
            )
        });
        // The last step is so small that the tangent carries charge and flow over it.
        let step = drop - solved.drop;
        solved.drop = drop;
        solved.charge += solved.capacitance * step;
        solved.flow -= solved.conductance * step;
        solved.behind = (behind + self.branch_ratio * drop) / (1.0 + self.branch_ratio);
        solved
    }

    /// Slope of the branch's capacitor voltage times k, V.
    fn branch_move(&self, drop: f64, behind: f64) -> f64 {
        self.branch_ratio * (drop - behind)
    }

    /// One sample with the light's current `light` (A) away from rest; the drop away from rest, V.
    #[inline]
    fn step(&mut self, light: f64) -> f64 {
        let midway = tr_bdf2::midway(light, self.last, self.before);
        let middle = self.solve(
            self.charge + self.k * self.flow,
            self.behind + self.branch_move(self.drop, self.behind),
            midway,
            self.drop,
        );
        let end = self.solve(
            tr_bdf2::MIDDLE * middle.charge + tr_bdf2::FIRST * self.charge,
            tr_bdf2::MIDDLE * middle.behind + tr_bdf2::FIRST * self.behind,
            light,
            middle.drop,
        );
        self.before = self.last;
        self.last = light;
        self.drop = end.drop;
        self.charge = end.charge;
        self.flow = end.flow;
        self.behind = end.behind;
        end.drop
    }
}

#[derive(Default)]
struct Solved {
    drop: f64,
    charge: f64,
    flow: f64,
    behind: f64,
    capacitance: f64,
    conductance: f64,
}
