//! The junction's exponential law and the loops it stands in.

/// Forward voltage of a junction with series resistance, V: n·V_T·ln(1 + i/I_s) + i·R_s (Shockley 1949).
///
/// `current` in A (> −I_s), `slope_voltage` = n·V_T in V, `saturation` = I_s in A (> 0), `resistance` in Ω.
pub fn forward_voltage(current: f64, slope_voltage: f64, saturation: f64, resistance: f64) -> f64 {
    slope_voltage * (current / saturation).ln_1p() + current * resistance
}

/// A voltage across a resistance and a junction in series: the current that flows.
///
/// Solves `drive = i·resistance + slope_voltage·ln(1 + i/saturation)` (the Lambert-W loop) by Newton's method in the
/// logarithm of the current, which is convex and so converges from above for any drive.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SeriesLoop {
    /// Total resistance of the loop, Ω (≥ 0).
    pub resistance: f64,
    /// n·V_T, V; of all junctions in series together (> 0).
    pub slope_voltage: f64,
    /// Saturation current, A (> 0).
    pub saturation: f64,
}

impl SeriesLoop {
    /// Largest exponent taken where nothing but the junction limits the current (10^100 of its saturation current is nobody's diode).
    const STEEPEST: f64 = 230.0;

    /// Current, A, at the driving voltage `drive` (V); between −I_s (hard reverse) and what the resistance lets through.
    pub fn current(&self, drive: f64) -> f64 {
        let Self {
            resistance: r,
            slope_voltage: nvt,
            saturation: is,
        } = *self;
        // w = ln(1 + i/I_s) solves w + (r·I_s/nV_T)(e^w − 1) = drive/nV_T.
        let target = drive / nvt;
        let k = r * is / nvt;
        if k <= 0.0 {
            return is * target.min(Self::STEEPEST).exp_m1();
        }
        // Start above the root: for a forward drive the smaller of the two asymptotes, else the drive itself.
        let mut w = if target > 0.0 {
            target.min((1.0 + target / k).ln())
        } else {
            target
        };
        for _ in 0..60 {
            let e = w.exp();
            let step = (w + k * (e - 1.0) - target) / (1.0 + k * e);
            w -= step;
            if step.abs() <= 1e-15 * w.abs().max(1.0) {
                break;
            }
        }
        is * w.exp_m1()
    }

    /// As [`Self::current`], from a `guess` (A) near by: two logarithms instead of several exponentials.
    #[inline]
    pub fn current_near(&self, drive: f64, guess: f64) -> f64 {
        let mut i = guess;
        for _ in 0..4 {
            let with = self.saturation + i;
            if with <= 0.0 {
                break;
            }
            let short =
                drive - self.resistance * i - self.slope_voltage * (with / self.saturation).ln();
            let step = short / (self.resistance + self.slope_voltage / with);
            i += step;
            if step.abs() <= 1e-8 * with {
                // The next step would be the square of this one.
                return i;
            }
        }
        self.current(drive)
    }

    /// Slope di/d(drive), S, at the current `current`.
    pub fn slope(&self, current: f64) -> f64 {
        1.0 / (self.resistance + self.slope_voltage / (self.saturation + current))
    }
}

/// How the forward voltage moves with junction temperature at constant current, V/K (negative).
///
/// (V_j − E_g/q − 3V_T)/T (Sze, Physics of Semiconductor Devices, the temperature dependence of I_s ∝ T³ e^(−E_g/kT)), with
/// the band gap taken from the emitted wavelength: `gap_voltage` = hc/(qλ), V. `junction` is the voltage across the junction
/// alone, V, `temperature` in K. Good to about a third of its value, as band filling moves the peak wavelength off the gap.
pub fn voltage_drift(junction: f64, gap_voltage: f64, temperature: f64) -> f64 {
    (junction - gap_voltage - 3.0 * super::constants::thermal_voltage(temperature)) / temperature
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::physics::constants::thermal_voltage;

    // Shared check list, section 9: V(I) at 300 K, n = 1.8, I_s = 1 pA, R_s = 1 Ω: 20 mA 1.12373 V, 1 mA 0.965328 V.
    #[test]
    fn forward_voltage_matches_table() {
        let nvt = 1.8 * thermal_voltage(300.0);
        assert!((forward_voltage(20e-3, nvt, 1e-12, 1.0) - 1.12373).abs() < 5e-6);
        assert!((forward_voltage(1e-3, nvt, 1e-12, 1.0) - 0.965328).abs() < 5e-7);
        let nvt = 2.0 * thermal_voltage(300.0);
        assert!((forward_voltage(10e-3, nvt, 1e-18, 2.0) - 1.92485).abs() < 5e-6);
    }

    #[test]
    fn loop_inverts_its_own_law() {
        for r in [0.0, 1.0, 250.0, 1e5] {
            let l = SeriesLoop {
                resistance: r,
                slope_voltage: 0.045,
                saturation: 1e-12,
            };
            for i in [1e-15, 1e-9, 1e-6, 1e-3, 0.1] {
                let v = forward_voltage(i, 0.045, 1e-12, r);
                let back = l.current(v);
                assert!((back / i - 1.0).abs() < 1e-9, "r {r} i {i} back {back}");
            }
            // Driven hard in reverse only −I_s flows.
            assert!((l.current(-50.0) + 1e-12).abs() < 1e-24);
        }
    }
}
