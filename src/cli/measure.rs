//! `harklight measure`: the figures from test signals.

use std::process::ExitCode;

use super::{DesignArgs, Failure, conclude};
use crate::design::Design;
use crate::link::Link;

/// Measure a design with test signals
#[derive(clap::Args)]
pub struct Args {
    #[command(flatten)]
    design: DesignArgs,
}

/// Runs the command.
pub fn run(args: &Args) -> Result<ExitCode, Failure> {
    let design = Design::load(&args.design.design, &args.design.sets)?;
    let link = Link::new(&design)?;
    conclude(&args.design, &design, &link, None, None, false)
}
