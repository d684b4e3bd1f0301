//! Signals as numbers in time: WAV files, sample rates, filters, noise streams, spectra and test tones.
//!
//! Nothing here knows of light or of circuits. Samples are f64, rates are in Hz.

pub mod edge;
pub mod implicit;
pub mod noise;
pub mod pole;
pub mod pole_pair;
pub mod resample;
pub mod spectrum;
pub mod tone;
pub mod wander;
pub mod wav;
