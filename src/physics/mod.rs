//! Pure laws of light and circuits, each with its published source. Numbers in, numbers out: no files, no blocks, no state.

pub mod air;
pub mod constants;
pub mod diode;
pub mod led;
pub mod light_curve;
pub mod noise;
pub mod opamp;
pub mod photodiode;
pub mod sunlight;
