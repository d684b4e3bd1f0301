//! Stations against things outside the project, and their two faces against each other.

mod bench;
mod photocell;
mod phototransistor;
