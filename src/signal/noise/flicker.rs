//! White noise shaped into 1/f noise.

use std::f64::consts::TAU;

/// Ratio between the poles of neighbouring sections; a zero stands midway between two poles on a logarithmic scale, which makes the slope
/// of the cascade −10 dB a decade (Keshner, "1/f noise", Proc. IEEE 70 (1982) 212).
const SPACING: f64 = 5.0;
/// The highest zero over the sample rate, and the pole and zero of the section that makes up for the approach to half the
/// sample rate. The four numbers were fitted together by random descent on the largest error over 10⁻⁴ … 0.45 of the sample rate,
/// for `SPACING` and twelve sections; the error left is 0.04 dB.
const TOP: f64 = 0.667_907_034_9;
const LAST_POLE: f64 = -0.199_034_060_6;
const LAST_ZERO: f64 = -0.287_456_168_7;
const LEVEL_DB: f64 = 7.371_480_739_8;
/// Poles go down to this frequency, Hz, so that the slope holds from 0.1 Hz up.
const LOWEST: f64 = 0.01;

/// A filter that turns white noise into 1/f noise: where its input has the one-sided density S₀ per Hz, its output has S₀·(1 Hz/f), within
/// 0.1 dB from 0.1 Hz to 0.45 of the sample rate. Below 0.005 Hz the density levels off.
///
/// Noise of white density S₀ and corner frequency f_c, thus S₀·(1 + f_c/f), is a white stream of density S₀ plus √(f_c/1 Hz) times this filter's output
/// for another stream of density S₀. The filter starts at rest: its slowest part (0.1 Hz) takes seconds to reach its full variance.
#[derive(Debug, Clone)]
pub struct FlickerShaper {
    rate: f64,
    gain: f64,
    sections: Vec<Section>,
}

/// (1 − zero·z⁻¹)/(1 − pole·z⁻¹), transposed direct form II.
#[derive(Debug, Clone)]
struct Section {
    pole: f64,
    zero: f64,
    state: f64,
}

impl FlickerShaper {
    /// For a sample rate in Hz, 1 kHz or more.
    pub fn new(sample_rate: f64) -> Self {
        let mut sections = vec![Section {
            pole: LAST_POLE,
            zero: LAST_ZERO,
            state: 0.0,
        }];
        let mut zero = TOP;
        while zero * sample_rate > LOWEST {
            sections.push(Section {
                pole: (-TAU * zero / SPACING.sqrt()).exp(),
                zero: (-TAU * zero).exp(),
                state: 0.0,
            });
            zero /= SPACING;
        }
        FlickerShaper {
            rate: sample_rate,
            gain: 10f64.powf(LEVEL_DB / 20.0) / sample_rate.sqrt(),
            sections,
        }
    }

    /// One sample through the filter.
    #[inline]
    pub fn shape(&mut self, white: f64) -> f64 {
        let mut x = white * self.gain;
        for section in &mut self.sections {
            let y = x + section.state;
            section.state = section.pole * y - section.zero * x;
            x = y;
        }
        x
    }

    /// A block through the filter, in place.
    pub fn process(&mut self, block: &mut [f64]) {
        for x in block {
            *x = self.shape(*x);
        }
    }

    /// What the filter does to a density at `frequency` Hz: 1 Hz/f but for its error.
    pub fn density_gain(&self, frequency: f64) -> f64 {
        let half = (TAU * frequency / self.rate / 2.0).sin();
        // |1 − r·e^(−jω)|², written so that nothing cancels as r → 1 and ω → 0.
        let length = |r: f64| (1.0 - r) * (1.0 - r) + 4.0 * r * half * half;
        self.sections
            .iter()
            .fold(self.gain * self.gain, |power, section| {
                power * length(section.zero) / length(section.pole)
            })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_slope_holds_from_a_tenth_of_a_hertz_to_the_top() {
        for rate in [8_000.0, 48_000.0, 384_000.0, 1_536_000.0] {
            let shaper = FlickerShaper::new(rate);
            let (low, high) = (0.1f64, 0.45 * rate);
            for step in 0..=500 {
                let f = low * (high / low).powf(f64::from(step) / 500.0);
                let error = 10.0 * (shaper.density_gain(f) * f).log10();
                assert!(error.abs() < 0.1, "{error} dB at {f} Hz of {rate}");
            }
        }
    }

    /// The filter that runs is the filter that is calculated.
    #[test]
    fn the_impulse_response_has_the_calculated_density() {
        let rate = 48_000.0;
        let mut shaper = FlickerShaper::new(rate);
        let response: Vec<f64> = (0..1 << 20)
            .map(|n| shaper.shape(if n == 0 { 1.0 } else { 0.0 }))
            .collect();
        for f in [50.0, 1000.0, 15_000.0] {
            let (mut re, mut im) = (0.0, 0.0);
            for (n, h) in response.iter().enumerate() {
                let (sin, cos) = (TAU * f / rate * n as f64).sin_cos();
                re += h * cos;
                im += h * sin;
            }
            let ratio = (re * re + im * im) / shaper.density_gain(f);
            assert!((ratio - 1.0).abs() < 0.01, "{ratio} at {f} Hz");
        }
    }
}
