//! The photodiode: responsivity, capacitance and the current through it.

use super::constants::photon_voltage;

/// Responsivity η·q·λ/(h·c), A/W, of a detector of quantum efficiency `efficiency` (0…1) at `wavelength` (m).
pub fn responsivity(efficiency: f64, wavelength: f64) -> f64 {
    efficiency / photon_voltage(wavelength)
}

/// Temperature at which a dark current is stated, K.
pub const DARK_REFERENCE: f64 = 293.15;

/// Dark current at `temperature` (K) of a diode whose dark current at 293.15 K is `stated`, A: doubles every 10 K
/// (common practice for silicon, within a factor of 2 from 0 °C to 70 °C).
pub fn dark_current(stated: f64, temperature: f64) -> f64 {
    stated * ((temperature - DARK_REFERENCE) / 10.0).exp2()
}

/// Depletion capacitance against reverse voltage: C₀/(1 + V/φ)^m (Sze), continued as a straight line below −φ/2.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Depletion {
    /// Capacitance at zero bias, F (≥ 0).
    pub zero_bias: f64,
    /// Built-in voltage φ, V (> 0).
    pub built_in: f64,
    /// Grading exponent m, 0…<1.
    pub grading: f64,
}

impl Depletion {
    /// Capacitance, F, at the reverse voltage `reverse` (V).
    pub fn capacitance(&self, reverse: f64) -> f64 {
        self.charge_and_capacitance(reverse).1
    }

    /// Charge ∫C dV from zero bias to `reverse`, C.
    pub fn charge(&self, reverse: f64) -> f64 {
        self.charge_and_capacitance(reverse).0
    }

    /// Charge, C, and capacitance, F, at `reverse` volts.
    #[inline]
    pub fn charge_and_capacitance(&self, reverse: f64) -> (f64, f64) {
        let rest = 1.0 - self.grading;
        let scale = self.zero_bias * self.built_in / rest;
        let x = 1.0 + reverse / self.built_in;
        if x >= 0.5 {
            let power = if self.grading == 0.5 {
                1.0 / x.sqrt()
            } else {
                x.powf(-self.grading)
            };
            (scale * (x * power - 1.0), self.zero_bias * power)
        } else {
            // Value and slope continuous at −φ/2.
            let (d, edge) = (0.5 - x, self.zero_bias * 2f64.powf(self.grading));
            let charge = scale * (0.5f64.powf(rest) - 1.0)
                - edge * self.built_in * (d + self.grading * d * d);
            (charge, edge * (1.0 + 2.0 * self.grading * d))
        }
    }
}

/// Currents of the junction itself: generation (dark) current, diode law and shunt, all against the reverse voltage.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Junction {
    /// Dark current under reverse bias, A (≥ 0); fades out as 1 − e^(−V/nV_T) towards zero bias.
    pub dark: f64,
    /// Saturation current of the diode law, A (≥ 0; 0: never conducts).
    pub saturation: f64,
    /// n·V_T, V.
    pub slope_voltage: f64,
    /// Reciprocal of the shunt resistance, S (≥ 0).
    pub shunt: f64,
}

impl Junction {
    /// Exponent below which the exponential is no longer seen beside 1 in an f64.
    const DEEP: f64 = -38.0;

    /// Largest exponent taken; the law is continued as a straight line beyond (currents of 10^100 A are nobody's diode).
    const STEEPEST: f64 = 230.0;

    /// Reverse current besides the photocurrent, A, and its derivative with respect to the reverse voltage, S.
    ///
    /// I_d(1 − e^(−V/nV_T)) for V > 0, less I_s(e^(−V/nV_T) − 1), plus V/R_sh (Shockley 1949; Sze).
    #[inline]
    pub fn reverse_current(&self, reverse: f64) -> (f64, f64) {
        let x = -reverse / self.slope_voltage;
        if x < Self::DEEP {
            return (
                self.saturation + self.dark + self.shunt * reverse,
                self.shunt,
            );
        }
        let (e, slope) = if x > Self::STEEPEST {
            let top = Self::STEEPEST.exp();
            (top * (1.0 + x - Self::STEEPEST), top)
        } else {
            let e = x.exp();
            (e, e)
        };
        let mut current = self.saturation * (1.0 - e) + self.shunt * reverse;
        let mut derivative = self.saturation * slope / self.slope_voltage + self.shunt;
        if reverse > 0.0 {
            current += self.dark * (1.0 - e);
            derivative += self.dark * e / self.slope_voltage;
        }
        (current, derivative)
    }
}

impl Junction {
    /// Current whose shot noise 2q·I the junction itself makes at `reverse` volts, A: the dark current, and the diode law's two
    /// opposed flows I_s and I_s·e^(−V/nV_T), which do not cancel as noises (van der Ziel).
    pub fn shot_current(&self, reverse: f64) -> f64 {
        let e = (-reverse / self.slope_voltage).min(Self::STEEPEST).exp();
        self.saturation * (1.0 + e)
            + if reverse > 0.0 {
                self.dark * (1.0 - e)
            } else {
                0.0
            }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn responsivity_matches_table() {
        // Shared check list, section 9, η = 1.
        for (nm, r) in [
            (470.0, 0.379081),
            (650.0, 0.524260),
            (850.0, 0.685571),
            (940.0, 0.758161),
        ] {
            assert!((responsivity(1.0, nm * 1e-9) - r).abs() < 1e-6);
        }
    }

    #[test]
    fn capacitance_matches_table_and_charge_is_its_integral() {
        // Shared check list, section 9: 100 pF, 0.6 V, m = 0.5: 5 V 32.7327 pF, 10 V 23.7915 pF.
        let d = Depletion {
            zero_bias: 100e-12,
            built_in: 0.6,
            grading: 0.5,
        };
        assert!((d.capacitance(5.0) * 1e12 - 32.7327).abs() < 1e-4);
        assert!((d.capacitance(10.0) * 1e12 - 23.7915).abs() < 1e-4);
        for v in [-0.7, -0.35, -0.25, 0.0, 3.0] {
            let h = 1e-6;
            let numeric = (d.charge(v + h) - d.charge(v - h)) / (2.0 * h);
            assert!((numeric / d.capacitance(v) - 1.0).abs() < 1e-6, "{v}");
        }
        assert_eq!(d.charge(0.0), 0.0);
    }

    #[test]
    fn junction_derivative_holds() {
        let j = Junction {
            dark: 2e-9,
            saturation: 1e-10,
            slope_voltage: 0.03,
            shunt: 1e-9,
        };
        for v in [-0.5, -0.1, 0.05, 3.0] {
            let h = 1e-7;
            let numeric = (j.reverse_current(v + h).0 - j.reverse_current(v - h).0) / (2.0 * h);
            assert!((numeric / j.reverse_current(v).1 - 1.0).abs() < 1e-5, "{v}");
        }
        assert_eq!(j.reverse_current(0.0).0, 0.0);
    }
}
