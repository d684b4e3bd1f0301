//! The common-emitter modulator: the emitter string in a transistor's collector.

use super::Emitter;
use crate::design::Section;
use crate::physics::bipolar::{CommonEmitter, State};
use crate::physics::constants::thermal_voltage;
use crate::physics::diode::SeriesLoop;
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;
use crate::station::noise::Contributor;
use crate::station::transistor::{BaseLoop, BipolarPart};
use crate::station::wiring::{Drive, Load};

/// A transistor with its emitter resistor and base divider; the divider is taken to set the bias whatever stands before.
///
/// The base loop is solved with the source's own resistance in mid-band and the emitter string's law in the collector. f_T and C_µ
/// make one linear input pole at rest. The supply's limit is hard: the current at which the string, the least collector voltage
/// and the emitter resistor use up the supply. Heat moves that limit, but not the Early effect.
#[derive(Debug, Clone)]
pub struct Modulator {
    law: CommonEmitter,
    /// Slope of the string's forward voltage at rest, Ω.
    load: f64,
    compliance: SeriesLoop,
    room: f64,
    /// What the supply allows the string when it is coldest, A: always allowed.
    surely: f64,
    /// Loop volts per volt at the node before.
    input_gain: f64,
    input_pole: FirstOrderLaw,
    noises: [Vec<Contributor>; 2],
    warnings: Vec<String>,
}

/// What hangs on the base, S: divider and input resistance, and the transistor itself.
fn hung(section: &Section) -> (f64, f64) {
    let divider = 1.0 / section.number("bias_resistance");
    (divider, divider + 1.0 / section.number("input_resistance"))
}

/// The transistor driven straight at its base.
fn law(section: &Section, part: &BipolarPart, across: f64, temperature: f64) -> CommonEmitter {
    let bias = section.number("bias");
    CommonEmitter {
        thermal_voltage: thermal_voltage(temperature),
        base_resistance: part.base_resistance,
        emitter_resistance: section.number("emitter_resistor"),
        base_rest: bias / part.gain,
        asked: bias,
        collector_rest: bias,
        early: 1.0 / (part.early_voltage + across.max(0.0)),
        room: f64::INFINITY,
    }
}

impl Modulator {
    /// What it shows to the stage before it; `temperature` in K.
    pub fn input_load(section: &Section, temperature: f64) -> Load {
        let part = BipolarPart::new(section);
        let law = law(section, &part, 0.0, temperature);
        let below = law.emitter_resistance * (law.asked + law.base_rest);
        Load {
            conductance: hung(section).1 + 1.0 / (law.base_resistance + law.junction_resistance()),
            return_voltage: below + part.junction_voltage(law.asked, 0.0, law.thermal_voltage),
            ..Load::OPEN
        }
    }

    /// From `[transmitter.driver]`, behind `before`; `temperature` in K.
    pub fn new(section: &Section, emitter: &Emitter, before: &Drive, temperature: f64) -> Self {
        let part = BipolarPart::new(section);
        let supply = section.number("supply");
        let bias = section.number("bias");
        let below = section.number("emitter_resistor") * bias * (1.0 + 1.0 / part.gain);
        let across = supply - emitter.forward_voltage(bias, 0.0) - below;
        let bare = law(section, &part, across, temperature);
        let (divider, hung) = hung(section);
        let shown = Self::input_load(section, temperature);
        let law = CommonEmitter {
            base_resistance: part.base_resistance + before.seen / (1.0 + before.seen * hung),
            ..bare
        };
        let conductance = shown.signal_conductance();
        let open_circuit = before.division(conductance) * (1.0 + conductance * before.seen);
        let load = emitter.voltage_slope(bias);
        let straight = CommonEmitter {
            base_resistance: 0.0,
            ..law
        };
        let gain = -load * straight.tangent(load.into()).0.re;
        let capacitance =
            part.input_capacitance(law.transconductance(), law.emitter_resistance, gain);
        let resistance = 1.0 / (1.0 / law.base_resistance + 1.0 / law.junction_resistance());
        let base_loop = BaseLoop::new(
            &section.path,
            &law,
            part.base_resistance,
            hung,
            before,
            temperature,
        );
        let noises = [
            base_loop.outer(divider),
            base_loop.behind(1.0, law.collector_noise_voltage()),
        ];
        let mut warnings = Vec::new();
        if before.blocked.is_none() {
            warnings.push(format!(
                "{}: no coupling capacitor stands before the base ({} there, the base rests at {}); the divider is taken to hold the bias all the same",
                section.path,
                Dimension::Volt.show(before.rest),
                Dimension::Volt.show(shown.return_voltage)
            ));
        }
        if part.too_slow() {
            warnings.push(format!(
                "{}: a transition frequency of {} is below the model's range; only the input pole is counted",
                section.path,
                Dimension::Hertz.show(part.transition_frequency)
            ));
        }
        Self {
            load,
            compliance: emitter.in_loop(law.emitter_resistance),
            room: supply - part.saturation - law.emitter_resistance * law.base_rest,
            surely: f64::NEG_INFINITY,
            input_gain: open_circuit / (1.0 + before.seen * hung),
            input_pole: FirstOrderLaw::low_pass(1.0 / (resistance * capacitance)),
            noises,
            warnings,
            law,
        }
    }

    pub fn bias(&self) -> f64 {
        self.law.asked
    }

    pub fn input_gain(&self) -> f64 {
        self.input_gain
    }

    pub fn input_pole(&self) -> FirstOrderLaw {
        self.input_pole
    }

    /// Noise voltages in the base loop, before the input pole and behind it.
    pub fn noises(&self) -> [Vec<Contributor>; 2] {
        self.noises.clone()
    }

    pub fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }

    /// See [`super::Driver::set_coldest`].
    pub fn set_coldest(&mut self, heat_voltage: f64) {
        self.surely = self.compliance.current(self.room - heat_voltage);
    }

    /// Current, A, and whether it is all that the supply allows, at `v` volts in the loop away from rest.
    #[inline]
    pub fn current(&self, v: f64, heat_voltage: f64, near: f64) -> (f64, bool) {
        let drive = near / self.law.asked;
        let start = if drive > 0.0 {
            State::at_drive(drive)
        } else {
            State::REST
        };
        // First with the string's tangent as its law; what that left out then shifts the collector.
        let first = self.law.solve(v, 0.0, self.load, &start);
        let around = self
            .law
            .solve(v, self.bend(first.collector), self.load, &first);
        let asked = self.law.asked + around.collector;
        if asked < self.surely {
            return (asked, false);
        }
        let allowed = self.compliance.current(self.room - heat_voltage).max(0.0);
        (asked.min(allowed), asked >= allowed)
    }

    /// Forward voltage that the string's law has less than its tangent, V, at `deviation` (A) from the bias.
    fn bend(&self, deviation: f64) -> f64 {
        let SeriesLoop {
            slope_voltage,
            saturation,
            ..
        } = self.compliance;
        let rest = self.law.asked + saturation;
        let part = (deviation / rest).max(-1.0 + f64::EPSILON);
        slope_voltage * (part - part.ln_1p())
    }

    /// Slope of the current against the loop's voltage at the rest `current` (A), S.
    pub fn slope(&self, current: f64) -> f64 {
        // The search for the rest may end a last bit below the bias; the supply takes away more than that.
        if current < self.law.asked * (1.0 - 1e-9) {
            return 0.0;
        }
        self.law.tangent(self.load.into()).0.re
    }
}
