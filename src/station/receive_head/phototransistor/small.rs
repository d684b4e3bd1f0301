//! The phototransistor under small signals.

use num_complex::Complex64;

use super::node::Around;

/// The two nodes for small signals at one frequency: rows base and load, columns x and u (y = x + u).
pub struct Small {
    base: [Complex64; 2],
    load: [Complex64; 2],
}

impl Small {
    /// Around `device`, at `omega` (rad/s), with the admittance `across` (S) at the load.
    pub fn new(device: &Around, omega: f64, across: Complex64) -> Self {
        let r = &device.rest;
        let s = Complex64::new(0.0, omega);
        let emitter = r.base_emitter_x + device.base_conductance + s * r.emitter_charge_x;
        let collector = r.base_collector_y + s * r.collector_charge_y;
        Self {
            base: [emitter + collector, collector],
            load: [
                collector - r.transport_x - r.transport_y,
                across + collector - r.transport_y,
            ],
        }
    }

    /// Drop across the load, V, for currents into the base and into the load's node, A.
    pub fn drop(&self, [base, load]: [f64; 2]) -> Complex64 {
        let determinant = self.base[0] * self.load[1] - self.base[1] * self.load[0];
        (self.base[0] * load - self.load[0] * base) / determinant
    }
}
