//! The commands. Exit codes: 0 done, 1 a `[require]` limit is not met, 2 wrong input or arguments, 3 the machine failed.

pub mod new;
pub mod parts;
mod reference;

/// Runs the command line of this process.
pub fn main() -> std::process::ExitCode {
    std::process::ExitCode::SUCCESS
}
