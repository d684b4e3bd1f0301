//! Signals as such: WAV files, change of sample rate, noise streams, spectra and test tones.
//!
//! Nothing here knows of light or of circuits. Samples are f64, rates are in Hz.

pub mod noise;
pub mod resample;
pub mod spectrum;
pub mod tone;
pub mod wav;
