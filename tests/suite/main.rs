//! The outside checks, one binary: a module a topic.

mod design;
mod figure_methods;
mod intermodulation;
mod noise_streams;
mod quantity;
mod resampling;
mod stations;
mod wav;
