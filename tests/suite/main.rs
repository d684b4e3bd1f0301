//! The outside checks, one binary: a module a topic.

mod bench;
mod design;
mod faces;
mod figure_methods;
mod golden_runs;
mod intermodulation;
mod noise_streams;
mod quantity;
mod resampling;
mod wav;
