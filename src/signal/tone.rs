//! Sine test tones.

use std::f64::consts::{PI, TAU};

use thiserror::Error;

/// A tone that the sample rate cannot carry.
#[derive(Debug, Error, PartialEq)]
#[error(
    "a tone of {frequency} Hz cannot be made at {rate} Hz: above 0 Hz and below half the sample rate is accepted"
)]
pub struct ToneError {
    /// Asked for, Hz.
    pub frequency: f64,
    /// Sample rate, Hz.
    pub rate: f64,
}

/// A sine that starts at phase 0 under a raised-cosine onset.
///
/// The phase is kept as a whole number of 2⁻⁶⁴ of a turn, so it neither drifts nor loses precision: the only error of the frequency is that of
/// its ratio to the sample rate as an f64, 10⁻¹⁶ of itself.
#[derive(Debug, Clone)]
pub struct Tone {
    phase: u64,
    step: u64,
    peak: f64,
    onset: u64,
    sample: u64,
}

impl Tone {
    /// A tone of `frequency` Hz, 0 < f < rate/2, and amplitude `peak`, at `rate` samples a second. It grows over `onset` seconds (0 or more).
    pub fn new(rate: f64, frequency: f64, peak: f64, onset: f64) -> Result<Self, ToneError> {
        if !(frequency > 0.0 && frequency < rate / 2.0 && rate.is_finite()) {
            return Err(ToneError { frequency, rate });
        }
        Ok(Tone {
            phase: 0,
            step: (frequency / rate * 2f64.powi(64)).round() as u64,
            peak,
            onset: (onset * rate).round() as u64,
            sample: 0,
        })
    }

    /// The next sample.
    #[inline]
    pub fn next_sample(&mut self) -> f64 {
        // As a signed number the phase runs from −½ to ½ turn: the small phases keep all their bits.
        let turn = (self.phase as i64) as f64 * 2f64.powi(-64);
        self.phase = self.phase.wrapping_add(self.step);
        let mut x = self.peak * (TAU * turn).sin();
        if self.sample < self.onset {
            let share = self.sample as f64 / self.onset as f64;
            x *= 0.5 - 0.5 * (PI * share).cos();
            self.sample += 1;
        }
        x
    }

    /// Fills a block with the next samples.
    pub fn fill(&mut self, block: &mut [f64]) {
        for x in block {
            *x = self.next_sample();
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// 997 Hz at 48 kHz repeats every 48 000 samples: after an hour it must still be the same second.
    #[test]
    fn the_phase_does_not_drift() {
        let mut tone = Tone::new(48_000.0, 997.0, 1.0, 0.0).unwrap();
        tone.phase = tone.step.wrapping_mul(48_000 * 3600);
        for n in 0..48_000 {
            let exact = (TAU * (f64::from(n) * 997.0 % 48_000.0) / 48_000.0).sin();
            assert!((tone.next_sample() - exact).abs() < 1e-8);
        }
    }

    #[test]
    fn the_onset_grows_without_a_step() {
        let mut tone = Tone::new(48_000.0, 1000.0, 2.0, 0.01).unwrap();
        let mut block = vec![0.0; 960];
        tone.fill(&mut block);
        assert_eq!(block[0], 0.0);
        // Half the amplitude in the middle of the onset, all of it after.
        assert!((block[252] - 2.0 * 0.5 * (1.0 - (PI * 252.0 / 480.0).cos())).abs() < 1e-9);
        assert!((block[492] - 2.0).abs() < 1e-9);
    }

    #[test]
    fn a_tone_out_of_range_is_refused() {
        for frequency in [0.0, -1.0, 24_000.0, f64::NAN] {
            assert!(Tone::new(48_000.0, frequency, 1.0, 0.0).is_err());
        }
    }
}
