//! A photovoltaic cell into a load, on paper.
//!
//! The cell drives its load by itself, without supply or bias. While the load keeps it near short circuit the output follows the
//! light; towards the open-circuit voltage its own diode takes the photocurrent, and the output grows with the light's logarithm.

use num_complex::Complex64;
use std::f64::consts::TAU;

use super::LightAtRest;
use super::detector::Sensitivity;
use crate::design::Section;
use crate::physics::constants::thermal_voltage;
use crate::physics::noise::{johnson, johnson_current, shot};
use crate::physics::photocell::Cell;
use crate::quantity::Dimension;
use crate::signal::implicit::rising_root;
use crate::station::noise::Contributor;
use crate::station::wiring::{Branch, Drive, Load};
use crate::station::{Conditions, Limit, Model, Reading, Runner, Share};

mod in_time;

/// Part of the photocurrent that the diode takes, above which the cell counts as compressing.
const COMPRESSING: f64 = 0.2;

/// Cell and load on paper.
///
/// The capacitance across the junction is constant, as stated; what the junction stores in forward conduction is left out, so
/// that a cell near its open-circuit voltage is slower than here.
pub struct PhotocellHead {
    path: String,
    responsivity: f64,
    cell: Cell,
    /// Across the junction, F.
    junction_capacitance: f64,
    /// Current lost in diode and shunt at rest, A, and its slope, S.
    lost: (f64, f64),
    own_conductance: f64,
    /// Conductance that carries DC: the load's own and the next stage's, S.
    conductance: f64,
    /// Across the load, F.
    capacitance: f64,
    branch: Option<Branch>,
    /// Voltage on the branch's capacitor at rest, V.
    branch_rest: f64,
    light: LightAtRest,
    /// Junction and output at rest, V.
    junction: f64,
    rest: f64,
    /// Across the junction (the moving shot noise first), in series (V²/Hz), across the load.
    at_junction: [Contributor; 2],
    in_series: Contributor,
    at_load: Contributor,
}

impl PhotocellHead {
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
        let cell = Cell::new(
            count * detector.number("saturation_current"),
            detector.number("ideality") * thermal_voltage(temperature),
            detector.number("series_resistance") / count,
            detector.number("shunt_resistance") / count,
        );
        let own_conductance = 1.0 / section.number("load");
        let conductance = own_conductance + next.conductance;
        let injected = next.conductance * next.return_voltage;
        let junction = cell.settle(light.total(), conductance, injected);
        let rest = (junction + cell.series * injected) / (1.0 + cell.series * conductance);
        let place = |cause: &str| format!("{}.{cause}", detector.path);
        let junction_shot = cell.junction.shot_current(-junction);
        Self {
            path: section.path.clone(),
            responsivity: sensitivity.responsivity,
            junction_capacitance: count * detector.number("capacitance"),
            lost: cell.lost(junction),
            own_conductance,
            conductance,
            capacitance: section.number("capacitance") + next.capacitance,
            branch: next.branch,
            branch_rest: rest - next.return_voltage,
            light,
            junction,
            rest,
            at_junction: [
                Contributor::white(place("shot"), shot(light.total() + junction_shot)),
                Contributor::white(
                    place("shunt"),
                    johnson_current(cell.junction.shunt, temperature),
                ),
            ],
            in_series: Contributor::white(place("series"), johnson(cell.series, temperature)),
            at_load: Contributor::white(
                format!("{}.load", section.path),
                johnson_current(own_conductance, temperature),
            ),
            cell,
        }
    }

    /// What it offers: a node solved with its load.
    pub fn drive(&self) -> Drive {
        let source = self.cell.series + 1.0 / self.lost.1;
        Drive {
            rest: self.rest,
            series: 0.0,
            seen: 1.0 / (self.own_conductance + 1.0 / source),
            blocked: None,
        }
    }

    /// Conductance across the load in mid-band, S.
    fn mid_band(&self) -> f64 {
        self.conductance + self.branch.map_or(0.0, |b| 1.0 / b.resistance)
    }

    /// Output away from rest in mid-band, V, under a photocurrent of `current` (A) away from rest.
    fn output_under(&self, current: f64) -> f64 {
        let divided = 1.0 + self.cell.series * self.mid_band();
        let leaving = self.mid_band() / divided;
        let v = rising_root(0.0, 1e-12, |v| {
            let (lost, slope) = self.cell.lost(self.junction + v);
            (lost - self.lost.0 + leaving * v - current, slope + leaving)
        });
        v / divided
    }

    /// Output, V, at `frequency` (Hz) for a current into the junction and one into the load, A, and for a voltage in series, V.
    fn gains(&self, frequency: f64) -> [Complex64; 3] {
        let hung = Load {
            conductance: self.conductance,
            return_voltage: 0.0,
            branch: self.branch,
            capacitance: self.capacitance,
        };
        let load = hung.admittance(frequency);
        let junction = Complex64::new(self.lost.1, TAU * frequency * self.junction_capacitance);
        // Written so that no series resistance is no special case.
        let determinant = junction + load + self.cell.series * junction * load;
        let one = Complex64::from(1.0);
        [one, one + self.cell.series * junction, junction].map(|n| n / determinant)
    }

    /// Current into the leads at rest, A.
    fn lead_current(&self) -> f64 {
        self.light.total() - self.lost.0
    }

    /// Part of the photocurrent at rest that the diode takes.
    fn compression(&self) -> f64 {
        let shunt = self.cell.junction.shunt * self.junction;
        if self.light.total() > 0.0 {
            (self.lost.0 - shunt) / self.light.total()
        } else {
            0.0
        }
    }
}

impl Model for PhotocellHead {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "photovoltaic cell into a load".into()
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
            ampere("current into the load", self.lead_current()),
            volt("output", self.rest),
            volt(
                "open-circuit voltage",
                self.cell.open_circuit_voltage(self.light.total()),
            ),
            Reading {
                name: "taken by the diode",
                value: self.compression(),
                dimension: Dimension::Share,
            },
            Reading {
                name: "corner",
                value: 1.0 / (TAU * self.slowest_time()),
                dimension: Dimension::Hertz,
            },
        ]
    }

    fn curve(&self, x: f64) -> f64 {
        self.output_under((self.responsivity * x).max(-self.light.total()))
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.responsivity * self.gains(frequency)[0]
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        let [junction, load, series] = self.gains(frequency).map(|g| g.norm_sqr());
        let mut shares: Vec<Share> = self
            .at_junction
            .iter()
            .map(|c| c.share(frequency, junction))
            .collect();
        shares.push(self.in_series.share(frequency, series));
        shares.push(self.at_load.share(frequency, load));
        shares
    }

    fn limits(&self) -> Vec<Limit> {
        vec![Limit::Level {
            cause: "darkness",
            at: self.output_under(-self.light.total()),
        }]
    }

    fn warnings(&self) -> Vec<String> {
        if self.compression() <= COMPRESSING {
            return Vec::new();
        }
        vec![format!(
            "{}: the cell compresses: of {} of photocurrent at rest ({} of it ambient) its own diode takes {}; it stands at {}, {} when open",
            self.path,
            Dimension::Ampere.show(self.light.total()),
            Dimension::Ampere.show(self.light.ambient),
            Dimension::Share.show(self.compression()),
            Dimension::Volt.show(self.rest),
            Dimension::Volt.show(self.cell.open_circuit_voltage(self.light.total()))
        )]
    }

    fn slowest_time(&self) -> f64 {
        // The coefficient of s in the nodes' determinant: the sum of both time constants.
        let (g, r) = (self.lost.1, self.cell.series);
        let still = g + self.conductance + r * g * self.conductance;
        (self.junction_capacitance * (1.0 + r * self.conductance)
            + self.capacitance * (1.0 + r * g))
            / still
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        in_time::runner(self, conditions)
    }
}
