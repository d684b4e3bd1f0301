//! The amplifier itself, as its data sheet states it.

use crate::design::Section;
use crate::physics::opamp::SlopeLaw;
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;
use crate::station::Limit;
use crate::station::noise::Contributor;
use crate::station::wiring::Load;
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

/// An output's quiescent voltage and the limits around it.
#[derive(Debug, Clone, Copy)]
pub struct OutputRest {
    /// V
    pub rest: f64,
    /// How far beyond the limits the resistors ask it to rest, V; 0 where it rests free.
    pub excess: f64,
    /// Upper limit, counted from rest, V, and its cause.
    pub high: (f64, &'static str),
    /// Lower limit, counted from rest, V (≤ 0), and its cause.
    pub low: (f64, &'static str),
}

impl OutputRest {
    /// Whether the output rests on a limit, where no small signal passes.
    pub fn stuck(&self) -> bool {
        self.excess != 0.0
    }

    /// The limits as a station reports them.
    pub fn limits(&self, slew: f64) -> Vec<Limit> {
        vec![
            Limit::Level {
                cause: self.high.1,
                at: self.high.0,
            },
            Limit::Level {
                cause: self.low.1,
                at: self.low.0,
            },
            Limit::Slope {
                cause: "slew rate",
                at: slew,
            },
        ]
    }

    /// The warning of a stuck output, if it is.
    pub fn warning(&self, path: &str) -> Option<String> {
        let show = |v| Dimension::Volt.show(v);
        self.stuck().then(|| {
            format!(
                "{path}: the output rests on its limit at {}, the circuit asks for {}; no small signal passes",
                show(self.rest),
                show(self.rest + self.excess)
            )
        })
    }
}

impl OpampPart {
    /// From a section that holds the part's keys, its supply and reference (half a single supply, 0 of a split one). A key that
    /// such a section does not have is an ideal part's 0: a power amplifier's swing, offset or input current.
    pub fn new(section: &Section) -> Self {
        let supply = match *section.numbers("supply") {
            [low, high] => (low, high),
            [single] => (0.0, single),
            _ => (f64::NEG_INFINITY, f64::INFINITY),
        };
        let split = section.numbers("supply").len() == 2;
        let middle = if split { 0.0 } else { supply.1 / 2.0 };
        let number = |key: &str| section.key(key).map_or(0.0, |_| section.number(key));
        let (gain_bandwidth, slew) = (number("gbw"), number("slew"));
        Self {
            gain_bandwidth,
            slew,
            input_linear: section
                .optional("input_linear")
                .unwrap_or(slew / (TAU * gain_bandwidth)),
            voltage_noise: number("noise_voltage"),
            voltage_corner: number("noise_voltage_corner"),
            current_noise: number("noise_current"),
            current_corner: number("noise_current_corner"),
            output_current: number("output_current"),
            offset: number("offset"),
            bias_current: number("bias_current"),
            input_capacitance: number("input_capacitance"),
            reference: section.optional("reference").unwrap_or(middle),
            swing: (number("swing_low"), number("swing_high")),
            supply,
        }
    }

    /// Lowest and highest output, V.
    pub fn rails(&self) -> (f64, f64) {
        let (low, high) = (self.supply.0 + self.swing.0, self.supply.1 - self.swing.1);
        // A supply too small for its swings leaves one point between them.
        if low <= high {
            (low, high)
        } else {
            ((low + high) / 2.0, (low + high) / 2.0)
        }
    }

    /// Where the output rests when the resistors ask for `asked` volts, and its room either way.
    ///
    /// `feedback_conductance` (S) leads from the output to the reference; `next` hangs on the output.
    pub fn rest(&self, asked: f64, feedback_conductance: f64, next: &Load) -> OutputRest {
        let (low, high) = self.rails();
        let current = |v: f64| {
            (v - self.reference) * feedback_conductance
                + (v - next.return_voltage) * next.conductance
        };
        let mut rest = asked.clamp(low, high);
        let dc_conductance = feedback_conductance + next.conductance;
        if current(rest).abs() > self.output_current {
            let beyond = current(rest) - self.output_current.copysign(current(rest));
            rest -= beyond / dc_conductance;
        }
        let signal_conductance = feedback_conductance + next.signal_conductance();
        let by_current = |sign: f64| {
            let room = (self.output_current - sign * current(rest)) / signal_conductance;
            // Nothing to drive, or no limit: no bound.
            if room.is_nan() {
                f64::INFINITY
            } else {
                room.max(0.0)
            }
        };
        let pick = |rail: f64, current: f64, name: &'static str| {
            if current < rail {
                (current, "output current")
            } else {
                (rail, name)
            }
        };
        // A load may drag an output that is short of current beyond its swing: then there is no room at all that way.
        let up = pick((high - rest).max(0.0), by_current(1.0), "upper rail");
        let down = pick((rest - low).max(0.0), by_current(-1.0), "lower rail");
        OutputRest {
            rest,
            excess: asked - rest,
            high: up,
            low: (-down.0, down.1),
        }
    }

    /// The input pair's slope law.
    pub fn slope_law(&self) -> SlopeLaw {
        // An infinite range (or the undefined one of infinite slew over infinite gain-bandwidth) is linear.
        let linear = if self.input_linear.is_nan() {
            f64::INFINITY
        } else {
            self.input_linear
        };
        SlopeLaw {
            unity: TAU * self.gain_bandwidth,
            linear,
            slew: self.slew,
        }
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
