//! What exact poles and zeros leave undone of a response, fitted with a few taps.

use std::f64::consts::PI;

use num_complex::Complex64;

use super::SectionLaw;

/// Taps of the fitted filter.
pub(super) const TAPS: usize = 5;
/// Radians a sample to which the response is fitted closely: 22 kHz at 384 kHz.
const BAND: f64 = 0.36;
/// Weight of the fit above the band, where it keeps the response bounded.
const BEYOND: f64 = 0.003;
/// Points of the fit in either range.
const POINTS: usize = 16;
/// Roots that turn faster than this, radians a sample, have no counterpart of their own: the taps follow them.
const FASTEST: f64 = 2.2;

/// (e^u − 1)/u, its counterpart's error at a root: 1 where the root is slow.
fn growth(u: Complex64) -> Complex64 {
    if u.norm() < 1e-3 {
        1.0 + u * (0.5 + u * (1.0 / 6.0 + u / 24.0))
    } else {
        (u.exp() - 1.0) / u
    }
}

/// A law on the unit circle: what its exact roots give, and what the taps must make up.
pub(super) struct Fit<'a> {
    pub law: &'a SectionLaw,
    /// Length of a sample, s.
    pub step: f64,
}

impl Fit<'_> {
    /// Whether a root has a counterpart of its own.
    pub fn is_kept(&self, root: &Complex64) -> bool {
        root.im.abs() * self.step <= FASTEST
    }

    /// The factor that the taps must have at `angle` radians a sample.
    fn wanted(&self, angle: f64) -> Complex64 {
        let s = Complex64::new(0.0, angle);
        let factor = |root: &Complex64| {
            let u = root * self.step - s;
            if self.is_kept(root) {
                1.0 / growth(u)
            } else {
                -u
            }
        };
        let above: Complex64 = self.law.zeros.iter().map(factor).product();
        let below: Complex64 = self.law.poles.iter().map(factor).product();
        above / below
    }

    /// The taps: least squares of the relative error inside the band and, lightly, of the error over `reference` beyond it, with
    /// 0 Hz exact. `rooted` is the response of the exact roots in z.
    pub fn taps(&self, rooted: impl Fn(Complex64) -> Complex64, reference: f64) -> [f64; TAPS] {
        const FREE: usize = TAPS - 1;
        let still = self.wanted(0.0).re;
        let (mut matrix, mut right) = ([[0.0; FREE]; FREE], [0.0; FREE]);
        for k in 0..2 * POINTS {
            let (part, beyond) = ((k % POINTS) as f64 + 0.5, k >= POINTS);
            let angle = if beyond {
                BAND + (PI - BAND) * part / POINTS as f64
            } else {
                BAND * (PI / 2.0 * part / POINTS as f64).sin()
            };
            let delay = Complex64::from_polar(1.0, -angle);
            let wanted = self.wanted(angle);
            let weight = if beyond {
                BEYOND * rooted(delay).norm() / reference
            } else {
                1.0 / wanted.norm()
            };
            let rest = wanted - still;
            let mut column = [Complex64::default(); FREE];
            let mut power = Complex64::from(1.0);
            for c in &mut column {
                power *= delay;
                *c = power - 1.0;
            }
            for i in 0..FREE {
                for j in 0..FREE {
                    matrix[i][j] += weight * weight * (column[i].conj() * column[j]).re;
                }
                right[i] += weight * weight * (column[i].conj() * rest).re;
            }
        }
        let free = solve(matrix, right);
        let mut taps = [0.0; TAPS];
        taps[1..].copy_from_slice(&free);
        taps[0] = still - free.iter().sum::<f64>();
        taps
    }
}

/// Solves a symmetric positive system by elimination.
fn solve<const N: usize>(mut a: [[f64; N]; N], mut b: [f64; N]) -> [f64; N] {
    for i in 0..N {
        for j in i + 1..N {
            let f = a[j][i] / a[i][i];
            let row = a[i];
            a[j].iter_mut().zip(row).for_each(|(x, y)| *x -= f * y);
            b[j] -= f * b[i];
        }
    }
    for i in (0..N).rev() {
        let known: f64 = (i + 1..N).map(|j| a[i][j] * b[j]).sum();
        b[i] = (b[i] - known) / a[i][i];
    }
    b
}
