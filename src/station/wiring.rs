//! How stations load each other: what a stage shows to the one before it, and what it offers to the one after.

use num_complex::Complex64;
use std::f64::consts::TAU;

/// What stands behind an electrical node, seen from the station that drives it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Load {
    /// Conductance that also carries DC, S (≥ 0).
    pub conductance: f64,
    /// Voltage that this conductance returns to, V.
    pub return_voltage: f64,
    /// Resistance behind a capacitor.
    pub branch: Option<Branch>,
    /// Capacitance straight across the node, F (≥ 0).
    pub capacitance: f64,
}

/// A resistance (Ω, finite) behind a capacitance (F).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Branch {
    pub resistance: f64,
    pub capacitance: f64,
}

impl Load {
    /// Nothing at all.
    pub const OPEN: Self = Self {
        conductance: 0.0,
        return_voltage: 0.0,
        branch: None,
        capacitance: 0.0,
    };

    /// A resistance (Ω, may be infinite) to `return_voltage` (V).
    pub fn resistor(resistance: f64, return_voltage: f64) -> Self {
        Self {
            conductance: 1.0 / resistance,
            return_voltage,
            ..Self::OPEN
        }
    }

    /// Conductance in mid-band, where the coupling capacitors are short, S.
    pub fn signal_conductance(&self) -> f64 {
        self.conductance + self.branch.map_or(0.0, |b| 1.0 / b.resistance)
    }

    /// Admittance at `frequency` (Hz), S.
    pub fn admittance(&self, frequency: f64) -> Complex64 {
        let s = Complex64::new(0.0, TAU * frequency);
        let branch = self.branch.map_or(0.0.into(), |b| {
            s * b.capacitance / (1.0 + s * b.capacitance * b.resistance)
        });
        self.conductance + s * self.capacitance + branch
    }

    /// This load behind a series capacitor (F). A capacitor further on is taken in mid-band.
    pub fn behind_capacitor(&self, capacitance: f64) -> Self {
        let conductance = self.signal_conductance();
        let branch = (conductance > 0.0).then(|| Branch {
            resistance: 1.0 / conductance,
            capacitance,
        });
        Self {
            conductance: 0.0,
            return_voltage: self.return_voltage,
            branch,
            capacitance: 0.0,
        }
    }
}

/// What a station offers at its output.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Drive {
    /// Quiescent voltage behind `series`, V.
    pub rest: f64,
    /// Resistance still in series, whose division with the next input is the next station's to reckon, Ω.
    pub series: f64,
    /// Resistance that the next input sees looking back in mid-band, Ω (`series`, or more where the node was solved with its load).
    pub seen: f64,
    /// Series capacitor in that look back, F.
    pub blocked: Option<f64>,
}

impl Drive {
    /// A stiff node at `rest` volts.
    pub fn stiff(rest: f64) -> Self {
        Self {
            rest,
            series: 0.0,
            seen: 0.0,
            blocked: None,
        }
    }

    /// Quiescent voltage at the node once `load` hangs on it, V.
    pub fn loaded_rest(&self, load: &Load) -> f64 {
        let g = load.conductance * self.series;
        (self.rest + g * load.return_voltage) / (1.0 + g)
    }

    /// Share of the signal that reaches the node under a mid-band `conductance` (S).
    pub fn division(&self, conductance: f64) -> f64 {
        1.0 / (1.0 + conductance * self.series)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_capacitor_hides_the_load_at_dc_only() {
        let load = Load::resistor(10e3, 4.5).behind_capacitor(1e-6);
        assert_eq!(load.conductance, 0.0);
        // 10 kΩ behind 1 µF: corner 15.9155 Hz (shared check list, section 8).
        assert!((load.admittance(15.9155).norm() * 10e3 - 0.5f64.sqrt()).abs() < 1e-5);
        assert!((load.signal_conductance() - 1e-4).abs() < 1e-18);
        assert_eq!(Load::OPEN.behind_capacitor(1e-6).branch, None);
    }

    #[test]
    fn rest_divides_with_its_return() {
        let drive = Drive {
            rest: 0.0,
            series: 10e3,
            seen: 10e3,
            blocked: None,
        };
        assert!((drive.loaded_rest(&Load::resistor(30e3, 4.0)) - 1.0).abs() < 1e-12);
        assert!((drive.division(1.0 / 30e3) - 0.75).abs() < 1e-12);
    }
}
