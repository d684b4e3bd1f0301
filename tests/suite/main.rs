//! The outside checks, one binary: a module a topic.
mod design;
mod quantity;
