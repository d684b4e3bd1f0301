//! The photovoltaic cell: one diode with series and shunt resistance.

use super::photodiode::Junction;

/// Current against voltage of a lit cell: I = I_ph − I_0·(e^((V + I·R_s)/nV_T) − 1) − (V + I·R_s)/R_sh (the single-diode model; Sze).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Cell {
    /// The diode, with the shunt across it; its dark current is part of I_0.
    pub junction: Junction,
    /// Resistance in series with the leads, Ω (≥ 0).
    pub series: f64,
}

impl Cell {
    /// From I_0 (A), n·V_T (V), R_s and R_sh (Ω; infinite: none).
    pub fn new(saturation: f64, slope_voltage: f64, series: f64, shunt: f64) -> Self {
        Self {
            junction: Junction {
                dark: 0.0,
                saturation,
                slope_voltage,
                shunt: 1.0 / shunt,
            },
            series,
        }
    }

    /// Forward current of diode and shunt, A, and its slope, S, at the junction voltage `v` (V).
    #[inline]
    pub fn lost(&self, v: f64) -> (f64, f64) {
        let (reverse, slope) = self.junction.reverse_current(-v);
        (-reverse, slope)
    }

    /// Junction voltage, V, under the photocurrent `light` (A) with a `conductance` (S; infinite: short circuit) and an
    /// `injected` current (A) at the leads.
    pub fn settle(&self, light: f64, conductance: f64, injected: f64) -> f64 {
        // The leads' voltage is u = (v + R_s·injected)/(1 + R_s·G); what leaves the junction is G·u − injected.
        let leaving = if conductance.is_infinite() {
            1.0 / self.series
        } else {
            conductance / (1.0 + self.series * conductance)
        };
        let taken = if conductance.is_infinite() {
            0.0
        } else {
            injected / (1.0 + self.series * conductance)
        };
        if leaving.is_infinite() {
            return 0.0;
        }
        // lost(v) + leaving·v = light + taken is convex and rising: from above Newton's method falls onto the root.
        let given = light + taken;
        let mut v = if given > 0.0 {
            let linear = given / (leaving + self.junction.shunt);
            let bent = self.junction.slope_voltage * (given / self.junction.saturation).ln_1p();
            linear.min(bent)
        } else {
            0.0
        };
        for _ in 0..100 {
            let (lost, slope) = self.lost(v);
            let step = (lost + leaving * v - given) / (slope + leaving);
            v -= step;
            if step.abs() <= 1e-15 * v.abs().max(1e-3) {
                break;
            }
        }
        v
    }

    /// Voltage of the open leads, V.
    pub fn open_circuit_voltage(&self, light: f64) -> f64 {
        self.settle(light, 0.0, 0.0)
    }

    /// Current through the shorted leads, A.
    pub fn short_circuit_current(&self, light: f64) -> f64 {
        light - self.lost(self.settle(light, f64::INFINITY, 0.0)).0
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::physics::constants::thermal_voltage;

    /// Reference values of the single-diode model at 300 K, solved apart: I_ph, I_0, n, R_s, R_sh; I_sc, V_oc, V_mp, P_mp.
    const TABLE: [([f64; 5], [f64; 4]); 3] = [
        (
            [1e-3, 1e-9, 1.5, 1.0, 10e3],
            [0.999900e-3, 0.533611, 0.434397, 0.382921e-3],
        ),
        (
            [30e-6, 1e-9, 1.5, 1.0, 100e3],
            [29.9997e-6, 0.394298, 0.306141, 7.42533e-6],
        ),
        (
            [30e-3, 1e-9, 1.3, 0.5, 1e3],
            [29.9850e-3, 0.577958, 0.473484, 13.0367e-3],
        ),
    ];

    fn cell([_, saturation, n, series, shunt]: [f64; 5]) -> Cell {
        Cell::new(saturation, n * thermal_voltage(300.0), series, shunt)
    }

    /// Leads' voltage across a load `resistance`, V.
    fn across(cell: &Cell, light: f64, resistance: f64) -> f64 {
        cell.settle(light, 1.0 / resistance, 0.0) / (1.0 + cell.series / resistance)
    }

    #[test]
    fn single_diode_table() {
        // Given to six digits.
        let near = |a: f64, b: f64| assert!((a / b - 1.0).abs() < 2e-6, "{a} against {b}");
        for (given, [isc, voc, vmp, pmp]) in TABLE {
            let (c, light) = (cell(given), given[0]);
            near(c.short_circuit_current(light), isc);
            near(c.open_circuit_voltage(light), voc);
            // The load that takes the stated greatest power, and none near by takes more.
            let load = vmp * vmp / pmp;
            near(across(&c, light, load), vmp);
            let power = |r: f64| across(&c, light, r).powi(2) / r;
            assert!(power(load) > power(0.99 * load) && power(load) > power(1.01 * load));
        }
    }

    #[test]
    fn loads_of_the_table() {
        let c = cell(TABLE[0].0);
        for (load, volts) in [
            (100.0, 0.0989989),
            (300.0, 0.290696),
            (1e3, 0.503894),
            (10e3, 0.531328),
        ] {
            let v = across(&c, 1e-3, load);
            assert!((v / volts - 1.0).abs() < 2e-6, "{load}: {v}");
        }
    }
}
