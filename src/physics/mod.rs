//! Pure laws of light and circuits, each with its published source. Numbers in, numbers out: no files, no blocks, no state.

pub mod air;
pub mod bipolar;
pub mod constants;
pub mod diode;
pub mod fibre;
pub mod filter;
pub mod fluorescent;
pub mod led;
pub mod light_curve;
pub mod noise;
pub mod opamp;
pub mod photocell;
pub mod photodiode;
pub mod phototransistor;
pub mod pointing;
pub mod probability;
pub mod pulse_light;
pub mod room;
pub mod sound;
pub mod sunlight;
pub mod turbulence;
