//! The outside checks, one binary: a module a topic.

mod bench;
mod closed_forms;
mod commands;
mod design;
mod faces;
mod figure_methods;
mod golden_runs;
mod intermodulation;
mod link_figures;
mod noise_streams;
mod properties;
mod quantity;
mod randomness;
mod resampling;
mod stations;
mod wav;
