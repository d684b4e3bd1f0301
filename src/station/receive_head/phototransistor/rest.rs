//! The phototransistor at rest.

use super::node::{Around, Nodes, State};
use crate::design::Section;
use crate::physics::constants::thermal_voltage;
use crate::physics::phototransistor::Transistor;
use crate::signal::implicit::rising_root;

/// The part, or `count` equal ones in parallel: currents and capacitances add, gains and times stay.
pub fn transistor(section: &Section, count: f64, temperature: f64) -> Transistor {
    Transistor {
        thermal_voltage: thermal_voltage(temperature),
        saturation: count * section.number("saturation_current"),
        gain: section.number("gain"),
        low: count * section.number("gain_low_current"),
        inverse_high: 1.0 / (count * section.number("gain_high_current")),
        reverse_gain: section.number("reverse_gain"),
        inverse_early: 1.0 / section.number("early_voltage"),
        transit_time: section.number("transit_time"),
        emitter_capacitance: count * section.number("emitter_capacitance"),
        collector_capacitance: count * section.number("collector_capacitance"),
    }
}

/// Junction voltages at rest under the photocurrent `light` (A), with `conductance` (S) and `from_next` (A) at the load.
pub fn settled(
    part: &Transistor,
    base_conductance: f64,
    (conductance, from_next): (f64, f64),
    supply: f64,
    light: f64,
) -> [f64; 2] {
    // Counted from V_BE = 0 and no drop.
    let start = Around::new(part, base_conductance, [0.0, -supply], false);
    let r = start.rest;
    let s = Nodes::at_rest(start, conductance).solve(
        [0.0; 3],
        [
            light - r.base_emitter - r.base_collector,
            light + from_next + r.transport - r.base_collector,
        ],
        &State::default(),
    );
    [s.x, s.y - supply]
}

/// Junction voltages at which the base–collector junction takes half of the photocurrent `light` (A).
pub fn halved(part: &Transistor, base_conductance: f64, light: f64) -> [f64; 2] {
    let half = light / 2.0;
    let v_bc = part.thermal_voltage * (half * part.reverse_gain / part.saturation).ln_1p();
    let v_be = rising_root(v_bc, 1e-12, |v| {
        let f = part.at(v, v_bc);
        (
            f.base_emitter + base_conductance * v - half,
            f.base_emitter_x + base_conductance,
        )
    });
    [v_be, v_bc]
}
