//! Constants of nature (exact values of the 2019 SI) and what follows from them at once.

/// Elementary charge, C.
pub const ELEMENTARY_CHARGE: f64 = 1.602_176_634e-19;
/// Boltzmann constant, J/K.
pub const BOLTZMANN: f64 = 1.380_649e-23;
/// Planck constant, J s.
pub const PLANCK: f64 = 6.626_070_15e-34;
/// Speed of light in vacuum, m/s.
pub const LIGHT_SPEED: f64 = 299_792_458.0;

/// Thermal voltage kT/q, V, at the absolute temperature `kelvin` (> 0).
pub fn thermal_voltage(kelvin: f64) -> f64 {
    BOLTZMANN * kelvin / ELEMENTARY_CHARGE
}

/// Energy of a photon over the elementary charge, V, at the vacuum wavelength `wavelength` (m, > 0).
pub fn photon_voltage(wavelength: f64) -> f64 {
    PLANCK * LIGHT_SPEED / (wavelength * ELEMENTARY_CHARGE)
}
