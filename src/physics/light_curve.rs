//! A measured light–current curve, joined by a monotone cubic.

use std::sync::Arc;

/// Flux against current through measured points and the origin: piecewise cubic with a continuous slope that never falls
/// where the points do not (Fritsch and Carlson 1980).
///
/// Slopes at the points are those of the parabola through each point and its neighbours, drawn in to their circle of radius 3
/// where they would overshoot. Beyond the last point the curve goes on straight. The second derivative jumps at the points,
/// so that harmonics far below those of the curve's own bend say more about the joining than about the emitter.
#[derive(Debug, Clone)]
pub struct LightCurve {
    knots: Arc<[Knot]>,
}

#[derive(Debug, Clone, Copy)]
struct Knot {
    /// A, W, W/A
    current: f64,
    flux: f64,
    slope: f64,
    /// Second and third coefficient up to the next knot; 0 at the last.
    square: f64,
    cube: f64,
}

impl LightCurve {
    /// Through the origin and `points` of current (A, > 0 or the origin itself, rising) and flux (W, not falling).
    pub fn through(points: &[[f64; 2]]) -> Self {
        let mut all = vec![[0.0, 0.0]];
        all.extend(points.iter().filter(|p| p[0] > 0.0));
        let slopes = monotone_slopes(&all);
        let knots = (0..all.len())
            .map(|k| {
                let ([current, flux], slope) = (all[k], slopes[k]);
                let (mut square, mut cube) = (0.0, 0.0);
                if k + 1 < all.len() {
                    let width = all[k + 1][0] - current;
                    let secant = (all[k + 1][1] - flux) / width;
                    square = (3.0 * secant - 2.0 * slope - slopes[k + 1]) / width;
                    cube = (slope + slopes[k + 1] - 2.0 * secant) / (width * width);
                }
                Knot {
                    current,
                    flux,
                    slope,
                    square,
                    cube,
                }
            })
            .collect();
        Self { knots }
    }

    /// The largest measured current, A.
    pub fn last_current(&self) -> f64 {
        self.knots[self.knots.len() - 1].current
    }

    /// Knot at or below `current` (> 0), and the way from there.
    #[inline]
    fn piece(&self, current: f64) -> (&Knot, f64) {
        let after = self.knots.partition_point(|k| k.current <= current);
        let knot = &self.knots[after.max(1) - 1];
        (knot, current - knot.current)
    }

    /// Flux at `current`, W; 0 at and below zero current.
    #[inline]
    pub fn flux(&self, current: f64) -> f64 {
        if current <= 0.0 {
            return 0.0;
        }
        let (k, x) = self.piece(current);
        // The cubic never falls, but its last bit may.
        (k.flux + x * (k.slope + x * (k.square + x * k.cube))).max(0.0)
    }

    /// Slope dP/dI at `current`, W/A; that to the right at 0, 0 below.
    pub fn slope(&self, current: f64) -> f64 {
        if current < 0.0 {
            return 0.0;
        }
        let (k, x) = self.piece(current);
        (k.slope + x * (2.0 * k.square + x * 3.0 * k.cube)).max(0.0)
    }
}

/// Slopes at the points for a cubic that rises with them.
fn monotone_slopes(points: &[[f64; 2]]) -> Vec<f64> {
    let pieces: Vec<(f64, f64)> = points
        .windows(2)
        .map(|p| {
            let width = p[1][0] - p[0][0];
            (width, (p[1][1] - p[0][1]) / width)
        })
        .collect();
    let last = pieces.len();
    // The parabola's slope at its outer point, from the piece next to it and the one beyond.
    let outer = |near: (f64, f64), beyond: (f64, f64)| {
        near.1 + near.0 * (near.1 - beyond.1) / (near.0 + beyond.0)
    };
    let mut slopes: Vec<f64> = (0..=last)
        .map(|k| match k {
            _ if last == 1 => pieces[0].1,
            0 => outer(pieces[0], pieces[1]),
            k if k == last => outer(pieces[last - 1], pieces[last - 2]),
            k => {
                let ((h0, d0), (h1, d1)) = (pieces[k - 1], pieces[k]);
                (h1 * d0 + h0 * d1) / (h0 + h1)
            }
        })
        .map(|slope| slope.max(0.0))
        .collect();
    for (k, &(_, secant)) in pieces.iter().enumerate() {
        if secant == 0.0 {
            (slopes[k], slopes[k + 1]) = (0.0, 0.0);
            continue;
        }
        let size = (slopes[k] / secant).hypot(slopes[k + 1] / secant);
        if size > 3.0 {
            slopes[k] *= 3.0 / size;
            slopes[k + 1] *= 3.0 / size;
        }
    }
    slopes
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::physics::led::FluxLaw;

    #[test]
    fn meets_its_points_and_joins_them_smoothly() {
        // A kinked, flat-footed and flat-topped measurement.
        let points = [
            [1e-3, 0.0],
            [2e-3, 0.1e-3],
            [10e-3, 3e-3],
            [11e-3, 3.9e-3],
            [50e-3, 15e-3],
            [80e-3, 15e-3],
        ];
        let curve = LightCurve::through(&points);
        assert_eq!(curve.flux(0.0), 0.0);
        assert_eq!(curve.flux(-1.0), 0.0);
        for [i, p] in points {
            assert!((curve.flux(i) - p).abs() < 1e-17, "{i}");
            let h = 1e-10;
            let (left, right) = (curve.slope(i - h), curve.slope(i + h));
            assert!((left - right).abs() < 1e-5, "{i}: {left} {right}");
        }
        let mut last = 0.0;
        for n in 0..100_000 {
            let i = 1e-6 * f64::from(n);
            let flux = curve.flux(i);
            assert!(flux >= last - 1e-17, "{i}");
            last = flux;
            let h = 1e-9;
            let numeric = (curve.flux(i + 2.0 * h) - curve.flux(i)) / (2.0 * h);
            assert!((curve.slope(i + h) - numeric).abs() < 1e-6, "{i}");
        }
    }

    #[test]
    fn two_points_are_a_line_that_goes_on() {
        for points in [
            &[[0.0, 0.0], [50e-3, 8e-3]][..],
            &[[25e-3, 4e-3], [50e-3, 8e-3]][..],
        ] {
            let curve = LightCurve::through(points);
            for i in [1e-3, 30e-3, 50e-3, 1.0] {
                assert!((curve.flux(i) / (0.16 * i) - 1.0).abs() < 1e-14);
                assert!((curve.slope(i) / 0.16 - 1.0).abs() < 1e-13);
            }
            assert_eq!(curve.last_current(), 50e-3);
        }
    }

    /// Slopes from parabolas err by the square of the spacing, so the joined flux by its cube: twice the points, an eighth of the error.
    #[test]
    fn dense_points_of_the_analytic_law_give_it_back() {
        let law = FluxLaw::through(12e-3, 50e-3, 1e-3, 0.4);
        let error = |n: usize| {
            let points: Vec<[f64; 2]> = (1..=n)
                .map(|k| 0.1 * k as f64 / n as f64)
                .map(|i| [i, law.flux(i)])
                .collect();
            let curve = LightCurve::through(&points);
            (0..=10_000)
                .map(|k| 0.1 * f64::from(k) / 1e4)
                .map(|i| (curve.flux(i) - law.flux(i)).abs())
                .fold(0.0, f64::max)
        };
        let (coarse, fine) = (error(2000), error(4000));
        // In the first piece P''' is 6η/I_low². Its slopes err by h²/3 and −h²/6 of that, of which the cubic makes
        // h·x(1 − x)(2 − x)/6, at most 0.0642·h.
        let bound = 25e-6f64.powi(3) * 6.0 * law.efficacy / 1e-6 * 0.0642;
        assert!(fine < bound, "{fine} {bound}");
        assert!((6.5..9.5).contains(&(coarse / fine)), "{}", coarse / fine);
    }
}
