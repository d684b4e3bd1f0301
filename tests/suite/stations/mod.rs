//! Stations held against closed forms, reference libraries and independent integrations.

mod filters;
mod power_and_sound;
mod workbench;
