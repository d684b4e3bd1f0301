//! The emitter: a light-emitting diode, or several equal ones in series.

use crate::design::Section;
use crate::physics::constants::photon_voltage;
use crate::physics::diode::{self, SeriesLoop};
use crate::physics::led::FluxLaw;
use crate::physics::light_curve::LightCurve;
use crate::signal::pole::FirstOrderLaw;
use std::f64::consts::TAU;

/// One string of equal LEDs. Voltages and fluxes are those of the whole string.
#[derive(Debug, Clone)]
pub struct Emitter {
    law: Light,
    count: f64,
    /// n·V_T of one, V.
    slope_voltage: f64,
    saturation: f64,
    series_resistance: f64,
    gap_voltage: f64,
    bandwidth: f64,
    thermal_resistance: f64,
    thermal_time: f64,
    flux_temperature: f64,
    pub max_current: f64,
    /// Forward voltage of the string against heat, V/K.
    drift: f64,
}

/// Flux of one LED against its current.
#[derive(Debug, Clone)]
enum Light {
    Law(FluxLaw),
    Measured(LightCurve),
}

impl Light {
    /// From `[transmitter.emitter]`, with a current (A) at home on it.
    fn new(section: &Section) -> (Self, f64) {
        let points = section.pairs("curve");
        if !points.is_empty() {
            let curve = LightCurve::through(points);
            let last = curve.last_current();
            return (Self::Measured(curve), last);
        }
        let at = section.number("at_current");
        let law = FluxLaw::through(
            section.number("flux"),
            at,
            section.number("low_current"),
            section.number("droop_current"),
        );
        (Self::Law(law), at)
    }

    #[inline]
    fn flux(&self, current: f64) -> f64 {
        match self {
            Self::Law(law) => law.flux(current),
            Self::Measured(curve) => curve.flux(current),
        }
    }

    fn slope(&self, current: f64) -> f64 {
        match self {
            Self::Law(law) => law.slope(current),
            Self::Measured(curve) => curve.slope(current),
        }
    }
}

impl Emitter {
    /// From `[transmitter.emitter]`; `vt` the thermal voltage.
    pub fn new(section: &Section, vt: f64, temperature: f64) -> Self {
        let (law, at_current) = Light::new(section);
        let mut emitter = Self {
            law,
            count: section.number("count"),
            slope_voltage: section.number("ideality") * vt,
            saturation: section.number("saturation_current"),
            series_resistance: section.number("series_resistance"),
            gap_voltage: photon_voltage(section.number("wavelength")),
            bandwidth: section.number("bandwidth"),
            thermal_resistance: section.number("thermal_resistance"),
            thermal_time: section.number("thermal_time"),
            flux_temperature: section.number("flux_temperature"),
            max_current: section.number("max_current"),
            drift: 0.0,
        };
        emitter.set_drift(at_current, temperature);
        emitter
    }

    /// Fixes the forward voltage's drift for a rest at `current` (A).
    pub fn set_drift(&mut self, current: f64, temperature: f64) {
        let junction = diode::forward_voltage(current, self.slope_voltage, self.saturation, 0.0);
        self.drift =
            self.count * diode::voltage_drift(junction, self.gap_voltage, temperature).min(0.0);
    }

    /// The current up to which its light was measured, A, where it was.
    pub fn measured_to(&self) -> Option<f64> {
        match &self.law {
            Light::Law(_) => None,
            Light::Measured(curve) => Some(curve.last_current()),
        }
    }

    /// Forward voltage against heat, V/K.
    pub fn drift(&self) -> f64 {
        self.drift
    }

    /// The loop of this string with a further `resistance` (Ω).
    pub fn in_loop(&self, resistance: f64) -> SeriesLoop {
        SeriesLoop {
            resistance: resistance + self.resistance(),
            slope_voltage: self.count * self.slope_voltage,
            saturation: self.saturation,
        }
    }

    /// Series resistance of the string, Ω.
    pub fn resistance(&self) -> f64 {
        self.count * self.series_resistance
    }

    /// Forward voltage, V, at `current` (A, ≥ 0) with the junction `heat` (K) above its rest.
    pub fn forward_voltage(&self, current: f64, heat: f64) -> f64 {
        self.count
            * diode::forward_voltage(
                current.max(0.0),
                self.slope_voltage,
                self.saturation,
                self.series_resistance,
            )
            + self.drift * heat
    }

    /// dV_f/di, Ω, at `current` (A).
    pub fn voltage_slope(&self, current: f64) -> f64 {
        self.count
            * (self.series_resistance + self.slope_voltage / (current.max(0.0) + self.saturation))
    }

    /// Flux, W, at `current` (A) with the junction `heating` (K) above the surroundings.
    #[inline]
    pub fn flux(&self, current: f64, heating: f64) -> f64 {
        self.count * self.law.flux(current) * (1.0 + self.flux_temperature * heating).max(0.0)
    }

    /// dP/di, W/A.
    pub fn flux_slope(&self, current: f64, heating: f64) -> f64 {
        self.count * self.law.slope(current) * (1.0 + self.flux_temperature * heating).max(0.0)
    }

    /// dP/dΔT, W/K.
    pub fn flux_by_heat(&self, current: f64) -> f64 {
        self.count * self.law.flux(current) * self.flux_temperature
    }

    /// Heating of each junction under the string's electrical `power` (W) and `cold_flux` (W): the fixed point of
    /// ΔT = R·(power − cold_flux·(1 + k·ΔT)).
    pub fn heating_at_rest(&self, power: f64, cold_flux: f64) -> f64 {
        let r = self.thermal_resistance / self.count;
        r * (power - cold_flux) / (1.0 + r * cold_flux * self.flux_temperature).max(1e-3)
    }

    /// Thermal resistance against the string's power (each junction has its share), K/W, and time, s.
    pub fn thermal(&self) -> (f64, f64) {
        (self.thermal_resistance / self.count, self.thermal_time)
    }

    /// The carriers' pole between current and light.
    pub fn carriers(&self) -> FirstOrderLaw {
        FirstOrderLaw::low_pass(TAU * self.bandwidth)
    }
}
