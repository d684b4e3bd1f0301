//! First-order sections in time: a real pole integrated exactly between samples, under an input taken as the parabola through
//! the last three samples. Up to a twentieth of the sample rate a low-pass is good to 0.003 dB and 0.1° for any pole from 0 to
//! infinity; a high-pass, the input less its low-pass, to 0.02 dB and 0.1° above its corner and that times
//! corner/frequency below.

use num_complex::Complex64;

/// Weights of one step of y' = −λy + F: y₁ = decay·y₀ + now·F₁ + last·F₀ + before·F₋₁.
///
/// Exponential Adams–Moulton of third order (Cox and Matthews 2002; Hochbruck and Ostermann 2010): for λ → 0 it is the
/// Adams–Moulton rule, for λ → ∞ the static law with the second-order backward difference.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct StepWeights {
    pub decay: f64,
    pub now: f64,
    pub last: f64,
    pub before: f64,
}

impl StepWeights {
    /// Weights for the rate `lambda` (rad/s, ≥ 0, finite) and the step `step` (s, > 0).
    pub fn new(lambda: f64, step: f64) -> Self {
        let z = -lambda * step;
        // φ₁…φ₃ of z: closed forms, or Taylor's series where those cancel.
        let [p1, p2, p3] = if z > -0.5 {
            let series = |first: f64, from: f64| {
                let (mut sum, mut term) = (0.0, first);
                for k in 0..20 {
                    sum += term;
                    term *= z / (from + k as f64);
                }
                sum
            };
            [series(1.0, 2.0), series(0.5, 3.0), series(1.0 / 6.0, 4.0)]
        } else {
            let p1 = z.exp_m1() / z;
            let p2 = (p1 - 1.0) / z;
            [p1, p2, (p2 - 0.5) / z]
        };
        Self {
            decay: z.exp(),
            now: step * (p3 + p2 / 2.0),
            last: step * (p1 - 2.0 * p3),
            before: step * (p3 - p2 / 2.0),
        }
    }
}

/// y = direct·x + residue·w, w' = −λw + x: any first-order low-pass, high-pass or shelf.
#[derive(Debug, Clone)]
pub struct FirstOrder {
    direct: f64,
    residue: f64,
    weights: StepWeights,
    state: f64,
    last: f64,
    before: f64,
}

/// A first-order transfer on paper: direct + residue/(s + rate). Rates in rad/s.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FirstOrderLaw {
    pub direct: f64,
    pub residue: f64,
    pub rate: f64,
}

impl FirstOrderLaw {
    /// The unity-gain low-pass of `rate` (rad/s, > 0); an infinite rate passes everything.
    pub fn low_pass(rate: f64) -> Self {
        if rate.is_finite() {
            Self {
                direct: 0.0,
                residue: rate,
                rate,
            }
        } else {
            Self {
                direct: 1.0,
                residue: 0.0,
                rate: 1.0,
            }
        }
    }

    /// The unity-gain high-pass of `rate` (rad/s, ≥ 0); a rate of 0 passes everything.
    pub fn high_pass(rate: f64) -> Self {
        Self {
            direct: 1.0,
            residue: -rate,
            rate,
        }
    }

    /// (1 + s/zero)/(1 + s/pole)·gain: a shelf. Rates in rad/s, > 0; both finite.
    pub fn shelf(gain: f64, zero: f64, pole: f64) -> Self {
        let high = gain * pole / zero;
        Self {
            direct: high,
            residue: (gain - high) * pole,
            rate: pole,
        }
    }

    /// Value at `frequency` (Hz).
    pub fn at(&self, frequency: f64) -> Complex64 {
        if self.residue == 0.0 {
            return self.direct.into();
        }
        self.direct + self.residue / Complex64::new(self.rate, std::f64::consts::TAU * frequency)
    }

    /// The section that runs this law at `sample_rate` (Hz), at rest.
    pub fn section(&self, sample_rate: f64) -> FirstOrder {
        FirstOrder {
            direct: self.direct,
            residue: self.residue,
            weights: StepWeights::new(self.rate, 1.0 / sample_rate),
            state: 0.0,
            last: 0.0,
            before: 0.0,
        }
    }

    /// Whether the law lets everything through unchanged.
    pub fn is_identity(&self) -> bool {
        self.direct == 1.0 && self.residue == 0.0
    }
}

impl FirstOrder {
    /// Puts the section's output, under no input, at `output`; nothing to do where it has no memory.
    pub fn start_output(&mut self, output: f64) {
        if self.residue != 0.0 {
            self.state = output / self.residue;
        }
    }

    /// One sample through.
    #[inline]
    pub fn step(&mut self, x: f64) -> f64 {
        let w = &self.weights;
        self.state = w.decay * self.state + w.now * x + w.last * self.last + w.before * self.before;
        self.before = self.last;
        self.last = x;
        self.direct * x + self.residue * self.state
    }

    /// A block through, in place.
    pub fn run(&mut self, block: &mut [f64]) {
        if self.residue == 0.0 {
            if self.direct != 1.0 {
                block.iter_mut().for_each(|x| *x *= self.direct);
            }
            return;
        }
        for x in block {
            *x = self.step(*x);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::TAU;

    /// The discrete response of the section at `f`, from its weights.
    fn discrete(law: &FirstOrderLaw, rate: f64, f: f64) -> Complex64 {
        let s = law.section(rate);
        let z = Complex64::from_polar(1.0, -TAU * f / rate);
        let w = s.weights;
        law.direct + law.residue * (w.now + w.last * z + w.before * z * z) / (1.0 - w.decay * z)
    }

    #[test]
    fn follows_the_continuous_law_to_20_khz() {
        let rate = 384_000.0;
        for corner in [0.001, 1.0, 30.0, 1e3, 19e3, 150e3, 3e6, 1e9] {
            for (law, decibels) in [
                (FirstOrderLaw::low_pass(TAU * corner), 0.003),
                (FirstOrderLaw::high_pass(TAU * corner), 0.02),
            ] {
                for f in [20.0, 1e3, 8e3, 20e3] {
                    let ratio = discrete(&law, rate, f) / law.at(f);
                    let (db, degrees) = (20.0 * ratio.norm().log10(), ratio.arg().to_degrees());
                    let below = if law.direct == 1.0 {
                        (corner / f).max(1.0)
                    } else {
                        1.0
                    };
                    assert!(
                        db.abs() < decibels * below,
                        "corner {corner} f {f}: {db} dB"
                    );
                    assert!(
                        degrees.abs() < 0.1 * below,
                        "corner {corner} f {f}: {degrees}°"
                    );
                }
            }
        }
    }

    #[test]
    fn weights_are_continuous_where_the_series_ends() {
        let (a, b) = (
            StepWeights::new(0.4999999, 1.0),
            StepWeights::new(0.5000001, 1.0),
        );
        assert!(
            (a.now - b.now).abs() < 1e-6
                && (a.last - b.last).abs() < 1e-6
                && (a.before - b.before).abs() < 1e-6
        );
        // Adams–Moulton for a rate of nought.
        let am = StepWeights::new(0.0, 12.0);
        assert!(
            (am.now - 5.0).abs() < 1e-12
                && (am.last - 8.0).abs() < 1e-12
                && (am.before + 1.0).abs() < 1e-12
        );
    }
}
