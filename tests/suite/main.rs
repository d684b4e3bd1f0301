//! The outside checks, one binary: a module a topic.

mod resampling;
mod wav;
mod design;
