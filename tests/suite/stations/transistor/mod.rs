//! The transistor stage and the transistor modulator.

mod bench;
mod circuit;
mod golden;
mod harmonics;
mod modulator;
mod noise;
