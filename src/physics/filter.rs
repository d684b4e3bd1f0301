//! Analogue low-pass prototypes: their poles.

use std::f64::consts::PI;

use num_complex::Complex64;

/// The alignment of a filter.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Family {
    /// Maximally flat magnitude (Butterworth 1930): −3.01 dB at 1 rad/s.
    Butterworth,
    /// Maximally flat group delay (Thomson 1949): scaled to −3.01 dB at 1 rad/s.
    Bessel,
    /// Equal ripple in the pass band, of the first kind: the ripple band ends at 1 rad/s.
    Chebyshev {
        /// dB, > 0
        ripple: f64,
    },
}

/// A low-pass of edge 1 rad/s and largest gain 1.
#[derive(Debug, Clone, PartialEq)]
pub struct Prototype {
    /// Poles with an imaginary part of 0 or more; each complex one stands for its conjugate too.
    pub poles: Vec<Complex64>,
    /// Gain at 0 Hz: below 1 for an even order with ripple, which starts at the bottom of the ripple.
    pub gain: f64,
}

impl Prototype {
    /// Of a family and an order, 1 to 8 (higher ones lose digits).
    ///
    /// Butterworth's and Chebyshev's poles in closed form (for example Zverev, Handbook of Filter Synthesis, 1967, from memory),
    /// Bessel's as the roots of the reverse Bessel polynomial.
    pub fn new(family: Family, order: usize) -> Self {
        let n = order as f64;
        let on_ellipse = |across: f64, along: f64| {
            (1..=order.div_ceil(2))
                .map(|k| {
                    let angle = PI * (2 * k - 1) as f64 / (2.0 * n);
                    let along = if 2 * k - 1 == order {
                        0.0
                    } else {
                        along * angle.cos()
                    };
                    Complex64::new(-across * angle.sin(), along)
                })
                .collect()
        };
        match family {
            Family::Butterworth => Self {
                poles: on_ellipse(1.0, 1.0),
                gain: 1.0,
            },
            Family::Chebyshev { ripple } => {
                let tenth = 10f64.ln() / 10.0;
                let epsilon = (ripple * tenth).exp_m1().max(1e-300).sqrt();
                let mu = (1.0 / epsilon).asinh() / n;
                Self {
                    poles: on_ellipse(mu.sinh(), mu.cosh()),
                    gain: if order.is_multiple_of(2) {
                        1.0 / epsilon.hypot(1.0)
                    } else {
                        1.0
                    },
                }
            }
            Family::Bessel => Self {
                poles: bessel(order),
                gain: 1.0,
            },
        }
    }
}

/// Coefficients of the reverse Bessel polynomial, lowest power first: (2n − k)!/((n − k)!·k!·2^(n−k)).
fn reverse_bessel(order: usize) -> Vec<f64> {
    // From the highest downwards: a_(k−1) = a_k·k·(2n − k + 1)/(2(n − k + 1)).
    let mut coefficients = vec![1.0];
    for k in (1..=order).rev() {
        let last = coefficients[coefficients.len() - 1];
        let (k, n) = (k as f64, order as f64);
        coefficients.push(last * k * (2.0 * n - k + 1.0) / (2.0 * (n - k + 1.0)));
    }
    coefficients.reverse();
    coefficients
}

fn bessel(order: usize) -> Vec<Complex64> {
    let coefficients = reverse_bessel(order);
    let mut poles = roots(&coefficients);
    // The half-power frequency by halving: the magnitude falls steadily.
    let half_power = |w: f64| {
        let size: f64 = poles
            .iter()
            .map(|p| (Complex64::new(0.0, w) / p - 1.0).norm_sqr())
            .product();
        size > 2.0
    };
    let (mut low, mut high) = (0.0, 2.0 * order as f64);
    for _ in 0..60 {
        let middle = (low + high) / 2.0;
        if half_power(middle) {
            high = middle;
        } else {
            low = middle;
        }
    }
    for p in &mut poles {
        *p /= high;
        // The one real root of an odd order.
        if p.im.abs() < 1e-9 {
            p.im = 0.0;
        }
    }
    poles.retain(|p| p.im >= 0.0);
    poles
}

/// All roots of a polynomial with real coefficients, lowest power first and highest 1: Durand and Kerner's iteration.
fn roots(coefficients: &[f64]) -> Vec<Complex64> {
    let order = coefficients.len() - 1;
    let value = |x: Complex64| {
        coefficients
            .iter()
            .rev()
            .fold(Complex64::default(), |sum, c| sum * x + c)
    };
    // Starts on a circle of about the roots' size, off the real axis.
    let size = coefficients[0].powf(1.0 / order as f64);
    let mut found: Vec<Complex64> = (0..order)
        .map(|k| Complex64::from_polar(size, 0.4 + 2.0 * PI * k as f64 / order as f64))
        .collect();
    for _ in 0..200 {
        let mut moved = 0.0f64;
        for i in 0..order {
            let others: Complex64 = (0..order)
                .filter(|j| *j != i)
                .map(|j| found[i] - found[j])
                .product();
            let by = value(found[i]) / others;
            found[i] -= by;
            moved = moved.max(by.norm() / size);
        }
        if moved < 1e-15 {
            break;
        }
    }
    found
}

#[cfg(test)]
mod tests {
    use super::*;

    fn size(prototype: &Prototype, w: f64) -> f64 {
        prototype
            .poles
            .iter()
            .map(|p| {
                let one = |p: Complex64| (Complex64::new(0.0, w) / p - 1.0).norm();
                if p.im == 0.0 {
                    one(*p)
                } else {
                    one(*p) * one(p.conj())
                }
            })
            .product::<f64>()
            .recip()
            * prototype.gain
    }

    #[test]
    fn magnitudes_have_their_closed_forms() {
        for order in 1..=8 {
            let poles = |p: &Prototype| {
                p.poles
                    .iter()
                    .map(|p| if p.im == 0.0 { 1 } else { 2 })
                    .sum::<usize>()
            };
            let b = Prototype::new(Family::Butterworth, order);
            let c = Prototype::new(Family::Chebyshev { ripple: 0.5 }, order);
            let l = Prototype::new(Family::Bessel, order);
            assert_eq!([poles(&b), poles(&c), poles(&l)], [order; 3]);
            assert!((size(&l, 1.0) - 0.5f64.sqrt()).abs() < 1e-12);
            let epsilon_squared = 10f64.powf(0.05) - 1.0;
            for w in [0.0, 0.3, 0.8, 1.0, 1.5, 4.0f64] {
                // 1/√(1 + w^2n); 1/√(1 + ε²T_n²(w)).
                let flat = 1.0 / (1.0 + w.powi(2 * order as i32)).sqrt();
                assert!((size(&b, w) / flat - 1.0).abs() < 1e-12);
                let n = order as f64;
                let t = if w <= 1.0 {
                    (n * w.acos()).cos()
                } else {
                    (n * w.acosh()).cosh()
                };
                let rippled = 1.0 / (1.0 + epsilon_squared * t * t).sqrt();
                assert!((size(&c, w) / rippled - 1.0).abs() < 1e-12, "{order} {w}");
            }
        }
    }

    /// θ₃ = s³ + 6s² + 15s + 15 (Thomson 1949; also in any table of Bessel filters).
    #[test]
    fn the_reverse_bessel_polynomial() {
        assert_eq!(reverse_bessel(3), [15.0, 15.0, 6.0, 1.0]);
        assert_eq!(reverse_bessel(4), [105.0, 105.0, 45.0, 10.0, 1.0]);
    }
}
