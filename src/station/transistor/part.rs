//! The transistor itself, as its data sheet states it.

use std::f64::consts::TAU;

use crate::design::Section;

/// A bipolar part in SI units.
#[derive(Debug, Clone, Copy)]
pub struct BipolarPart {
    /// Current gain at the working point.
    pub gain: f64,
    /// Transit time τ_F = 1/(2π·f_T), s.
    pub transit: f64,
    pub transition_frequency: f64,
    pub collector_capacitance: f64,
    pub base_resistance: f64,
    pub early_voltage: f64,
    /// Least collector-emitter voltage, V.
    pub saturation: f64,
    pub saturation_current: f64,
}

impl BipolarPart {
    /// Below this transition frequency (Hz) the one input pole no longer stands for the part up to 20 kHz.
    const SLOWEST: f64 = 1e6;

    /// From a section that holds the part's keys.
    pub fn new(section: &Section) -> Self {
        let transition_frequency = section.number("transition_frequency");
        Self {
            gain: section.number("gain"),
            transit: 1.0 / (TAU * transition_frequency),
            transition_frequency,
            collector_capacitance: section.number("collector_capacitance"),
            base_resistance: section.number("base_resistance"),
            early_voltage: section.number("early_voltage"),
            saturation: section.number("saturation"),
            saturation_current: section.number("saturation_current"),
        }
    }

    /// Base-emitter voltage, V, at a collector current (A) under `across` volts of V_CE; `vt` the thermal voltage.
    pub fn junction_voltage(&self, collector: f64, across: f64, vt: f64) -> f64 {
        let widened = 1.0 + across.max(0.0) / self.early_voltage;
        vt * (collector / (self.saturation_current * widened)).ln_1p()
    }

    /// Whether the part is too slow for the model.
    pub fn too_slow(&self) -> bool {
        self.transition_frequency < Self::SLOWEST
    }

    /// Capacitance that the base shows behind r_b, F: C_π = g_m·τ_F lowered by the emitter resistor, and Miller's share of C_µ
    /// (Gray and Meyer, the dominant pole of the common emitter). `gain` is that from base to collector, signed.
    pub fn input_capacitance(
        &self,
        transconductance: f64,
        emitter_resistance: f64,
        gain: f64,
    ) -> f64 {
        let feedback = 1.0 + transconductance * (1.0 + 1.0 / self.gain) * emitter_resistance;
        transconductance * self.transit / feedback
            + self.collector_capacitance * (1.0 - gain).max(0.0)
    }
}
