//! The gamma distribution of unit mean, by its distribution function and by the value that a normal variable maps to.

use libm::{erfc, lgamma};
use std::f64::consts::SQRT_2;

/// P(g ≤ `g`) of the standard normal variable.
pub fn normal_below(g: f64) -> f64 {
    0.5 * erfc(-g / SQRT_2)
}

/// The lower and upper regularised incomplete gamma functions P(a, x) and Q(a, x) = 1 − P, each good to about 1e-13 of itself (for a
/// up to 1e5: 1e-10).
///
/// Below a + 1 the series of NIST DLMF 8.11.4, above it the continued fraction 8.9.2 by Lentz's method. `a` > 0, `x` ≥ 0.
pub fn incomplete_gamma(a: f64, x: f64) -> (f64, f64) {
    if x <= 0.0 {
        return (0.0, 1.0);
    }
    let front = (a * x.ln() - x - lgamma(a)).exp();
    if x < a + 1.0 {
        let (mut term, mut sum, mut n) = (1.0 / a, 1.0 / a, a);
        while term > sum * f64::EPSILON {
            n += 1.0;
            term *= x / n;
            sum += term;
        }
        let lower = front * sum;
        return (lower, 1.0 - lower);
    }
    let tiny = 1e-300;
    let mut b = x + 1.0 - a;
    let mut c = 1.0 / tiny;
    let mut d = 1.0 / b;
    let mut h = d;
    for i in 1..100_000 {
        let i = f64::from(i);
        let an = -i * (i - a);
        b += 2.0;
        let keep = |v: f64| if v.abs() < tiny { tiny } else { v };
        d = 1.0 / keep(an * d + b);
        c = keep(b + an / c);
        let step = c * d;
        h *= step;
        if (step - 1.0).abs() < 4.0 * f64::EPSILON {
            break;
        }
    }
    let upper = front * h;
    (1.0 - upper, upper)
}

/// The gamma distribution of mean 1 and variance 1/shape, with a table of its quantiles.
#[derive(Debug, Clone)]
pub struct UnitGamma {
    shape: f64,
    /// ln x and its slope at normal values −REACH…REACH, `STEPS` a unit.
    log: Vec<(f64, f64)>,
}

/// Normal values that the table covers; the chance to fall outside is 1e-15, and straight lines go on from its ends.
const REACH: i32 = 8;
const STEPS: i32 = 8;
/// Above this shape the distribution is taken as the log-normal one of the same variance, from which it differs by less than 1e-5.
const LARGEST_SHAPE: f64 = 1e5;

impl UnitGamma {
    /// For `shape` > 0.
    pub fn new(shape: f64) -> Self {
        let mut log = vec![(0.0, 0.0); (2 * REACH * STEPS + 1) as usize];
        let middle = (REACH * STEPS) as usize;
        let at = |k: usize| (k as f64 - middle as f64) / f64::from(STEPS);
        if shape > LARGEST_SHAPE {
            let deviation = (1.0 / shape).ln_1p().sqrt();
            for (k, point) in log.iter_mut().enumerate() {
                *point = (deviation * (at(k) - deviation / 2.0), deviation);
            }
        } else {
            // From the middle outwards, each point starting from its neighbour's tangent.
            let start = 1.0 - 1.0 / (9.0 * shape.max(0.5));
            log[middle] = solve(shape, 0.0, 3.0 * start.ln());
            for k in middle + 1..log.len() {
                let (y, slope) = log[k - 1];
                log[k] = solve(shape, at(k), y + slope / f64::from(STEPS));
            }
            for k in (0..middle).rev() {
                let (y, slope) = log[k + 1];
                log[k] = solve(shape, at(k), y - slope / f64::from(STEPS));
            }
        }
        Self { shape, log }
    }

    /// The value that has the same share of the distribution below it as the normal value `g` has: a standard normal variable
    /// mapped so is gamma-distributed. Good to 2e-5 of itself.
    pub fn at_normal(&self, g: f64) -> f64 {
        let place = (g + f64::from(REACH)) * f64::from(STEPS);
        let last = self.log.len() - 1;
        let k = (place.max(0.0) as usize).min(last - 1);
        let t = place - k as f64;
        let ((y0, s0), (y1, s1)) = (self.log[k], self.log[k + 1]);
        let h = 1.0 / f64::from(STEPS);
        if t < 0.0 {
            return (y0 + s0 * t * h).exp();
        }
        if t > 1.0 {
            return (y1 + s1 * (t - 1.0) * h).exp();
        }
        // Hermite's cubic between the two points.
        let (rise, m0, m1) = (y1 - y0, s0 * h, s1 * h);
        let y = y0 + t * (m0 + t * ((3.0 * rise - 2.0 * m0 - m1) + t * (m0 + m1 - 2.0 * rise)));
        y.exp()
    }

    /// Share of the distribution below `x`.
    pub fn below(&self, x: f64) -> f64 {
        if self.shape > LARGEST_SHAPE {
            let (y, deviation) = (x.max(0.0).ln(), self.log[0].1);
            return normal_below(y / deviation + deviation / 2.0);
        }
        incomplete_gamma(self.shape, self.shape * x).0
    }
}

/// Solves for y = ln x whose share below (or above, in the upper half) is that of the normal value `g`, from the guess `y`; gives y and
/// dy/dg. Newton's method on the logarithm of the share, which is concave in y.
fn solve(shape: f64, g: f64, mut y: f64) -> (f64, f64) {
    let upper = g > 0.0;
    let share = normal_below(-g.abs());
    let density = |y: f64| (shape * (shape.ln() + y) - shape * y.exp() - lgamma(shape)).exp();
    for _ in 0..100 {
        let (below, above) = incomplete_gamma(shape, shape * y.exp());
        let (got, sign) = if upper { (above, -1.0) } else { (below, 1.0) };
        let step = sign * got * (got / share).ln() / density(y);
        // A guess too far out in a tail has no slope to go by; the steps stay sane.
        y -= step.clamp(-1.0, 1.0);
        if step.abs() < 1e-13 * y.abs().max(1.0) {
            break;
        }
    }
    let normal_density = (-g * g / 2.0).exp() / std::f64::consts::TAU.sqrt();
    (y, normal_density / density(y))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn incomplete_gamma_has_its_closed_forms() {
        // P(1, x) = 1 − e^(−x); P(1/2, x) = erf √x; Q(3, x) = e^(−x)(1 + x + x²/2) (NIST DLMF 8.4).
        for x in [1e-6_f64, 0.3, 1.7, 4.0, 30.0] {
            let (p, q) = incomplete_gamma(1.0, x);
            assert!(
                (p / -(-x).exp_m1() - 1.0).abs() < 1e-13 && (q / (-x).exp() - 1.0).abs() < 1e-9
            );
            let (p, _) = incomplete_gamma(0.5, x);
            assert!((p / libm::erf(x.sqrt()) - 1.0).abs() < 1e-13);
            let (_, q) = incomplete_gamma(3.0, x);
            assert!((q / ((-x).exp() * (1.0 + x + x * x / 2.0)) - 1.0).abs() < 1e-13);
        }
    }

    #[test]
    fn quantiles_of_the_exponential_are_closed() {
        // Shape 1: x = −ln(1 − Φ(g)).
        let law = UnitGamma::new(1.0);
        for k in -80..=80 {
            let g = f64::from(k) * 0.07;
            let exact = if g < 0.0 {
                -(-normal_below(g)).ln_1p()
            } else {
                -normal_below(-g).ln()
            };
            let got = law.at_normal(g);
            assert!((got / exact - 1.0).abs() < 2e-5, "{g} {got} {exact}");
        }
    }

    #[test]
    fn moments_are_those_of_the_shape() {
        // E x = 1, E x² = 1 + 1/shape, by the trapezoid rule over the normal variable.
        for shape in [0.9, 1.95190, 4.04058, 60.0, 3e3, 9e4, 2e5] {
            let law = UnitGamma::new(shape);
            let (mut one, mut two) = (0.0, 0.0);
            for k in -800..=800 {
                let g = f64::from(k) / 100.0;
                let weight = (-g * g / 2.0).exp() / std::f64::consts::TAU.sqrt() / 100.0;
                let x = law.at_normal(g);
                one += weight * x;
                two += weight * x * x;
            }
            assert!((one - 1.0).abs() < 1e-5, "{shape}: {one}");
            let variance = two - one * one;
            assert!((variance * shape - 1.0).abs() < 1e-4, "{shape}: {variance}");
        }
    }
}
