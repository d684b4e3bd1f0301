//! The amplifier itself, as its data sheet states it.

use crate::design::Section;
use crate::physics::opamp::SlopeLaw;
use crate::signal::pole::FirstOrderLaw;
use crate::station::noise::Contributor;
use std::f64::consts::TAU;

/// An op-amp part with its supply and reference. SI units; noise as amplitude densities.
#[derive(Debug, Clone)]
pub struct OpampPart {
    pub gain_bandwidth: f64,
    pub slew: f64,
    /// Half-width of the input pair's linear range, V.
    pub input_linear: f64,
    pub voltage_noise: f64,
    pub voltage_corner: f64,
    pub current_noise: f64,
    pub current_corner: f64,
    pub output_current: f64,
    pub offset: f64,
    pub bias_current: f64,
    pub input_capacitance: f64,
    /// Reference voltage that the circuit works around, V.
    pub reference: f64,
    swing: (f64, f64),
    supply: (f64, f64),
}

impl OpampPart {
    /// From a section that holds the part's keys, its supply and reference (half a single supply, 0 of a split one).
    pub fn new(section: &Section) -> Self {
        let supply = match *section.numbers("supply") {
            [low, high] => (low, high),
            [single] => (0.0, single),
            _ => (f64::NEG_INFINITY, f64::INFINITY),
        };
        let split = section.numbers("supply").len() == 2;
        let middle = if split { 0.0 } else { supply.1 / 2.0 };
        let (gain_bandwidth, slew) = (section.number("gbw"), section.number("slew"));
        Self {
            gain_bandwidth,
            slew,
            input_linear: section.optional("input_linear").unwrap_or(slew / (TAU * gain_bandwidth)),
            voltage_noise: section.number("noise_voltage"),
            voltage_corner: section.number("noise_voltage_corner"),
            current_noise: section.number("noise_current"),
            current_corner: section.number("noise_current_corner"),
            output_current: section.number("output_current"),
            offset: section.number("offset"),
            bias_current: section.number("bias_current"),
            input_capacitance: section.number("input_capacitance"),
            reference: section.optional("reference").unwrap_or(middle),
            swing: (section.number("swing_low"), section.number("swing_high")),
            supply,
        }
    }

    /// Lowest and highest output, V.
    pub fn rails(&self) -> (f64, f64) {
        let (low, high) = (self.supply.0 + self.swing.0, self.supply.1 - self.swing.1);
        // A supply too small for its swings leaves one point between them.
        if low <= high { (low, high) } else { ((low + high) / 2.0, (low + high) / 2.0) }
    }

    /// The input pair's slope law.
    pub fn slope_law(&self) -> SlopeLaw {
        // An infinite range (or the undefined one of infinite slew over infinite gain-bandwidth) is linear.
        let linear = if self.input_linear.is_nan() { f64::INFINITY } else { self.input_linear };
        SlopeLaw { unity: TAU * self.gain_bandwidth, linear, slew: self.slew }
    }

    /// Noise contributors from (cause, amplitude density, corner, path to the output that the resistors ask for).
    pub(super) fn contributors(
        &self,
        name: &dyn Fn(&str) -> String,
        unit: usize,
        list: impl FnOnce() -> Vec<(&'static str, f64, f64, Option<FirstOrderLaw>)>,
    ) -> Vec<Contributor> {
        list()
            .into_iter()
            .map(|(cause, amplitude, corner, shape)| Contributor {
                name: name(cause),
                density: amplitude * amplitude,
                corner,
                shape,
                unit,
            })
            .collect()
    }
}
