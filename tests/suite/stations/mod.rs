//! Stations against things outside the project, and their two faces against each other.

mod bench;
mod filters;
mod lamps;
mod light_path;
mod moving_path;
mod photocell;
mod phototransistor;
mod power_and_sound;
mod servo;
mod transistor;
mod workbench;
