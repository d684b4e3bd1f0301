//! What all detectors share, and the photodiode as a part, its current and capacitance around its rest.

use crate::design::Section;
use crate::physics::photodiode::{self, Depletion, Junction};

/// What a detector makes of light, whatever its kind.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Sensitivity {
    /// Light-sensitive area of all detectors together, m².
    pub area: f64,
    /// Primary photocurrent for light, A/W, at the emitter's wavelength.
    pub responsivity: f64,
}

impl Sensitivity {
    /// From `[receiver.detector]`; `wavelength` of the emitter in m.
    pub fn new(section: &Section, wavelength: f64) -> Self {
        Self {
            area: section.number("count") * section.number("area"),
            responsivity: section.optional("responsivity").unwrap_or_else(|| {
                photodiode::responsivity(section.number("quantum_efficiency"), wavelength)
            }),
        }
    }
}

/// One photodiode, or several equal ones in parallel.
#[derive(Debug, Clone)]
pub struct Detector {
    pub path: String,
    /// A/W at the emitter's wavelength.
    pub responsivity: f64,
    pub junction: Junction,
    pub depletion: Depletion,
}

impl Detector {
    /// From `[receiver.detector]`; `wavelength` of the emitter in m, `temperature` in K, `vt` the thermal voltage.
    pub fn new(section: &Section, wavelength: f64, temperature: f64, vt: f64) -> Self {
        let count = section.number("count");
        Self {
            path: section.path.clone(),
            responsivity: Sensitivity::new(section, wavelength).responsivity,
            junction: Junction {
                dark: count * photodiode::dark_current(section.number("dark_current"), temperature),
                saturation: count * section.number("saturation_current"),
                slope_voltage: section.number("ideality") * vt,
                shunt: count / section.number("shunt_resistance"),
            },
            depletion: Depletion {
                zero_bias: count * section.number("capacitance"),
                built_in: section.number("built_in"),
                grading: section.number("grading"),
            },
        }
    }

    /// The diode around a reverse voltage of rest, bent or as its tangent.
    pub fn around(&self, reverse: f64, straight: bool) -> AroundRest {
        let (current, conductance) = self.junction.reverse_current(reverse);
        AroundRest {
            reverse,
            current,
            conductance,
            capacitance: self.depletion.capacitance(reverse),
            charge: self.depletion.charge(reverse),
            bent: (!straight).then_some((self.junction, self.depletion)),
        }
    }
}

/// Current and charge of the diode against a deviation of its reverse voltage.
#[derive(Debug, Clone, Copy)]
pub struct AroundRest {
    pub reverse: f64,
    /// Reverse current besides the photocurrent at rest, A.
    pub current: f64,
    /// S
    pub conductance: f64,
    /// F
    pub capacitance: f64,
    charge: f64,
    bent: Option<(Junction, Depletion)>,
}

/// The diode at one deviation of its reverse voltage, counted from rest.
#[derive(Debug, Clone, Copy)]
pub struct AtDeviation {
    /// Reverse current, A, and its slope, S.
    pub current: f64,
    pub conductance: f64,
    /// Charge, C, and its slope, F.
    pub charge: f64,
    pub capacitance: f64,
}

impl AroundRest {
    /// Everything for `deviation` volts more of reverse bias than at rest.
    #[inline]
    pub fn at(&self, deviation: f64) -> AtDeviation {
        let mut at = AtDeviation {
            current: self.conductance * deviation,
            conductance: self.conductance,
            charge: self.capacitance * deviation,
            capacitance: self.capacitance,
        };
        if let Some((junction, depletion)) = &self.bent {
            let v = self.reverse + deviation;
            let (current, conductance) = junction.reverse_current(v);
            at.current = current - self.current;
            at.conductance = conductance;
            if depletion.zero_bias > 0.0 {
                let (charge, capacitance) = depletion.charge_and_capacitance(v);
                at.charge = charge - self.charge;
                at.capacitance = capacitance;
            }
        }
        at
    }
}
