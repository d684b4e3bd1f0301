//! Corners of a piecewise straight waveform without aliases: what a step or a bend lacks of its band-limited form, near the corner.
//!
//! The band limit is a sinc under a Kaiser window (Kaiser 1974) of `REACH` samples to each side, β for −110 dB: flat within 1e-5 to 0.39 of
//! the sample rate, down by 110 dB from 0.61 of it, so that nothing folds below 0.39 of it. Its integral stands for a step, its second
//! integral for a bend (band-limited steps: Stilson and Smith 1996; Brandt 2001). Linear phase, centred on the corner.

use std::f64::consts::PI;
use std::sync::OnceLock;

/// Samples to each side of a corner that its correction reaches.
pub const REACH: usize = 16;
/// Table points a sample.
const FINE: usize = 64;
const BETA: f64 = 0.1102 * (110.0 - 8.7);

/// The kernel with its first and second integrals at −REACH…0, `FINE` points a sample.
struct Kernel {
    impulse: Vec<f64>,
    step: Vec<f64>,
    ramp: Vec<f64>,
}

fn kernel() -> &'static Kernel {
    static KERNEL: OnceLock<Kernel> = OnceLock::new();
    KERNEL.get_or_init(|| {
        let points = REACH * FINE + 1;
        let h = 1.0 / FINE as f64;
        let at = |k: f64| windowed_sinc(k * h - REACH as f64);
        let (mut step, mut ramp) = (vec![0.0; points], vec![0.0; points]);
        for k in 1..points {
            let (mut area, mut moment) = (0.0, 0.0);
            for (node, weight) in GAUSS {
                let u = (node + 1.0) / 2.0;
                let value = weight / 2.0 * h * at((k - 1) as f64 + u);
                area += value;
                moment += (1.0 - u) * h * value;
            }
            step[k] = step[k - 1] + area;
            ramp[k] = ramp[k - 1] + h * step[k - 1] + moment;
        }
        // The whole kernel weighs 1: half of it lies before the corner.
        let weight = 0.5 / step[points - 1];
        let scaled = |v: Vec<f64>| v.into_iter().map(|x| x * weight).collect();
        Kernel {
            impulse: (0..points).map(|k| weight * at(k as f64)).collect(),
            step: scaled(step),
            ramp: scaled(ramp),
        }
    })
}

fn windowed_sinc(t: f64) -> f64 {
    let inside = 1.0 - (t / REACH as f64).powi(2);
    if inside <= 0.0 {
        return 0.0;
    }
    let sinc = if t == 0.0 {
        1.0
    } else {
        (PI * t).sin() / (PI * t)
    };
    sinc * bessel_i0(BETA * inside.sqrt()) / bessel_i0(BETA)
}

/// I₀(x) by its power series (Abramowitz and Stegun 9.6.12).
fn bessel_i0(x: f64) -> f64 {
    let (mut term, mut sum, mut k) = (1.0, 1.0, 0.0);
    while term > 1e-17 * sum {
        k += 1.0;
        term *= (x / (2.0 * k)).powi(2);
        sum += term;
    }
    sum
}

/// Hermite's cubic through `values` with slopes `slopes` a sample, `before` samples before the corner.
fn look_up(values: &[f64], slopes: &[f64], fine: usize, place: f64) -> f64 {
    let k = (place as usize).min(values.len() - 2);
    let t = place - k as f64;
    let (rise, m0, m1) = (
        values[k + 1] - values[k],
        slopes[k] / fine as f64,
        slopes[k + 1] / fine as f64,
    );
    values[k] + t * (m0 + t * ((3.0 * rise - 2.0 * m0 - m1) + t * (m0 + m1 - 2.0 * rise)))
}

/// The correction of a unit step or of a unit bend.
#[derive(Debug, Clone)]
pub struct Corner {
    /// Band-limited value and slope at −reach…0 from the corner.
    values: Vec<f64>,
    slopes: Vec<f64>,
    reach: f64,
    bend: bool,
}

impl Corner {
    /// For a step from 0 to 1 whose straight edge takes `edge` samples (0 to 8), centred on the corner; the plain waveform is a hard step.
    pub fn step(edge: f64) -> Self {
        let kernel = kernel();
        let reach = REACH + (edge / 2.0).ceil() as usize;
        let points = reach * FINE + 1;
        // The mean over the edge by Gauss and Legendre, eight nodes a sample or more.
        let pieces = (edge.ceil() as usize).max(1) * 2;
        let mut values = Vec::with_capacity(points);
        let mut slopes = Vec::with_capacity(points);
        for k in 0..points {
            let t = k as f64 / FINE as f64 - reach as f64;
            let (mut value, mut slope) = (0.0, 0.0);
            for piece in 0..pieces {
                for (node, weight) in GAUSS {
                    let u = (piece as f64 + 0.5 + node / 2.0) / pieces as f64 - 0.5;
                    let w = weight / (2.0 * pieces as f64);
                    value += w * kernel.step_at(t + edge * u);
                    slope += w * kernel.impulse_at(t + edge * u);
                }
            }
            values.push(value);
            slopes.push(slope);
        }
        Self {
            values,
            slopes,
            reach: reach as f64,
            bend: false,
        }
    }

    /// For a bend from level to a slope of 1 a sample.
    pub fn bend() -> Self {
        let kernel = kernel();
        Self {
            values: kernel.ramp.clone(),
            slopes: kernel.step.clone(),
            reach: REACH as f64,
            bend: true,
        }
    }

    /// What to add to the plain waveform `after` samples after the corner (before it where negative; at 0 the plain step is 1).
    #[inline]
    pub fn correction(&self, after: f64) -> f64 {
        let away = self.reach - after.abs();
        if away <= 0.0 {
            return 0.0;
        }
        let lacks = look_up(&self.values, &self.slopes, FINE, away * FINE as f64);
        // A step is odd about its middle, a bend's lack even.
        if !self.bend && after >= 0.0 {
            -lacks
        } else {
            lacks
        }
    }
}

impl Kernel {
    fn step_at(&self, t: f64) -> f64 {
        let away = REACH as f64 - t.abs();
        let before = if away <= 0.0 {
            0.0
        } else {
            look_up(&self.step, &self.impulse, FINE, away * FINE as f64)
        };
        if t > 0.0 { 1.0 - before } else { before }
    }

    fn impulse_at(&self, t: f64) -> f64 {
        windowed_sinc(t) * self.impulse[REACH * FINE]
    }
}

/// Nodes and weights on −1…1 (Abramowitz and Stegun 25.4.30, n = 4).
const GAUSS: [(f64, f64); 4] = [
    (-0.861_136_311_594_053, 0.347_854_845_137_454),
    (-0.339_981_043_584_856, 0.652_145_154_862_546),
    (0.339_981_043_584_856, 0.652_145_154_862_546),
    (0.861_136_311_594_053, 0.347_854_845_137_454),
];

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::TAU;

    /// The kernel's gain at `f` of the sample rate, by the trapezoid rule on its table.
    fn gain(f: f64) -> f64 {
        let k = kernel();
        let n = k.impulse.len();
        let sum: f64 = (0..n)
            .map(|j| {
                let t = REACH as f64 - j as f64 / FINE as f64;
                let twice = if j == n - 1 { 1.0 } else { 2.0 };
                twice * k.impulse[j] * (TAU * f * t).cos()
            })
            .sum();
        sum / FINE as f64
    }

    #[test]
    fn the_kernel_is_flat_below_and_silent_above() {
        for f in [0.0, 0.1, 0.25, 0.3, 0.385] {
            assert!((gain(f) - 1.0).abs() < 1e-5, "{f} {}", gain(f));
        }
        for f in [0.615, 0.7, 0.9, 1.0, 1.4] {
            assert!(gain(f).abs() < 1e-5, "{f} {}", gain(f));
        }
    }

    #[test]
    fn corrections_vanish_at_their_ends_and_join_in_the_middle() {
        for edge in [0.0, 0.3, 2.5, 8.0] {
            let corner = Corner::step(edge);
            let reach = REACH as f64 + edge / 2.0;
            assert!(corner.correction(-reach).abs() < 1e-7);
            assert!((corner.correction(-1e-12) - 0.5).abs() < 1e-9);
            assert!((corner.correction(0.0) + 0.5).abs() < 1e-12);
        }
        let bend = Corner::bend();
        assert!(bend.correction(-15.999).abs() < 1e-7 && bend.correction(20.0) == 0.0);
        assert!((bend.correction(0.7) - bend.correction(-0.7)).abs() < 1e-15);
        // A long edge is the difference of two bends.
        let (edge, t): (f64, f64) = (8.0, 1.3);
        let ramp = |t: f64| t.max(0.0) + bend.correction(t);
        let expected = (ramp(t + edge / 2.0) - ramp(t - edge / 2.0)) / edge;
        assert!((1.0 + Corner::step(edge).correction(t) - expected).abs() < 1e-8);
    }
}
