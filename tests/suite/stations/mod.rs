//! Checks of single stations against things outside the project.

mod servo;
