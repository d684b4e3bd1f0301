//! The light-emitting diode: flux against current, and its pattern.

/// Flux against current: P(I) = η·I · I/(I + I_low) · 1/(1 + I/I_droop), W.
///
/// The first fraction is the superlinear start while non-radiative recombination wins (the An term of the ABC model), the
/// second the droop at high current (its Cn³ term); η is fixed by one data-sheet point. It follows the ABC curve within
/// about 15 % of efficiency from 1 % to 300 % of the current of peak efficiency (after Schubert 2006, Piprek 2010).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FluxLaw {
    /// Slope η of the ideal emitter, W/A.
    pub efficacy: f64,
    /// Current of half efficiency at the low end, A (≥ 0).
    pub low: f64,
    /// Reciprocal of the current of half efficiency at the high end, 1/A (≥ 0; 0: no droop).
    pub inverse_droop: f64,
}

impl FluxLaw {
    /// The law through `flux` (W, > 0) at `at_current` (A, > 0); `low` ≥ 0 A; `droop` > 0 A, may be infinite.
    pub fn through(flux: f64, at_current: f64, low: f64, droop: f64) -> Self {
        let mut law = Self {
            efficacy: 1.0,
            low,
            inverse_droop: 1.0 / droop,
        };
        law.efficacy = flux / law.flux(at_current);
        law
    }

    /// Flux at `current`, W; 0 at and below zero current.
    pub fn flux(&self, current: f64) -> f64 {
        if current <= 0.0 {
            return 0.0;
        }
        self.efficacy * current * current
            / ((current + self.low) * (1.0 + current * self.inverse_droop))
    }

    /// Slope dP/dI at `current`, W/A.
    pub fn slope(&self, current: f64) -> f64 {
        if current < 0.0 || (current == 0.0 && self.low > 0.0) {
            return 0.0;
        }
        if current == 0.0 {
            return self.efficacy;
        }
        let (a, d) = (current + self.low, 1.0 + current * self.inverse_droop);
        self.flux(current) * (2.0 / current - 1.0 / a - self.inverse_droop / d)
    }
}

/// Lambertian order m = −ln 2 / ln cos(half_angle) of an emitter of half intensity at `half_angle` (rad, in 0..π/2)
/// (Gfeller and Bapst 1979).
pub fn lambertian_order(half_angle: f64) -> f64 {
    -std::f64::consts::LN_2 / half_angle.cos().ln()
}

#[cfg(test)]
mod tests {
    use super::*;

    // Shared check list, section 10: orders for half angles, Kahn and Barry 1997.
    #[test]
    fn orders_match_table() {
        for (deg, m) in [
            (10.0_f64, 45.2776),
            (15.0, 19.9937),
            (30.0, 4.81884),
            (45.0, 2.0),
            (60.0, 1.0),
            (70.0, 0.646059),
        ] {
            assert!(
                (lambertian_order(deg.to_radians()) / m - 1.0).abs() < 2e-5,
                "{deg}"
            );
        }
    }

    #[test]
    fn slope_is_the_derivative() {
        let law = FluxLaw::through(12e-3, 50e-3, 1e-3, 0.4);
        assert!((law.flux(50e-3) - 12e-3).abs() < 1e-15);
        for i in [1e-5, 1e-3, 20e-3, 0.1, 1.0] {
            let h = i * 1e-5;
            let numeric = (law.flux(i + h) - law.flux(i - h)) / (2.0 * h);
            assert!((law.slope(i) / numeric - 1.0).abs() < 1e-8, "{i}");
        }
        // With both corners out of reach it is the straight line.
        let ideal = FluxLaw::through(1e-3, 10e-3, 0.0, f64::INFINITY);
        assert_eq!(ideal.flux(5e-3), 0.5e-3);
    }
}
