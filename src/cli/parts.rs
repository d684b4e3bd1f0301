//! `harklight parts` (being built)
use std::process::ExitCode;
/// Catalogue.
#[derive(clap::Args)]
pub struct Args {}
/// Runs.
pub fn run(_: &Args) -> Result<ExitCode, miette::Report> {
    Ok(ExitCode::SUCCESS)
}
