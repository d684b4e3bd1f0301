//! Light that is dimmed by pulses.

use std::f64::consts::PI;

/// Amplitude of the `n`th harmonic (n ≥ 1) of a pulsed light over its mean: 2·sin(nπD)/(nπD)·sin(nπr)/(nπr).
///
/// `duty` D in 0…1 (not 0) is the lit share of a period, counted between the middles of the edges; `edge` r (≥ 0) is the time of a straight
/// edge as a share of the period. The light is a box of D periods smoothed over r periods, on at mean/D; edges longer than the
/// pulse lower its top and leave its mean. Negative: the harmonic stands upside down in the middle of the pulse.
pub fn harmonic(n: u32, duty: f64, edge: f64) -> f64 {
    let n = f64::from(n);
    2.0 * sinc(n * duty) * sinc(n * edge)
}

/// sin(πx)/(πx), with sin(πx) exactly 0 at whole numbers.
fn sinc(x: f64) -> f64 {
    if x == 0.0 {
        return 1.0;
    }
    // The remainder to an even number keeps the sine exact for large x.
    let turn = x - 2.0 * (x / 2.0).round();
    let sine = if turn.abs() == 1.0 {
        0.0
    } else {
        (PI * turn).sin()
    };
    sine / (PI * x)
}

#[cfg(test)]
mod tests {
    use super::*;

    // 2·sin(nπD)/(nπD), computed apart from this code.
    #[test]
    fn harmonics_match_their_table() {
        for (duty, table) in [
            (0.5, [1.27324, 0.0, -0.424413]),
            (0.25, [1.80063, 1.27324, 0.600211]),
            (0.1, [1.96726, 1.87098, 1.71679]),
        ] {
            for (n, value) in (1..).zip(table) {
                assert!((harmonic(n, duty, 0.0) - value).abs() < 1e-5, "{duty} {n}");
            }
        }
        assert_eq!(harmonic(7, 1.0, 0.0), 0.0);
        // An edge as long as a half-lit pulse makes a triangle: odd harmonics 8/(n²π²).
        assert!((harmonic(3, 0.5, 0.5) - 8.0 / (9.0 * PI * PI)).abs() < 1e-12);
    }
}
