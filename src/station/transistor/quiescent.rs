//! The stage at rest.

use crate::design::Section;
use crate::physics::bipolar::CommonEmitter;
use crate::physics::constants::thermal_voltage;
use crate::station::wiring::Load;

use super::part::BipolarPart;

/// Everything about the stage that does not depend on what drives it.
#[derive(Debug, Clone)]
pub(super) struct Quiescent {
    pub part: BipolarPart,
    /// Lower and upper rail, V.
    pub rails: (f64, f64),
    pub bias: f64,
    pub collector_resistor: f64,
    /// Conductance of the base divider, S.
    pub divider: f64,
    /// Conductance at the collector that carries DC: the resistor's and the next stage's, S.
    pub conductance: f64,
    /// Voltages of rest, V.
    pub base: f64,
    pub emitter: f64,
    pub collector: f64,
    /// The transistor, driven by a voltage straight at its base.
    pub law: CommonEmitter,
}

impl Quiescent {
    /// From its section with the `next` stage's load; `temperature` in K.
    pub fn new(section: &Section, next: &Load, temperature: f64) -> Self {
        let part = BipolarPart::new(section);
        let vt = thermal_voltage(temperature);
        let rails = match *section.numbers("supply") {
            [low, high] => (low, high),
            [single] => (0.0, single),
            _ => (f64::NEG_INFINITY, f64::INFINITY),
        };
        let bias = section.number("bias");
        let collector_resistor = section.number("collector_resistor");
        let emitter_resistor = section.number("emitter_resistor");
        let conductance = 1.0 / collector_resistor + next.conductance;
        // Open collector: the supply and what the next stage returns to.
        let open =
            (rails.1 / collector_resistor + next.conductance * next.return_voltage) / conductance;
        let base_current = bias / part.gain;
        let lifted = rails.0 + emitter_resistor * base_current;
        let most = (open - part.saturation - lifted) * conductance
            / (1.0 + emitter_resistor * conductance);
        let saturated = most <= bias;
        let current = if saturated { most.max(0.0) } else { bias };
        let collector = open - current / conductance;
        let emitter = lifted + emitter_resistor * current;
        let across = collector - emitter;
        let law = CommonEmitter {
            thermal_voltage: vt,
            base_resistance: part.base_resistance,
            emitter_resistance: emitter_resistor * (1.0 - section.number("bypassed")),
            base_rest: base_current,
            asked: bias,
            collector_rest: current,
            early: 1.0 / (part.early_voltage + across.max(0.0)),
            room: if saturated {
                0.0
            } else {
                across - part.saturation
            },
        };
        Self {
            rails,
            bias,
            collector_resistor,
            divider: 1.0 / section.number("bias_resistance"),
            conductance,
            base: emitter + part.junction_voltage(bias, across, vt),
            emitter,
            collector,
            law,
            part,
        }
    }

    /// Conductance of the input at signal frequencies, S.
    pub fn input_conductance(&self) -> f64 {
        self.divider + 1.0 / (self.part.base_resistance + self.law.junction_resistance())
    }

    /// Whether the collector rests at its least voltage.
    pub fn saturated(&self) -> bool {
        self.law.room == 0.0
    }
}
