//! The figures of merit of an audio channel, each from a record of its output, by its published definition.
//!
//! Nothing here knows of designs, links or files: records are slices of samples in volts (or any other unit), conditions are a plain struct. Each figure
//! says its floor: the value below which its method cannot see.

pub mod band;
pub mod distortion;
pub mod hum;
pub mod intermodulation;
pub mod noise;
pub mod programme;
pub mod weighting;

mod result;

use thiserror::Error;

pub use result::{Figures, NOISE_FLOOR};

/// What a record was taken under.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Conditions {
    /// Sample rate of the record, Hz.
    pub rate: f64,
    /// Frequency of the test tone, Hz.
    pub tone: f64,
    /// Band the figures are taken in, Hz: low and high edge.
    pub band: (f64, f64),
}

/// Why a record gives no figure.
#[derive(Debug, Clone, Copy, PartialEq, Error)]
#[non_exhaustive]
pub enum Unmeasurable {
    /// The band is upside down, reaches below 0 Hz, or ends beyond half the sample rate.
    #[error("the band of {low} Hz to {high} Hz does not fit below half the sample rate, {top} Hz")]
    Band { low: f64, high: f64, top: f64 },
    /// The tone is not inside the band.
    #[error("the tone of {tone} Hz lies outside the band of {low} Hz to {high} Hz")]
    ToneOutsideBand { tone: f64, low: f64, high: f64 },
    /// The record is too short for lines this close together to be told apart.
    #[error(
        "a record of {got} samples is too short: {needed} or more tell lines {spacing} Hz apart from each other"
    )]
    TooShort {
        got: usize,
        needed: usize,
        spacing: f64,
    },
    /// A sample is no finite number.
    #[error("sample {0} of the record is no finite number")]
    NotFinite(usize),
    /// Nothing of the tone reaches the output.
    #[error("nothing of the tone is in the record")]
    NoTone,
}

impl Conditions {
    fn check(&self) -> Result<(), Unmeasurable> {
        let (low, high) = self.band;
        let top = self.rate / 2.0;
        if low >= 0.0 && low < high && high <= top {
            Ok(())
        } else {
            Err(Unmeasurable::Band { low, high, top })
        }
    }
}

fn check_finite(record: &[f64]) -> Result<(), Unmeasurable> {
    match record.iter().position(|x| !x.is_finite()) {
        Some(at) => Err(Unmeasurable::NotFinite(at)),
        None => Ok(()),
    }
}

/// 20 lg of an amplitude ratio.
pub fn decibels(ratio: f64) -> f64 {
    20.0 * ratio.log10()
}
