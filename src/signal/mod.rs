//! Signals as numbers in time: files, rates, filters, noises, spectra. Knows nothing of light and circuits.

pub mod implicit;
pub mod pole;
