//! Densities of the fundamental noises. One-sided, per hertz.

use super::constants::{BOLTZMANN, ELEMENTARY_CHARGE};

/// Johnson noise of a resistance: squared voltage density 4kTR, V²/Hz (Johnson 1928, Nyquist 1928).
///
/// `resistance` in Ω (≥ 0), `temperature` in K. Its current form is this over the resistance squared.
pub fn johnson(resistance: f64, temperature: f64) -> f64 {
    4.0 * BOLTZMANN * temperature * resistance
}

/// Johnson noise of a conductance: squared current density 4kTG, A²/Hz. `conductance` in S (≥ 0).
pub fn johnson_current(conductance: f64, temperature: f64) -> f64 {
    4.0 * BOLTZMANN * temperature * conductance
}

/// Shot noise of a current: squared current density 2qI, A²/Hz (Schottky 1918). `current` in A; its size counts.
pub fn shot(current: f64) -> f64 {
    2.0 * ELEMENTARY_CHARGE * current.abs()
}

/// Factor by which a 1/f part with the corner `corner` (Hz) raises a white density at `frequency` (Hz): 1 + f_c/f.
pub fn flicker_factor(frequency: f64, corner: f64) -> f64 {
    if corner > 0.0 {
        1.0 + corner / frequency
    } else {
        1.0
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    // Values: Johnson and Schottky formulas, computed to six digits (shared check list, section 7).
    #[test]
    fn densities_match_the_handbook() {
        let near = |a: f64, b: f64| assert!((a / b - 1.0).abs() < 2e-6, "{a} against {b}");
        near(johnson(1e3, 290.0).sqrt(), 4.00194e-9);
        near(johnson(1e6, 300.0).sqrt(), 128.716e-9);
        near(johnson(50.0, 290.0).sqrt(), 0.894861e-9);
        near(shot(1e-6).sqrt(), 0.566070e-12);
        near(shot(1e-3).sqrt(), 17.9007e-12);
        // 1 MΩ at 300 K over 20 kHz: 18.2032 µV.
        near((johnson(1e6, 300.0) * 20e3).sqrt(), 18.2032e-6);
    }
}
