//! Light through air: spreading, pointing, weather.

use std::f64::consts::{PI, TAU};

/// Share of the emitted flux that an area catches on the line of sight of a Lambertian emitter:
/// (m+1)·A·cos^m φ·cos θ/(2πd²) (Gfeller and Bapst 1979; Kahn and Barry 1997), never above 1.
///
/// `order` m (> 0), `area` m² (≥ 0), `distance` m (> 0), `off_axis` φ at the emitter and `tilt` θ at the receiver in rad;
/// 0 from behind either. A far-field law: it holds where the distance exceeds about five times the emitter's and the aperture's size.
pub fn lambertian_capture(order: f64, area: f64, distance: f64, off_axis: f64, tilt: f64) -> f64 {
    let (towards, facing) = (off_axis.cos(), tilt.cos());
    if towards <= 0.0 || facing <= 0.0 {
        return 0.0;
    }
    ((order + 1.0) * area * towards.powf(order) * facing / (TAU * distance * distance)).min(1.0)
}

/// Gain n²/sin²Ψ of an ideal concentrator of refractive index `index` (≥ 1) inside its field of view of half angle `field`
/// (rad, in 0..=π/2) (Kahn and Barry 1997).
pub fn concentrator_gain(index: f64, field: f64) -> f64 {
    (index / field.sin()).powi(2)
}

/// Radius at which a Gaussian beam's irradiance is 1/e² of its axis, m: source_diameter/2 + d·tan(divergence/2).
pub fn beam_radius(source_diameter: f64, divergence: f64, distance: f64) -> f64 {
    source_diameter / 2.0 + distance * (divergence / 2.0).tan()
}

/// Share of a Gaussian beam of 1/e² radius `radius` (m, > 0) inside a round aperture of radius `aperture` (m), whose centre
/// stands `offset` (m) off the beam's axis.
///
/// 1 − exp(−2a²/w²) on the axis (Siegman, Lasers); off it the integral of the shifted Gaussian over the disc,
/// ∫ (4r/w²) e^(−2(r²+o²)/w²) I₀(4ro/w²) dr, by Simpson's rule, good to 1e-8.
pub fn gaussian_capture(radius: f64, aperture: f64, offset: f64) -> f64 {
    let (a, o) = (aperture / radius, (offset / radius).abs());
    if o == 0.0 {
        return -(-2.0 * a * a).exp_m1();
    }
    // The integrand is a ridge of width about 1/2 around r = o: beyond o ± 5 nothing is left.
    let (from, to) = ((o - 5.0).max(0.0), a.min(o + 5.0));
    if to <= from {
        return 0.0;
    }
    let integrand =
        |r: f64| 4.0 * r * (-2.0 * (r - o).powi(2)).exp() * scaled_bessel_i0(4.0 * r * o);
    let n = 400;
    let h = (to - from) / n as f64;
    let inner: f64 = (1..n)
        .map(|k| integrand(from + h * k as f64) * if k % 2 == 1 { 4.0 } else { 2.0 })
        .sum();
    (h / 3.0 * (integrand(from) + inner + integrand(to))).min(1.0)
}

/// e^(−x)·I₀(x) for x ≥ 0, from the integral (1/π)∫₀^π e^(x(cos t − 1)) dt (Abramowitz and Stegun 9.6.16) by the trapezoid
/// rule, which converges geometrically on a periodic integrand; for large x only the peak near t = 0 counts and the
/// asymptotic series (9.7.1) takes over.
fn scaled_bessel_i0(x: f64) -> f64 {
    if x > 60.0 {
        let y = 1.0 / (8.0 * x);
        return (1.0 + y * (1.0 + y * (4.5 + y * 37.5))) / (TAU * x).sqrt();
    }
    let n = 40;
    let term = |k: usize| (x * ((PI * k as f64 / n as f64).cos() - 1.0)).exp();
    let inner: f64 = (1..n).map(term).sum();
    (0.5 * (term(0) + term(n)) + inner) / n as f64
}

/// Extinction by haze or fog, Np/m: (3.912/V)·(λ/550 nm)^−q with q of Kim, McArthur and Korevaar (2001).
///
/// `visibility` V in m (> 0; 2 % contrast), `wavelength` in m. Kruse (1962) differs only below 6 km, q = 0.585·(V/km)^(1/3);
/// Kim's form is taken because it loses its colour in fog, as measured. Meant for 0.4 µm to 2.4 µm.
pub fn haze_extinction(visibility: f64, wavelength: f64) -> f64 {
    let km = visibility / 1e3;
    let q = match km {
        v if v > 50.0 => 1.6,
        v if v > 6.0 => 1.3,
        v if v > 1.0 => 0.16 * v + 0.34,
        v if v > 0.5 => v - 0.5,
        _ => 0.0,
    };
    3.912 / visibility * (wavelength / 550e-9).powf(-q)
}

#[cfg(test)]
mod tests {
    use super::*;

    // los_gain of the shared check list: Kahn and Barry 1997.
    #[test]
    fn line_of_sight_matches_table() {
        use crate::physics::led::lambertian_order;
        for (half, area, d, phi, psi, h0) in [
            (60.0_f64, 1e-4, 1.0, 0.0_f64, 0.0_f64, 3.1831e-05),
            (60.0, 1e-4, 2.0, 30.0, 30.0, 5.96831e-06),
            (30.0, 1e-4, 3.0, 0.0, 0.0, 1.029e-05),
            (15.0, 7e-6, 5.0, 0.0, 0.0, 9.35552e-07),
            (10.0, 7e-6, 10.0, 5.0, 5.0, 4.32179e-07),
            (70.0, 1e-4, 2.15, 0.0, 0.0, 5.66746e-06),
            (5.0, 7.5e-6, 20.0, 0.0, 0.0, 5.45522e-07),
        ] {
            let m = lambertian_order(half.to_radians());
            let got = lambertian_capture(m, area, d, phi.to_radians(), psi.to_radians());
            assert!((got / h0 - 1.0).abs() < 1e-5, "{half} {d}: {got}");
        }
        // Close up the far-field law would give more than there is.
        assert_eq!(lambertian_capture(1.0, 1.0, 0.1, 0.0, 0.0), 1.0);
        assert_eq!(lambertian_capture(1.0, 1e-4, 1.0, 1.6, 0.0), 0.0);
    }

    #[test]
    fn concentrator_matches_table() {
        for (deg, g) in [(60.0_f64, 3.0), (30.0, 9.0), (10.0, 74.6177)] {
            assert!((concentrator_gain(1.5, deg.to_radians()) / g - 1.0).abs() < 1e-5);
        }
    }

    #[test]
    fn offset_capture_agrees_with_its_limits() {
        // On the axis the closed form; a small offset must join it, a small aperture must give the local irradiance.
        let on = gaussian_capture(1.0, 0.7, 0.0);
        assert!((gaussian_capture(1.0, 0.7, 1e-6) - on).abs() < 1e-8);
        let tiny = 0.01_f64;
        for o in [0.5_f64, 2.0, 10.0] {
            let local = 2.0 * tiny * tiny * (-2.0 * o * o).exp();
            let got = gaussian_capture(1.0, tiny, o);
            if o < 5.0 {
                assert!((got / local - 1.0).abs() < 2e-3, "{o} {got} {local}");
            } else {
                assert!(got < 1e-20);
            }
        }
        assert!((gaussian_capture(1.0, 30.0, 2.0) - 1.0).abs() < 1e-7);
    }

    // visibility of the shared check list, in dB/km.
    #[test]
    fn haze_matches_table() {
        let db_per_km = 10.0 / std::f64::consts::LN_10 * 1e3;
        for (km, nm, db) in [
            (0.2, 850.0, 84.948),
            (0.5, 650.0, 33.9792),
            (1.0, 850.0, 13.6664),
            (2.0, 650.0, 7.60799),
            (6.0, 850.0, 1.6079),
            (10.0, 850.0, 0.964739),
            (23.0, 650.0, 0.594483),
        ] {
            let got = haze_extinction(km * 1e3, nm * 1e-9) * db_per_km;
            assert!((got / db - 1.0).abs() < 1e-5, "{km} {nm}: {got}");
        }
    }
}
