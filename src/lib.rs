//! Harklight runs real audio through the paper design of an analogue audio link carried by light.
//!
//! The modules are floors: each imports only from those listed below it.
//! `cli` > `report` > `study` > `render` > `figures` > `link` > `station` > `design` > `signal`, `physics` > `quantity`, `whole_file`.

pub mod cli;
pub mod design;
pub mod figures;
pub mod link;
pub mod physics;
pub mod quantity;
pub mod render;
pub mod report;
pub mod signal;
pub mod station;
pub mod study;
pub mod whole_file;
