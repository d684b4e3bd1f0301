//! Scintillation: how turbulent air makes received light flicker.
//!
//! Plane waves, Kolmogorov turbulence without inner or outer scale. A small emitter that diverges sends a spherical wave, whose Rytov
//! variance is 0.4 times the plane wave's (Andrews and Phillips, from memory); a wide incoherent emitter averages further. What is
//! given here is therefore the upper end for an LED.

use std::f64::consts::{PI, TAU};

use super::probability::{UnitGamma, normal_below};

/// Rytov variance of a plane wave: 1.23·C_n²·k^(7/6)·d^(11/6) (Tatarskii 1961).
///
/// `structure` C_n² in m^(−2/3) (≥ 0), `wavelength` and `distance` in m (> 0).
pub fn rytov_variance(structure: f64, wavelength: f64, distance: f64) -> f64 {
    1.23 * structure * (TAU / wavelength).powf(7.0 / 6.0) * distance.powf(11.0 / 6.0)
}

/// Beyond this Rytov variance the laws below are an extrapolation: simulations that they were held against reach about 25 (Al-Habash,
/// Andrews and Phillips 2001; from memory).
pub const RYTOV_RANGE: f64 = 25.0;

/// Variances of the logarithms of the large-scale and the small-scale irradiance at a point, from the Rytov variance (Andrews, Phillips,
/// Hopen and Al-Habash 1999). Their sum tends to the Rytov variance where that is small (6 % below it at 0.1).
pub fn log_variances(rytov: f64) -> (f64, f64) {
    let r = rytov.min(1e12);
    let six_fifths = r.powf(1.2);
    let large = 0.49 * r / (1.0 + 1.11 * six_fifths).powf(7.0 / 6.0);
    let small = 0.51 * r / (1.0 + 0.69 * six_fifths).powf(5.0 / 6.0);
    (large, small)
}

/// Share of the scintillation index that an aperture of `diameter` (m) leaves: (1 + 1.062·kD²/(4d))^(−7/6) (Andrews 1992; plane wave, weak
/// turbulence; strong turbulence is averaged more by its small cells and less by its large ones).
pub fn aperture_averaging(diameter: f64, wavelength: f64, distance: f64) -> f64 {
    let ratio = TAU / wavelength * diameter * diameter / (4.0 * distance);
    (1.0 + 1.062 * ratio).powf(-7.0 / 6.0)
}

/// Frequency at which scintillation begins to fall off, Hz: a Fresnel zone √(2πλd) carried past by the `wind` (m/s, ≥ 0) across the
/// path (Taylor's frozen turbulence; Tatarskii 1961).
pub fn fade_rate(wind: f64, wavelength: f64, distance: f64) -> f64 {
    wind / (TAU * wavelength * distance).sqrt()
}

/// Above this Rytov variance irradiance is gamma-gamma, below it log-normal.
pub const STRONG: f64 = 1.0;

/// Scintillation index (variance of the irradiance over its squared mean) at a point.
///
/// Below [`STRONG`] exp(σ²_R) − 1, the Rytov variance being that of the irradiance's logarithm (Tatarskii 1961); above it exp(σ²_x + σ²_y) − 1 from
/// [`log_variances`], which is 1/α + 1/β + 1/(αβ) of the gamma-gamma law (Al-Habash, Andrews and Phillips 2001). The weak law overstates
/// towards its end (1.7 against 0.7 at σ²_R = 1), so that the index falls where the other law takes over.
pub fn scintillation_index(rytov: f64) -> f64 {
    if rytov < STRONG {
        return rytov.exp_m1();
    }
    let (x, y) = log_variances(rytov);
    (x + y).exp_m1()
}

/// The distribution of received irradiance, of unit mean, as a map from two standard normal variables.
#[derive(Debug, Clone)]
pub enum Irradiance {
    /// exp(σ·g − σ²/2).
    LogNormal { deviation: f64 },
    /// The product of two independent gamma variables: large cells and small ones.
    GammaGamma { large: UnitGamma, small: UnitGamma },
}

impl Irradiance {
    /// For a `rytov` variance (≥ 0) with an aperture that leaves the share `averaging` (0…1) of the scintillation index.
    ///
    /// The index at a point is that of [`scintillation_index`]. Averaging lowers the logarithmic variances in proportion until the index is
    /// `averaging` times that.
    pub fn new(rytov: f64, averaging: f64) -> Self {
        let variance = (averaging * scintillation_index(rytov)).ln_1p();
        let (x, y) = log_variances(rytov);
        if rytov < STRONG {
            return Self::LogNormal {
                deviation: variance.sqrt(),
            };
        }
        let part = |v: f64| UnitGamma::new(1.0 / (v * variance / (x + y)).exp_m1());
        Self::GammaGamma {
            large: part(x),
            small: part(y),
        }
    }

    /// The irradiance over its mean for two independent standard normal values (a log-normal law uses the first alone).
    pub fn at_normal(&self, first: f64, second: f64) -> f64 {
        match self {
            Self::LogNormal { deviation } => (deviation * (first - deviation / 2.0)).exp(),
            Self::GammaGamma { large, small } => large.at_normal(first) * small.at_normal(second),
        }
    }

    /// Probability that the irradiance is less than `share` (> 0) of its mean.
    pub fn below(&self, share: f64) -> f64 {
        match self {
            Self::LogNormal { deviation } => normal_below(share.ln() / deviation + deviation / 2.0),
            Self::GammaGamma { large, small } => {
                // Over the large cells' normal variable; the trapezoid rule is exact to 1e-6 on so smooth an integrand.
                let step = 0.125;
                let density = |g: f64| (-g * g / 2.0).exp() / TAU.sqrt();
                (-64..=64)
                    .map(|k| f64::from(k) * step)
                    .map(|g| step * density(g) * small.below(share / large.at_normal(g)))
                    .sum()
            }
        }
    }

    /// The share of its mean that the irradiance stays under with probability `p` (in 0…1 without its ends): how deep fades go.
    pub fn quantile(&self, p: f64) -> f64 {
        let (mut low, mut high) = (-100.0, 20.0);
        for _ in 0..40 {
            let middle = (low + high) / 2.0;
            if self.below(f64::exp(middle)) < p {
                low = middle;
            } else {
                high = middle;
            }
        }
        f64::exp(high)
    }
}

/// Diameter of a disc of `area` (m²), m.
pub fn disc_diameter(area: f64) -> f64 {
    2.0 * (area / PI).sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn close(got: f64, table: f64, what: &str) {
        assert!((got / table - 1.0).abs() < 1e-5, "{what}: {got} {table}");
    }

    /// C_n², nm, m; Rytov, log-normal index exp(σ²) − 1, α, β, gamma-gamma index, averaging by 25 mm, Fresnel rate at 2 m/s:
    /// the formulas of Al-Habash, Andrews and Phillips 2001 and Andrews 1992, computed apart from this code.
    const TABLE: [[f64; 10]; 7] = [
        [
            1e-15,
            850.,
            100.,
            0.000589015,
            0.000589188,
            3464.89,
            3328.68,
            0.000589116,
            0.048993,
            86.5427,
        ],
        [
            1e-14, 850., 100., 0.00589015, 0.00590753, 346.927, 332.796, 0.00589596, 0.048993,
            86.5427,
        ],
        [
            1e-13, 850., 100., 0.0589015, 0.0606707, 35.6549, 33.4304, 0.0587985, 0.048993, 86.5427,
        ],
        [
            1e-14, 650., 100., 0.0080547, 0.00808723, 253.878, 243.364, 0.00806416, 0.0365829,
            98.9654,
        ],
        [
            1e-14, 850., 500., 0.112609, 0.119194, 19.3462, 17.6425, 0.111301, 0.235544, 38.7031,
        ],
        [
            1e-14, 850., 1000., 0.401291, 0.493752, 6.86076, 5.32318, 0.360995, 0.393021, 27.3672,
        ],
        [
            1e-13, 650., 500., 1.53991, 3.66415, 4.04058, 1.9519, 0.886605, 0.187028, 44.2587,
        ],
    ];

    #[test]
    fn variances_averaging_and_rate_match_their_table() {
        for [
            structure,
            nm,
            d,
            rytov,
            log_normal,
            alpha,
            beta,
            index,
            averaging,
            rate,
        ] in TABLE
        {
            let wavelength = nm * 1e-9;
            let got = rytov_variance(structure, wavelength, d);
            close(got, rytov, "Rytov");
            close(got.exp_m1(), log_normal, "weak index");
            let (x, y) = log_variances(got);
            close(1.0 / x.exp_m1(), alpha, "alpha");
            close(1.0 / y.exp_m1(), beta, "beta");
            close((x + y).exp_m1(), index, "index");
            close(
                aperture_averaging(0.025, wavelength, d),
                averaging,
                "averaging",
            );
            close(fade_rate(2.0, wavelength, d), rate, "rate");
            // In weak turbulence Rytov's own index and the extended one become one: they differ by less than the Rytov variance.
            assert!(
                (index / log_normal - 1.0).abs() < rytov,
                "{index} {log_normal}"
            );
        }
    }

    fn index(law: &Irradiance) -> (f64, f64) {
        let (mut one, mut two) = (0.0, 0.0);
        let step = 0.0625;
        for j in -128..=128 {
            for k in -128..=128 {
                let (g, h) = (f64::from(j) * step, f64::from(k) * step);
                let weight = (-(g * g + h * h) / 2.0).exp() / TAU * step * step;
                let i = law.at_normal(g, h);
                one += weight * i;
                two += weight * i * i;
            }
        }
        (one, two / (one * one) - 1.0)
    }

    #[test]
    fn both_laws_keep_their_mean_and_index() {
        for (rytov, averaging) in [
            (0.1, 1.0),
            (0.999, 1.0),
            (1.0, 1.0),
            (1.53991, 0.187),
            (20.0, 0.6),
            (1e6, 1.0),
        ] {
            let law = Irradiance::new(rytov, averaging);
            let (mean, got) = index(&law);
            assert!((mean - 1.0).abs() < 1e-4, "{rytov}: {mean}");
            // The indices of either law, written out: log-normal exp(σ²) − 1, gamma-gamma 1/α + 1/β + 1/(αβ).
            let (x, y) = log_variances(rytov);
            let (a, b) = (1.0 / x.exp_m1(), 1.0 / y.exp_m1());
            let point = if rytov < 1.0 {
                rytov.exp() - 1.0
            } else {
                1.0 / a + 1.0 / b + 1.0 / (a * b)
            };
            let wanted = averaging * point;
            assert!((got / wanted - 1.0).abs() < 1e-3, "{rytov}: {got} {wanted}");
        }
    }

    #[test]
    fn the_distribution_and_its_quantile_are_inverse() {
        for rytov in [0.2, 2.0, 30.0] {
            let law = Irradiance::new(rytov, 0.8);
            for p in [1e-4, 0.01, 0.5, 0.99] {
                assert!((law.below(law.quantile(p)) / p - 1.0).abs() < 1e-6);
            }
        }
        // Strong turbulence without averaging tends to the exponential law, of one scale: P(I < x) → 1 − e^(−x).
        let saturated = Irradiance::new(1e9, 1.0);
        assert!((saturated.below(0.05) / (1.0 - (-0.05_f64).exp()) - 1.0).abs() < 0.02);
    }
}
