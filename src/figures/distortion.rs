//! Harmonic distortion, and distortion with noise, of a steady tone.

use super::{Conditions, Unmeasurable, check_finite};
use crate::signal::spectrum::{Analyser, Spectrum};

/// Shape of the window: sidelobes 188 dB down, a main lobe ±7.7 bins wide.
const BETA: f64 = 24.0;
/// Half a main lobe in bins, with one to spare, rounded up.
const LOBE_BINS: f64 = 9.0;
/// A fundamental smaller than this share of the record's largest value is rounding, not a tone.
pub(super) const ABSENT: f64 = 1e-12;

/// Total harmonic distortion (over the fundamental) that the method itself shows for a pure tone in double precision, as a ratio: −190 dB. The tests
/// measure −199.8 dB at worst, on and between bins, from 18 periods to 9000.
pub const THD_FLOOR: f64 = 3.162_277_660_168_379_5e-10;
/// The same for distortion and noise (over the total): −180 dB. Measured −196.2 dB at worst: the window's sidelobes beside the fundamental.
pub const THD_N_FLOOR: f64 = 1e-9;

/// The harmonics of a tone.
#[derive(Debug, Clone, PartialEq)]
pub struct Distortion {
    /// Rms value of the fundamental, in the record's unit.
    pub fundamental: f64,
    /// Rms values of the harmonics inside the band, the second first.
    pub harmonics: Vec<f64>,
}

impl Distortion {
    /// Total harmonic distortion over the fundamental (THD_F of IEC 60268-3): root sum square of harmonics 2…n inside the band, as a ratio to
    /// the fundamental. 0 where no harmonic lies inside the band.
    pub fn thd(&self) -> f64 {
        let power: f64 = self.harmonics.iter().map(|h| h * h).sum();
        power.sqrt() / self.fundamental
    }

    /// Total harmonic distortion over the root sum square of fundamental and harmonics (THD_R): THD_F/√(1 + THD_F²).
    pub fn thd_over_total(&self) -> f64 {
        let ratio = self.thd();
        ratio / ratio.hypot(1.0)
    }
}

/// Everything in the band but the fundamental.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Residue {
    /// Rms value of the fundamental, in the record's unit.
    pub fundamental: f64,
    /// Rms value of the rest of the band.
    pub rest: f64,
}

impl Residue {
    /// Total harmonic distortion and noise (AES17): the rest of the band over the whole of it, as a ratio.
    pub fn thd_n(&self) -> f64 {
        self.rest / self.rest.hypot(self.fundamental)
    }

    /// Signal over noise and distortion, dB: the inverse of [`thd_n`](Self::thd_n).
    pub fn sinad_db(&self) -> f64 {
        -super::decibels(self.thd_n())
    }
}

/// Measures records of one length under one set of conditions.
pub struct DistortionMeter {
    conditions: Conditions,
    analyser: Analyser,
}

impl DistortionMeter {
    /// For settled records of `samples`. The tone must lie inside the band, and the record must hold 18 periods of it or more.
    pub fn new(conditions: Conditions, samples: usize) -> Result<Self, Unmeasurable> {
        conditions.check()?;
        let (low, high) = conditions.band;
        let tone = conditions.tone;
        if !(low <= tone && tone <= high) {
            return Err(Unmeasurable::ToneOutsideBand { tone, low, high });
        }
        let needed = samples_to_resolve(tone, conditions.rate);
        if samples < needed {
            return Err(Unmeasurable::TooShort {
                got: samples,
                needed,
                spacing: tone,
            });
        }
        Ok(DistortionMeter {
            analyser: Analyser::new(conditions.rate, samples, BETA),
            conditions,
        })
    }

    /// Fundamental and harmonics of a settled record, random noise off. The record may hold any number of periods, whole or not.
    pub fn harmonics(&self, record: &[f64]) -> Result<Distortion, Unmeasurable> {
        let spectrum = self.spectrum(record)?;
        let tone = self.conditions.tone;
        // A harmonic on the band's very edge is inside; one whose lobe passes half the sample rate is seen in part only and left out.
        let high = self.conditions.band.1 * (1.0 + 1e-12);
        let top = high.min(spectrum.top() - spectrum.lobe());
        let harmonics = (2..)
            .map(|n| f64::from(n) * tone)
            .take_while(|f| *f <= top)
            .map(|f| spectrum.tone_rms(f))
            .collect();
        Ok(Distortion {
            fundamental: spectrum.tone_rms(tone),
            harmonics,
        })
    }

    /// Fundamental and everything else inside the band of a settled record, noise on. The mean is left out. The notch is the fundamental's main lobe (±9 bins of the
    /// record), so it takes next to nothing of the noise with it.
    pub fn residue(&self, record: &[f64]) -> Result<Residue, Unmeasurable> {
        let spectrum = self.spectrum(record)?;
        let (low, high) = self.conditions.band;
        let rest = spectrum.band_power_without(low, high, &[self.conditions.tone]);
        Ok(Residue {
            fundamental: spectrum.tone_rms(self.conditions.tone),
            rest: rest.sqrt(),
        })
    }

    fn spectrum(&self, record: &[f64]) -> Result<Spectrum, Unmeasurable> {
        let record = self.piece(record)?;
        check_finite(record)?;
        let spectrum = self.analyser.analyse(record);
        let largest = record.iter().fold(0.0f64, |m, x| m.max(x.abs()));
        if spectrum.tone_rms(self.conditions.tone) > ABSENT * largest {
            Ok(spectrum)
        } else {
            Err(Unmeasurable::NoTone)
        }
    }

    fn piece<'a>(&self, record: &'a [f64]) -> Result<&'a [f64], Unmeasurable> {
        let needed = self.analyser.samples();
        record.get(..needed).ok_or(Unmeasurable::TooShort {
            got: record.len(),
            needed,
            spacing: self.conditions.tone,
        })
    }
}

/// Samples at `rate` Hz in which lines `spacing` Hz apart stand clear of each other (and of 0 Hz) under this file's window.
pub(super) fn samples_to_resolve(spacing: f64, rate: f64) -> usize {
    (2.0 * LOBE_BINS * rate / spacing).ceil() as usize
}

/// A spectrum under this file's window, for lines.
pub(super) fn line_spectrum(rate: f64, record: &[f64]) -> Spectrum {
    Analyser::new(rate, record.len(), BETA).analyse(record)
}
