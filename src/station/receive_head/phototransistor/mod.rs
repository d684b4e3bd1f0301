//! A phototransistor into a load, on paper.
//!
//! Seen from outside it has two leads, so that a load at the collector and one at the emitter carry the same current: the drop
//! across the load is solved, and the output is supply − drop or the drop.

use num_complex::Complex64;
use std::f64::consts::TAU;

use super::LightAtRest;
use super::detector::Sensitivity;
use crate::design::Section;
use crate::physics::noise::{johnson_current, shot};
use crate::physics::phototransistor::Transistor;
use crate::quantity::Dimension;
use crate::station::noise::Contributor;
use crate::station::wiring::{Branch, Drive, Load};
use crate::station::{Conditions, Limit, Model, Reading, Runner, Share};

mod in_time;
mod node;
mod rest;
mod small;

use node::{Around, Nodes, State};
use rest::{halved, settled, transistor};
use small::Small;

/// Part of the photocurrent that the base–collector junction takes, above which the transistor counts as saturated.
const SATURATED: f64 = 0.1;

/// Detector and load on paper.
pub struct PhototransistorHead {
    path: String,
    /// Low and high rail, V.
    rails: [f64; 2],
    /// +1 at the emitter, −1 at the collector.
    sign: f64,
    responsivity: f64,
    part: Transistor,
    device: Around,
    own_conductance: f64,
    /// Conductance that carries DC: the load's own and the next stage's, S.
    conductance: f64,
    capacitance: f64,
    branch: Option<Branch>,
    /// Voltage on the branch's capacitor at rest, V.
    branch_rest: f64,
    light: LightAtRest,
    /// Drop across the load at rest, and V_BC without any light, V.
    rest: f64,
    dark: f64,
    /// Collector–emitter voltage at which the base–collector junction would take half of the photocurrent, V.
    knee: f64,
    contributors: Contributors,
}

/// Noise currents by where they flow.
struct Contributors {
    /// From collector to base, as the photocurrent itself.
    through: Contributor,
    /// Into the base from the emitter: recombination, and the base resistor.
    base: [Contributor; 2],
    /// From collector to emitter, and the load.
    load: [Contributor; 2],
}

impl PhototransistorHead {
    /// From `[receiver.front_end]` and `[receiver.detector]`, the light at rest and the `next` stage's load; `temperature` in K.
    pub fn new(
        section: &Section,
        detector: &Section,
        sensitivity: Sensitivity,
        light: LightAtRest,
        next: &Load,
        temperature: f64,
    ) -> Self {
        let count = detector.number("count");
        let part = transistor(detector, count, temperature);
        let base_conductance = count / detector.number("base_resistor");
        let rails = match *section.numbers("supply") {
            [low, high] => [low, high],
            _ => [0.0, section.number("supply")],
        };
        let supply = rails[1] - rails[0];
        let at_emitter = section.optional_word("load_at") == Some("emitter");
        let own_conductance = 1.0 / section.number("load");
        let conductance = own_conductance + next.conductance;
        let returns = if at_emitter {
            next.return_voltage - rails[0]
        } else {
            rails[1] - next.return_voltage
        };
        let from_next = next.conductance * returns;
        let settled = |light| {
            let load = (conductance, from_next);
            settled(&part, base_conductance, load, supply, light)
        };
        let [v_be, v_bc] = settled(light.total());
        let device = Around::new(&part, base_conductance, [v_be, v_bc], false);
        let [half_be, half_bc] = halved(&part, base_conductance, light.total());
        let [transport, recombining, injected] = part.shot_currents(v_be, v_bc);
        let place = |cause: &str| format!("{}.{cause}", detector.path);
        let contributors = Contributors {
            through: Contributor::white(place("shot"), shot(light.total() + injected)),
            base: [
                Contributor::white(place("base_shot"), shot(recombining)),
                Contributor::white(
                    place("base_resistor"),
                    johnson_current(base_conductance, temperature),
                ),
            ],
            load: [
                Contributor::white(place("collector_shot"), shot(transport)),
                Contributor::white(
                    format!("{}.load", section.path),
                    johnson_current(own_conductance, temperature),
                ),
            ],
        };
        Self {
            path: section.path.clone(),
            rails,
            sign: if at_emitter { 1.0 } else { -1.0 },
            responsivity: sensitivity.responsivity,
            part,
            device,
            own_conductance,
            conductance,
            capacitance: section.number("capacitance") + next.capacitance,
            branch: next.branch,
            branch_rest: supply - (v_be - v_bc) - returns,
            light,
            rest: supply - (v_be - v_bc),
            dark: settled(0.0)[1],
            knee: half_be - half_bc,
            contributors,
        }
    }

    /// Voltage at the output at rest, V.
    fn output(&self) -> f64 {
        if self.sign > 0.0 {
            self.rails[0] + self.rest
        } else {
            self.rails[1] - self.rest
        }
    }

    /// Collector–emitter voltage at rest, V.
    fn voltage(&self) -> f64 {
        self.device.v_be - self.device.v_bc
    }

    /// Current through the load's lead at rest, A.
    fn lead_current(&self) -> f64 {
        self.light.total() + self.device.rest.transport - self.device.rest.base_collector
    }

    /// Part of the photocurrent at rest that the base–collector junction takes.
    fn saturation(&self) -> f64 {
        if self.light.total() > 0.0 {
            self.device.rest.base_collector / self.light.total()
        } else {
            0.0
        }
    }

    fn is_saturated(&self) -> bool {
        self.saturation() > SATURATED
    }

    /// Whether the gain has fallen below half of what the part can do, for want of current.
    fn is_starved(&self) -> bool {
        self.device.rest.transport < self.part.low
    }

    /// Conductance across the load in mid-band, S.
    fn mid_band(&self) -> f64 {
        self.conductance + self.branch.map_or(0.0, |b| 1.0 / b.resistance)
    }

    /// Drop away from rest in mid-band, V, under a photocurrent of `current` (A) away from rest.
    fn drop_under(&self, current: f64) -> f64 {
        let current = current.max(-self.light.total());
        Nodes::at_rest(self.device, self.mid_band())
            .solve([0.0; 3], [current; 2], &State::default())
            .drop()
    }

    /// What it offers: a node solved with its load.
    pub fn drive(&self) -> Drive {
        let alone = Small::new(&self.device, 0.0, self.own_conductance.into());
        Drive {
            rest: self.output(),
            series: 0.0,
            seen: alone.drop([0.0, 1.0]).norm(),
            blocked: None,
        }
    }

    /// The nodes at `frequency` (Hz).
    fn small(&self, frequency: f64) -> Small {
        let hung = Load {
            conductance: self.conductance,
            return_voltage: 0.0,
            branch: self.branch,
            capacitance: self.capacitance,
        };
        Small::new(&self.device, TAU * frequency, hung.admittance(frequency))
    }

    /// Sum of the time constants at rest, the coefficient of s in the nodes' determinant, s: about the slowest one.
    fn time_constant(&self) -> f64 {
        let r = &self.device.rest;
        let (ce, cc) = (r.emitter_charge_x, r.collector_charge_y);
        let gbc = r.base_collector_y;
        let base = r.base_emitter_x + self.device.base_conductance + gbc;
        let load = self.conductance + gbc - r.transport_y;
        let back = gbc - r.transport_x - r.transport_y;
        let still = base * load - gbc * back;
        ((ce + cc) * load + base * (cc + self.capacitance) - cc * back - gbc * cc) / still
    }
}

impl Model for PhototransistorHead {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        let state = if self.is_saturated() {
            "saturated"
        } else if self.is_starved() {
            "starved"
        } else {
            "active"
        };
        let lead = if self.sign > 0.0 {
            "emitter"
        } else {
            "collector"
        };
        format!("phototransistor with a load at its {lead}, {state}")
    }

    fn operating_point(&self) -> Vec<Reading> {
        let ampere = |name, value| Reading {
            name,
            value,
            dimension: Dimension::Ampere,
        };
        let volt = |name, value| Reading {
            name,
            value,
            dimension: Dimension::Volt,
        };
        vec![
            ampere("signal photocurrent", self.light.signal),
            ampere("ambient photocurrent", self.light.ambient),
            ampere("collector current", self.lead_current()),
            Reading {
                name: "current gain",
                value: self.part.gain_at(self.device.rest.transport),
                dimension: Dimension::Number,
            },
            volt("output", self.output()),
            volt("collector-emitter voltage", self.voltage()),
            volt("room before saturation", self.voltage() - self.knee),
            Reading {
                name: "corner",
                value: 1.0 / (TAU * self.time_constant()),
                dimension: Dimension::Hertz,
            },
        ]
    }

    fn curve(&self, x: f64) -> f64 {
        self.sign * self.drop_under(self.responsivity * x)
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.sign * self.responsivity * self.small(frequency).drop([1.0, 1.0])
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        let small = self.small(frequency);
        let gain = |from| small.drop(from).norm_sqr();
        let (through, base, load) = (gain([1.0, 1.0]), gain([1.0, 0.0]), gain([0.0, 1.0]));
        let n = &self.contributors;
        let mut shares = vec![n.through.share(frequency, through)];
        shares.extend(n.base.iter().map(|c| c.share(frequency, base)));
        shares.extend(n.load.iter().map(|c| c.share(frequency, load)));
        shares
    }

    fn limits(&self) -> Vec<Limit> {
        vec![
            Limit::Level {
                cause: "saturation",
                at: self.sign * (self.voltage() - self.knee),
            },
            Limit::Level {
                cause: "darkness",
                at: self.sign * self.drop_under(-self.light.total()),
            },
        ]
    }

    fn warnings(&self) -> Vec<String> {
        let (amperes, volts) = (|x| Dimension::Ampere.show(x), |x| Dimension::Volt.show(x));
        let light = self.light.total();
        let mut warnings = Vec::new();
        if self.is_saturated() {
            let asked = self.part.collector_current(light) + light;
            warnings.push(format!(
                "{}: saturated: the light at rest ({} of photocurrent, {} of it ambient) asks for {} of collector current, the load lets {} through and leaves {} across the phototransistor",
                self.path,
                amperes(light),
                amperes(self.light.ambient),
                amperes(asked),
                amperes(self.lead_current()),
                volts(self.voltage()),
            ));
        } else if self.is_starved() {
            warnings.push(format!(
                "{}: starved: {} of photocurrent at rest sets up {} of collector current, below the {} at which the current gain of {} has halved; under {} of photocurrent the gain law gives hardly any",
                self.path,
                amperes(light),
                amperes(self.lead_current()),
                amperes(self.part.low),
                self.part.gain,
                amperes(self.part.low / self.part.gain),
            ));
        }
        if self.device.rest.transport * self.part.inverse_high > 1.0 {
            warnings.push(format!(
                "{}: {} of collector current at rest, above the {} at which the current gain has halved",
                self.path,
                amperes(self.lead_current()),
                amperes(1.0 / self.part.inverse_high),
            ));
        }
        warnings
    }

    fn slowest_time(&self) -> f64 {
        self.time_constant()
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        in_time::runner(self, conditions)
    }
}
