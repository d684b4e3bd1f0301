//! Slow random movement: a Gaussian process of unit variance and given corner, drawn at knots, and a smooth curve through values at knots.

use std::f64::consts::TAU;

use super::noise::Gaussian;

/// Knots in a period of the corner frequency: what lies above twenty corners is left out.
const KNOTS: f64 = 40.0;
/// Draws that a value is the weighted sum of; the weights have fallen to 1e-8 there.
const MEMORY: usize = 128;

/// Rate of the knots for a `corner` (Hz, ≥ 0) in a run at `rate` (Hz): forty a period of the corner, at most one a sample.
pub fn knot_rate(corner: f64, rate: f64) -> f64 {
    (KNOTS * corner).min(rate)
}

/// A stationary Gaussian process of mean 0 and variance 1, whose power density falls as (1 + (f/corner)²)^(−`order`).
///
/// White draws through the impulse response of (1 + s/ω)^(−order), t^(order−1)·e^(−ωt), sampled at the knots: within 0.3 dB of the law up to 4
/// corners. It is stationary from its first value on.
#[derive(Debug, Clone)]
pub struct Wander {
    weights: Vec<f64>,
    draws: Vec<f64>,
    at: usize,
    source: Gaussian,
}

impl Wander {
    /// For an `order` of ½ or more, `corner` and `knot_rate` in Hz, drawing from `source`. A corner of 0 gives one value for ever.
    pub fn new(order: f64, corner: f64, knot_rate: f64, mut source: Gaussian) -> Self {
        let decay = if knot_rate > 0.0 {
            TAU * corner / knot_rate
        } else {
            0.0
        };
        let mut weights: Vec<f64> = (0..MEMORY)
            .map(|k| k as f64)
            .map(|k| (k + 0.5).powf(order - 1.0) * (-decay * k).exp())
            .collect();
        let size = weights.iter().map(|w| w * w).sum::<f64>().sqrt();
        weights.iter_mut().for_each(|w| *w /= size);
        let draws = (0..MEMORY).map(|_| source.draw()).collect();
        Self {
            weights,
            draws,
            at: 0,
            source,
        }
    }

    /// The value at the next knot.
    pub fn draw(&mut self) -> f64 {
        self.at = (self.at + MEMORY - 1) % MEMORY;
        self.draws[self.at] = self.source.draw();
        let (newer, older) = self.draws.split_at(self.at);
        let recent = older.iter().zip(&self.weights);
        let past = newer.iter().zip(&self.weights[older.len()..]);
        recent.chain(past).map(|(d, w)| d * w).sum()
    }
}

/// A curve without steps or corners through values at evenly spaced knots (Catmull and Rom 1974), read sample by sample.
#[derive(Debug, Clone)]
pub struct Glide {
    knots_a_sample: f64,
    sample: u64,
    passed: u64,
    knots: [f64; 4],
    /// The cubic between the middle two knots, by rising powers.
    cubic: [f64; 4],
}

impl Glide {
    /// At `knot_rate` (≤ `rate`) and `rate` in Hz, through the values of `next`.
    pub fn new(knot_rate: f64, rate: f64, mut next: impl FnMut() -> f64) -> Self {
        let mut glide = Self {
            knots_a_sample: knot_rate / rate,
            sample: 0,
            passed: 0,
            knots: [next(), next(), next(), next()],
            cubic: [0.0; 4],
        };
        glide.fit();
        glide
    }

    fn fit(&mut self) {
        let [a, b, c, d] = self.knots;
        self.cubic = [
            b,
            (c - a) / 2.0,
            a - 2.5 * b + 2.0 * c - d / 2.0,
            (3.0 * (b - c) + d - a) / 2.0,
        ];
    }

    /// The value at the next sample; `next` gives the values at further knots.
    #[inline]
    pub fn step(&mut self, mut next: impl FnMut() -> f64) -> f64 {
        let place = self.knots_a_sample * self.sample as f64;
        while self.passed < place as u64 {
            self.passed += 1;
            self.knots.rotate_left(1);
            self.knots[3] = next();
            self.fit();
        }
        self.sample += 1;
        let t = place - self.passed as f64;
        let [c0, c1, c2, c3] = self.cubic;
        c0 + t * (c1 + t * (c2 + t * c3))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn its_density_is_the_law_s() {
        for (order, decibels) in [(4.0_f64 / 3.0, 0.3_f64), (2.0, 0.3)] {
            let wander = Wander::new(order, 1.0, KNOTS, Gaussian::new(1, 0, "a", "b"));
            let density = |f: f64| {
                let at =
                    |k: usize| num_complex::Complex64::from_polar(1.0, -TAU * f * k as f64 / KNOTS);
                let sum: num_complex::Complex64 = wander
                    .weights
                    .iter()
                    .enumerate()
                    .map(|(k, w)| *w * at(k))
                    .sum();
                sum.norm_sqr()
            };
            for f in [0.1_f64, 0.5, 1.0, 2.0, 4.0] {
                let law = (1.0 + f * f).powf(-order);
                let db = 10.0 * (density(f) / density(1e-6) / law).log10();
                assert!(db.abs() < decibels, "{order} {f}: {db}");
            }
        }
    }

    #[test]
    fn a_corner_of_nought_stands_still() {
        let mut wander = Wander::new(2.0, 0.0, knot_rate(0.0, 1e3), Gaussian::new(1, 0, "a", "b"));
        let mut glide = Glide::new(0.0, 1e3, || wander.draw());
        let first = glide.step(|| f64::NAN);
        assert!((0..1000).all(|_| glide.step(|| f64::NAN) == first));
    }

    #[test]
    fn the_curve_meets_its_knots_without_corners() {
        let values = [1.0, 3.0, -2.0, 0.5, 4.0, 4.0, 4.0, 4.0, 4.0];
        let mut left = values.iter();
        let mut next = || *left.next().unwrap_or(&4.0);
        let mut glide = Glide::new(1.0, 1000.0, &mut next);
        let curve: Vec<f64> = (0..4000).map(|_| glide.step(&mut next)).collect();
        for k in 0..4 {
            assert!((curve[1000 * k] - values[k + 1]).abs() < 1e-9);
        }
        let slopes: Vec<f64> = curve.windows(2).map(|w| w[1] - w[0]).collect();
        assert!(slopes.windows(2).all(|w| (w[1] - w[0]).abs() < 5e-5));
    }

    #[test]
    fn a_corner_far_above_the_knots_is_white() {
        let wander = Wander::new(4.0 / 3.0, 1e12, 1e3, Gaussian::new(1, 0, "a", "b"));
        assert_eq!(wander.weights[0], 1.0);
        assert!(wander.weights[1..].iter().all(|w| *w == 0.0));
    }
}
