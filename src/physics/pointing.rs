//! An emitter whose axis moves: what a receiver catches of its light, moment by moment and on the average.

use std::f64::consts::{FRAC_PI_2, PI, TAU};

/// Share of a Gaussian beam inside a round aperture against the offset of its axis, as a table.
///
/// From its derivative, −(4a/w²)·e^(−2(a²+o²)/w²)·I₁(4ao/w²) at the offset o: the irradiance along the aperture's rim, a its radius and w the
/// beam's radius at 1/e². Good to 1e-6.
#[derive(Debug, Clone)]
pub struct BeamCapture {
    from: f64,
    step: f64,
    /// Share and its slope, 1/m.
    points: Vec<(f64, f64)>,
}

/// Intervals of the table; they span at most ten beam radii.
const INTERVALS: usize = 200;
/// Beam radii beyond the rim at which nothing is left to change.
const TAIL: f64 = 5.0;

impl BeamCapture {
    /// For a beam of `radius` w (m, > 0) on an aperture of radius `aperture` a (m, ≥ 0).
    pub fn new(radius: f64, aperture: f64) -> Self {
        let from = (aperture - TAIL * radius).max(0.0);
        let step = (aperture + TAIL * radius - from) / INTERVALS as f64;
        let slope = |offset: f64| {
            let w2 = radius * radius;
            let ridge = (-2.0 * (aperture - offset).powi(2) / w2).exp();
            -4.0 * aperture / w2 * ridge * scaled_bessel_i1(4.0 * aperture * offset / w2)
        };
        let mut points = vec![(0.0, 0.0); INTERVALS + 1];
        // From the far end inwards, where the share is 0; Gauss and Legendre on each interval.
        for k in (0..=INTERVALS).rev() {
            let offset = from + step * k as f64;
            let beyond = points.get(k + 1).map_or(0.0, |p: &(f64, f64)| {
                let inner: f64 = GAUSS
                    .iter()
                    .map(|(node, weight)| weight * slope(offset + step * (node + 1.0) / 2.0))
                    .sum();
                p.0 - inner * step / 2.0
            });
            points[k] = (beyond, slope(offset));
        }
        Self { from, step, points }
    }

    /// Share caught with the axis `offset` (m) off the aperture's middle.
    pub fn at(&self, offset: f64) -> f64 {
        let place = (offset.abs() - self.from) / self.step;
        if place <= 0.0 {
            return self.points[0].0;
        }
        if place >= INTERVALS as f64 {
            return 0.0;
        }
        let k = (place as usize).min(INTERVALS - 1);
        let t = place - k as f64;
        let ((y0, s0), (y1, s1)) = (self.points[k], self.points[k + 1]);
        let (rise, m0, m1) = (y1 - y0, s0 * self.step, s1 * self.step);
        (y0 + t * (m0 + t * ((3.0 * rise - 2.0 * m0 - m1) + t * (m0 + m1 - 2.0 * rise))))
            .clamp(0.0, 1.0)
    }
}

/// Nodes and weights on −1…1 (Abramowitz and Stegun 25.4.30, n = 3).
const GAUSS: [(f64, f64); 3] = [
    (-0.774_596_669_241_483, 0.555_555_555_555_556),
    (0.0, 0.888_888_888_888_889),
    (0.774_596_669_241_483, 0.555_555_555_555_556),
];

/// e^(−x)·I₁(x) for x ≥ 0, as the integral (1/π)∫₀^π e^(x(cos t − 1))·cos t dt (Abramowitz and Stegun 9.6.19) by the trapezoid rule; for large x the
/// asymptotic series (9.7.1).
fn scaled_bessel_i1(x: f64) -> f64 {
    if x > 60.0 {
        let y = 1.0 / (8.0 * x);
        return (1.0 - y * (3.0 + y * (7.5 + y * 52.5))) / (TAU * x).sqrt();
    }
    let n = 40;
    let term = |k: usize| {
        let c = (PI * k as f64 / n as f64).cos();
        c * (x * (c - 1.0)).exp()
    };
    let inner: f64 = (1..n).map(term).sum();
    (0.5 * (term(0) + term(n)) + inner) / n as f64
}

/// Radius of the Gaussian beam that a beam of 1/e² radius `radius` (m) is on the average when its axis strays by `stray` (m rms an axis):
/// √(w² + 4σ²), since w is twice the deviation of the irradiance on each axis and variances add. Small angles.
pub fn swayed_radius(radius: f64, stray: f64) -> f64 {
    radius.hypot(2.0 * stray)
}

/// Mean of the light of a Lambertian emitter of `order` m whose axis sways by `deviation` (rad rms an axis, > 0) about a direction `off_axis`
/// (rad) from the receiver, over its light without sway.
///
/// cos^m of the whole angle is cos^m of the angle along the offset times cos^m of the angle across it, so that the mean is a product
/// of two means over normal angles, each by Simpson's rule, good to 1e-6; nothing arrives from behind.
pub fn lambertian_mean(order: f64, off_axis: f64, deviation: f64) -> f64 {
    let mean = |centre: f64| {
        // Beyond nine widths of the lobe or of the sway nothing is left.
        let lobe = (9.0 / order.sqrt()).min(FRAC_PI_2);
        let (from, to) = (
            (-lobe).max(centre - 9.0 * deviation),
            lobe.min(centre + 9.0 * deviation),
        );
        if to <= from {
            return 0.0;
        }
        let n = 1000;
        let h = (to - from) / n as f64;
        let weighed = |k: usize| {
            let angle = from + h * k as f64;
            let z = (angle - centre) / deviation;
            angle.cos().max(0.0).powf(order) * (-z * z / 2.0).exp()
        };
        let inner: f64 = (1..n)
            .map(|k| weighed(k) * if k % 2 == 1 { 4.0 } else { 2.0 })
            .sum();
        h / 3.0 * (weighed(0) + inner + weighed(n)) / (TAU.sqrt() * deviation)
    };
    mean(off_axis) * mean(0.0) / off_axis.cos().powf(order)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::physics::air::gaussian_capture;

    #[test]
    fn the_table_is_the_integral() {
        for (radius, aperture) in [(1.0, 0.05), (1.0, 0.7), (1.0, 3.0), (0.01, 0.5)] {
            let table = BeamCapture::new(radius, aperture);
            let closed = -(-2.0_f64 * (aperture / radius).powi(2)).exp_m1();
            assert!((table.at(0.0) - closed).abs() < 1e-6, "{}", table.at(0.0));
            for k in 1..40 {
                let offset = f64::from(k) * 0.13 * radius
                    + if aperture > radius {
                        aperture - 2.5 * radius
                    } else {
                        0.0
                    };
                let exact = gaussian_capture(radius, aperture, offset);
                assert!(
                    (table.at(offset) - exact).abs() < 1e-6,
                    "{radius} {aperture} {offset}"
                );
            }
        }
    }

    #[test]
    fn mean_losses_have_their_small_forms() {
        // A beam far wider than the aperture: the mean irradiance on the axis falls as w²/(w² + 4σ²).
        let (w, stray) = (1.0, 0.3);
        let mean = gaussian_capture(swayed_radius(w, stray), 1e-3, 0.0);
        assert!(
            (mean / gaussian_capture(w, 1e-3, 0.0) * (1.0 + 4.0 * stray * stray) - 1.0).abs()
                < 1e-5
        );
        // A narrow lobe is Gaussian, cos^m ≈ e^(−mθ²/2): the mean over both axes is 1/(1 + mσ²).
        let (m, sway) = (2000.0, 0.02);
        assert!((lambertian_mean(m, 0.0, sway) * (1.0 + m * sway * sway) - 1.0).abs() < 1e-3);
        // m = 1 in closed form: E cos θ = e^(−σ²/2) on each axis, and the offset divides out.
        assert!((lambertian_mean(1.0, 0.5, 0.05) / (-0.0025_f64).exp() - 1.0).abs() < 1e-6);
    }
}
