//! The commands. Exit codes: 0 done, 1 a `[require]` limit is not met, 2 wrong input or arguments, 3 the machine failed.

pub mod measure;
pub mod new;
mod outputs;
pub mod parts;
mod reference;
pub mod render;

use std::process::ExitCode;

use clap::{Args, Parser, Subcommand};
use textwrap::WordSplitter;

use outputs::{FiguresFile, print, say};

use crate::design::{Design, DesignError};
use crate::link::{Link, StationEvents, budget};
use crate::quantity::Dimension;
use crate::render::programme::{Outcome, RenderError};
use crate::render::test_signals::{Bench, measure};
use crate::report::{Findings, json, terminal};
use crate::study::requirements::judge;

/// Runs real audio through the paper design of an analogue audio link carried by light.
#[derive(Parser)]
#[command(name = "harklight", version, max_term_width = 100)]
struct Cli {
    #[command(subcommand)]
    command: Command,
}

#[derive(Subcommand)]
enum Command {
    Render(render::Args),
    Measure(measure::Args),
    Parts(parts::Args),
    New(new::Args),
}

/// How every command names a design.
#[derive(Args, Debug)]
pub struct DesignArgs {
    /// The design file (TOML)
    design: std::path::PathBuf,
    /// Change a value of the design: a dotted path and what it shall be, as receiver.stage.2.feedback=100k
    #[arg(long = "set", value_name = "PATH=VALUE")]
    sets: Vec<String>,
    /// Seed of all noises (default: the design's, else 1)
    #[arg(long, value_name = "N", allow_negative_numbers = true)]
    seed: Option<u64>,
    /// Print the whole result as one JSON document
    #[arg(long)]
    json: bool,
}

/// A command's failure, with the exit code that it means.
pub enum Failure {
    Input(miette::Report),
    Machine(miette::Report),
}

impl From<DesignError> for Failure {
    fn from(e: DesignError) -> Self {
        Self::Input(e.into())
    }
}

impl From<miette::Report> for Failure {
    fn from(e: miette::Report) -> Self {
        Self::Input(e)
    }
}

impl From<RenderError> for Failure {
    fn from(e: RenderError) -> Self {
        if e.is_machine_fault() {
            Self::Machine(e.into())
        } else {
            Self::Input(e.into())
        }
    }
}

/// Errors as they are shown: names of parts are not broken at their hyphens.
fn show_errors_whole() {
    // It fails only where a hook is set already, which then shows them.
    let _ = miette::set_hook(Box::new(|_| {
        let options = miette::MietteHandlerOpts::new();
        Box::new(options.word_splitter(WordSplitter::NoHyphenation).build())
    }));
}

/// Runs the command line of this process.
pub fn main() -> ExitCode {
    show_errors_whole();
    let cli = match Cli::try_parse() {
        Ok(cli) => cli,
        Err(e) => {
            // clap's own text: usage errors are exit code 2, help and version 0.
            let _ = e.print();
            return ExitCode::from(if e.use_stderr() { 2 } else { 0 });
        }
    };
    let done = match &cli.command {
        Command::Render(args) => render::run(args),
        Command::Measure(args) => measure::run(args),
        Command::Parts(args) => parts::run(args).map_err(Failure::from),
        Command::New(args) => new::run(args).map_err(Failure::from),
    };
    match done {
        Ok(code) => code,
        Err(Failure::Input(report)) => {
            say(&format!("{report:?}\n"));
            ExitCode::from(2)
        }
        Err(Failure::Machine(report)) => {
            say(&format!("{report:?}\n"));
            ExitCode::from(3)
        }
    }
}

/// Measures the link, says what was found, and judges the limits.
///
/// The text goes to standard output, or to standard error where that carries audio; `figures` takes the JSON document.
fn conclude(
    args: &DesignArgs,
    design: &Design,
    link: &Link,
    programme: Option<&Outcome>,
    figures: Option<FiguresFile>,
    audio_on_stdout: bool,
) -> Result<ExitCode, Failure> {
    let seed = seed(args, design);
    let bench = Bench::of(design);
    let mut measured = measure(link, &bench, seed);
    if let Some(p) = programme {
        measured.figures.clipped_samples =
            Some(p.channels.iter().map(|c| c.received.clipped()).sum());
    } else {
        measured
            .figures
            .explain("clipped_samples", "no programme was rendered");
    }
    let budget = budget(link, bench.band);
    let lamps = link.lamps().iter().any(|l| l.hums());
    let verdicts = judge(design, &measured.figures, lamps);
    let mut warnings = link.warnings();
    warnings.extend(overdriven(link, programme, &measured.events));
    let findings = Findings {
        design,
        link,
        bench,
        seed,
        measured: &measured,
        budget: &budget,
        verdicts: &verdicts,
        warnings: &warnings,
        programme,
    };
    for warning in &warnings {
        say(&format!("warning: {warning}\n"));
    }
    if figures.is_some() || args.json {
        let mut document =
            serde_json::to_string_pretty(&json::document(&findings)).unwrap_or_default();
        document.push('\n');
        if let Some(file) = figures {
            file.finish(&document)?;
        }
        if args.json {
            print(&document)?;
        }
    }
    if !args.json {
        let text = terminal::text(&findings);
        if audio_on_stdout {
            say(&text);
        } else {
            print(&text)?;
        }
    }
    Ok(ExitCode::from(u8::from(verdicts.iter().any(|v| !v.met))))
}

/// The warnings of an emitter that carried more than it may, or than its curve was measured to.
fn overdriven(link: &Link, programme: Option<&Outcome>, test: &[StationEvents]) -> Vec<String> {
    let rendered = programme
        .iter()
        .flat_map(|p| p.channels.iter().flat_map(|c| &c.events));
    let peak = rendered
        .chain(test)
        .filter_map(|e| e.events.peak)
        .fold(0.0, f64::max);
    [
        ("above the maximum of", Some(link.max_current())),
        ("beyond its curve, which ends at", link.measured_to()),
    ]
    .into_iter()
    .filter_map(|(what, limit)| {
        limit
            .filter(|&limit| peak > limit)
            .map(|limit| (what, limit))
    })
    .map(|(what, limit)| {
        let show = |current| Dimension::Ampere.show(current);
        format!(
            "transmitter.emitter: its current reached {}, {what} {}",
            show(peak),
            show(limit)
        )
    })
    .collect()
}

fn seed(args: &DesignArgs, design: &Design) -> u64 {
    args.seed.or(design.seed).unwrap_or(1)
}
