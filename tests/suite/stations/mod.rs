//! Stations, each held against published values and closed forms.

mod lamps;
mod light_path;
mod moving_path;
