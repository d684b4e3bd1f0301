//! Stations against things outside the project.

mod transistor;
