//! The outside checks, one binary: a module a topic.

mod figure_methods;
mod intermodulation;
mod noise_streams;
mod resampling;
mod wav;
mod design;
