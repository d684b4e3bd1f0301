//! The driver: volts to current through the emitter.

mod transistor;

use super::emitter::Emitter;
use crate::design::Section;
use crate::physics::diode::SeriesLoop;
use crate::signal::pole::FirstOrderLaw;
use crate::station::noise::Contributor;
use crate::station::wiring::{Drive, Load};
use transistor::Modulator;

/// A driver with its emitter's voltage in the loop.
#[derive(Debug, Clone)]
pub struct Driver {
    pub supply: f64,
    kind: Kind,
}

#[derive(Debug, Clone)]
enum Kind {
    /// supply + v stands across the resistor, what drives it and the emitter.
    SeriesResistor { around: SeriesLoop, resistor: f64 },
    /// i = s·ln(1 + e^((bias + slope·v)/s)), s = slope·V_T, held at what the supply allows.
    CurrentSink {
        bias: f64,
        slope: f64,
        softness: f64,
        sense: f64,
        compliance: SeriesLoop,
        room: f64,
        /// What the supply allows the emitter when it is coldest, A: always allowed.
        surely: f64,
    },
    /// A common emitter.
    Transistor(Box<Modulator>),
}

impl Driver {
    /// What it shows to the stage before it; `temperature` in K.
    pub fn input_load(section: &Section, temperature: f64) -> Load {
        if section.kind.as_deref() == Some("transistor") {
            return Modulator::input_load(section, temperature);
        }
        Load::resistor(section.number("input_resistance"), 0.0)
    }

    /// From its section, behind `before`; `vt` the thermal voltage, `temperature` in K.
    pub fn new(
        section: &Section,
        emitter: &Emitter,
        before: &Drive,
        vt: f64,
        temperature: f64,
    ) -> Self {
        let load = Self::input_load(section, temperature);
        let behind = before.series * before.division(load.signal_conductance());
        let supply = section.number("supply");
        let kind = match section.kind.as_deref() {
            Some("current-sink") => {
                let (slope, sense) = (section.number("slope"), section.number("sense"));
                Kind::CurrentSink {
                    bias: section.number("bias"),
                    slope,
                    softness: slope * vt,
                    sense,
                    compliance: emitter.in_loop(sense),
                    room: supply - section.number("saturation"),
                    surely: f64::NEG_INFINITY,
                }
            }
            Some("transistor") => Kind::Transistor(Box::new(Modulator::new(
                section,
                emitter,
                before,
                temperature,
            ))),
            _ => {
                let resistor = section.number("resistor");
                Kind::SeriesResistor {
                    around: emitter.in_loop(resistor + behind),
                    resistor,
                }
            }
        };
        Self { supply, kind }
    }

    pub fn title(&self) -> &'static str {
        match self.kind {
            Kind::SeriesResistor { .. } => "series resistor",
            Kind::CurrentSink { .. } => "current sink",
            Kind::Transistor(_) => "transistor",
        }
    }

    /// Tells the driver the most that the emitter's forward voltage can lie above its rest, V (its junction then is as cold as
    /// the surroundings), so that the supply's limit need not be reckoned for every sample.
    pub fn set_coldest(&mut self, heat_voltage: f64) {
        match &mut self.kind {
            Kind::SeriesResistor { .. } => {}
            Kind::CurrentSink {
                compliance,
                room,
                surely,
                ..
            } => *surely = compliance.current(*room - heat_voltage),
            Kind::Transistor(modulator) => modulator.set_coldest(heat_voltage),
        }
    }

    /// Current, A, and whether it is all that the supply allows, at `input` volts where `rest` is the input's rest.
    ///
    /// `heat_voltage` (V) is what the junction's heat beyond rest has added to the emitter's forward voltage, `near` (A) a current to start from.
    #[inline]
    pub fn current(&self, rest: f64, input: f64, heat_voltage: f64, near: f64) -> (f64, bool) {
        match &self.kind {
            Kind::SeriesResistor { around, .. } => (
                around
                    .current_near(self.supply + input - heat_voltage, near)
                    .max(0.0),
                false,
            ),
            Kind::CurrentSink {
                bias,
                slope,
                softness,
                compliance,
                room,
                surely,
                ..
            } => {
                let asked = soft_turn_off(bias + slope * (input - rest), *softness);
                if asked < *surely {
                    return (asked, false);
                }
                let allowed = compliance.current(room - heat_voltage).max(0.0);
                (asked.min(allowed), asked >= allowed)
            }
            Kind::Transistor(modulator) => modulator.current(input - rest, heat_voltage, near),
        }
    }

    /// Volts at the driver's own input for each volt at the node before, where that is not the divider's plain share.
    pub fn input_gain(&self) -> Option<f64> {
        match &self.kind {
            Kind::Transistor(modulator) => Some(modulator.input_gain()),
            _ => None,
        }
    }

    /// Low-pass between the node before and the law.
    pub fn input_pole(&self) -> FirstOrderLaw {
        match &self.kind {
            Kind::Transistor(modulator) => modulator.input_pole(),
            _ => FirstOrderLaw::low_pass(f64::INFINITY),
        }
    }

    /// Noise voltages besides the resistances', before the input pole and behind it.
    pub fn noises(&self) -> [Vec<Contributor>; 2] {
        match &self.kind {
            Kind::Transistor(modulator) => modulator.noises(),
            _ => [Vec::new(), Vec::new()],
        }
    }

    /// What an engineer ought to know.
    pub fn warnings(&self) -> Vec<String> {
        match &self.kind {
            Kind::Transistor(modulator) => modulator.warnings(),
            _ => Vec::new(),
        }
    }

    /// Bias asked for, A.
    pub fn asked_at_rest(&self) -> f64 {
        match &self.kind {
            Kind::SeriesResistor { .. } => 0.0,
            Kind::CurrentSink { bias, softness, .. } => soft_turn_off(*bias, *softness),
            Kind::Transistor(modulator) => modulator.bias(),
        }
    }

    /// Slope of the current against the input at rest, S.
    pub fn slope(&self, input: f64, current: f64) -> f64 {
        match &self.kind {
            Kind::SeriesResistor { around, .. } => {
                if self.supply + input > 0.0 {
                    around.slope(current)
                } else {
                    0.0
                }
            }
            Kind::CurrentSink {
                bias,
                slope,
                softness,
                ..
            } => {
                if current < self.asked_at_rest() {
                    0.0
                } else {
                    slope / (1.0 + (-bias / softness).exp())
                }
            }
            Kind::Transistor(modulator) => modulator.slope(current),
        }
    }

    /// Driver volts that a kelvin of junction heat is worth, V/K (signed): only the resistor driver feels the forward voltage.
    pub fn heat_voltage(&self, emitter: &Emitter) -> f64 {
        match self.kind {
            Kind::SeriesResistor { .. } => -emitter.drift(),
            Kind::CurrentSink { .. } | Kind::Transistor(_) => 0.0,
        }
    }

    /// Resistances whose Johnson noise stands in series with the input, Ω, with their causes.
    pub fn noisy_resistances(&self, emitter: &Emitter) -> Vec<(&'static str, f64)> {
        match self.kind {
            Kind::SeriesResistor { resistor, .. } => {
                vec![("resistor", resistor + emitter.resistance())]
            }
            Kind::CurrentSink { sense, .. } => vec![("sense", sense)],
            Kind::Transistor(_) => Vec::new(),
        }
    }
}

/// s·ln(1 + e^(i/s)): the smooth ramp of a transistor that turns off.
fn soft_turn_off(current: f64, softness: f64) -> f64 {
    let x = current / softness;
    if x > 40.0 {
        current
    } else {
        softness * x.exp().ln_1p()
    }
}
