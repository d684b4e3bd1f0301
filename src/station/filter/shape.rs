//! A filter's sections from its prototype, by the classical frequency transformations (for example Zverev 1967, from memory).

use std::f64::consts::TAU;

use num_complex::Complex64;

use crate::design::Section;
use crate::physics::filter::{Family, Prototype};
use crate::signal::pole_pair::SectionLaw;

/// What a filter passes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Shape {
    LowPass,
    HighPass,
    BandPass,
    Notch,
    /// (1 + sT₁)/(1 + sT₂).
    Emphasis,
    /// Its inverse.
    DeEmphasis,
}

impl Shape {
    /// Of a filter's section.
    pub fn of(section: &Section) -> Self {
        match section.word("shape") {
            "high-pass" => Self::HighPass,
            "band-pass" => Self::BandPass,
            "notch" => Self::Notch,
            "emphasis" => Self::Emphasis,
            "de-emphasis" => Self::DeEmphasis,
            _ => Self::LowPass,
        }
    }

    /// Whether a steady voltage passes.
    pub fn passes_rest(self) -> bool {
        !matches!(self, Self::HighPass | Self::BandPass)
    }
}

/// The sections of a buffered filter, one behind the other.
pub fn sections(section: &Section, shape: Shape) -> Vec<SectionLaw> {
    if matches!(shape, Shape::Emphasis | Shape::DeEmphasis) {
        let first = -1.0 / section.number("time_constant");
        let second = -1.0 / section.number("second_time_constant");
        let (zero, pole) = if shape == Shape::Emphasis {
            (first, second)
        } else {
            (second, first)
        };
        return vec![SectionLaw {
            gain: pole / zero,
            zeros: vec![zero.into()],
            poles: vec![pole.into()],
        }];
    }
    let family = match section.word("family") {
        "bessel" => Family::Bessel,
        "chebyshev" => Family::Chebyshev {
            ripple: section.number("ripple"),
        },
        _ => Family::Butterworth,
    };
    let prototype = Prototype::new(family, section.number("order") as usize);
    let corner = TAU * section.number("corner");
    let width = TAU * section.optional("width").unwrap_or(0.0);
    transformed(&prototype, shape, corner, width)
}

/// The prototype moved to `corner` (low-pass, high-pass) or around it in `width`; rad/s.
fn transformed(prototype: &Prototype, shape: Shape, corner: f64, width: f64) -> Vec<SectionLaw> {
    let mut all = Vec::new();
    for &pole in &prototype.poles {
        match shape {
            Shape::HighPass => {
                all.push(SectionLaw::high_pass(SectionLaw::with_conjugate(
                    corner / pole,
                )));
            }
            Shape::BandPass => {
                for poles in around(pole * width / 2.0, corner) {
                    all.push(SectionLaw {
                        gain: width * pole.norm(),
                        zeros: vec![0.0.into()],
                        poles,
                    });
                }
            }
            Shape::Notch => {
                for poles in around(width / (2.0 * pole), corner) {
                    all.push(SectionLaw {
                        gain: 1.0,
                        zeros: vec![Complex64::new(0.0, corner), Complex64::new(0.0, -corner)],
                        poles,
                    });
                }
            }
            _ => all.push(SectionLaw::low_pass(SectionLaw::with_conjugate(
                pole * corner,
            ))),
        }
    }
    if let Some(first) = all.first_mut() {
        first.gain *= prototype.gain;
    }
    all
}

/// The pole pairs s² − 2·half·s + centre² = 0 that a low-pass pole becomes: one pair of a real pole, two of a complex one.
fn around(half: Complex64, centre: f64) -> Vec<Vec<Complex64>> {
    let root = (half * half - centre * centre).sqrt();
    // The larger by the sum that does not cancel, the other by the product.
    let larger = if (half.conj() * root).re >= 0.0 {
        half + root
    } else {
        half - root
    };
    let other = centre * centre / larger;
    if half.im == 0.0 {
        vec![vec![larger, other]]
    } else {
        vec![vec![larger, larger.conj()], vec![other, other.conj()]]
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Decibels and degrees by which the sections in time are off their law, at most, up to `top` Hz where the law is above −80 dB.
    fn departure(laws: &[SectionLaw], rate: f64, top: f64) -> (f64, f64) {
        let sections: Vec<_> = laws.iter().map(|l| l.section(rate)).collect();
        let mut worst = (0.0f64, 0.0f64);
        for k in 0..=40 {
            let f = 10.0 * (top / 10.0f64).powf(f64::from(k) / 40.0);
            let law: Complex64 = laws.iter().map(|l| l.at(f)).product();
            if law.norm() < 1e-4 {
                continue;
            }
            let ratio = sections
                .iter()
                .map(|s| s.response(f / rate))
                .product::<Complex64>()
                / law;
            worst.0 = worst.0.max((20.0 * ratio.norm().log10()).abs());
            worst.1 = worst.1.max(ratio.arg().to_degrees().abs());
        }
        worst
    }

    /// Every family, order and shape with corners from 20 Hz to 100 kHz, at 384 kHz to 20 kHz and at 64 kHz (8 × 8 kHz) to 3.2 kHz: both
    /// faces within 0.1 dB and 1°, the seam that the design documents promise.
    #[test]
    fn both_faces_agree_everywhere() {
        let families = [
            Family::Butterworth,
            Family::Bessel,
            Family::Chebyshev { ripple: 1.0 },
        ];
        for (rate, top) in [(384e3, 20e3), (64e3, 3.2e3)] {
            let mut worst = (0.0f64, 0.0f64);
            for family in families {
                for order in 1..=8 {
                    let prototype = Prototype::new(family, order);
                    for corner in [20.0, 100.0, 1e3, 5e3, 10e3, 20e3, 30e3, 50e3, 100e3] {
                        let w = TAU * corner;
                        let alone = [Shape::LowPass, Shape::HighPass].map(|shape| (shape, 0.0));
                        let around = [0.05, 0.5, 1.0, 2.0, 3.0]
                            .map(|q| [(Shape::BandPass, q), (Shape::Notch, q)]);
                        for (shape, width) in alone.iter().chain(around.iter().flatten()) {
                            let laws = transformed(&prototype, *shape, w, width * w);
                            let off = departure(&laws, rate, top);
                            worst = (worst.0.max(off.0), worst.1.max(off.1));
                            assert!(
                                off.0 < 0.1 && off.1 < 1.0,
                                "{family:?} {order} {shape:?} {corner} Hz × {width} at {rate}: {off:?}"
                            );
                        }
                    }
                }
            }
            println!("{rate} Hz: {worst:?}");
        }
    }
}
