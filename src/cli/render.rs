//! `harklight render`: a WAV through the link, and its figures.

use std::path::PathBuf;
use std::process::ExitCode;
use std::time::Duration;

use clap::ValueEnum;
use indicatif::{ProgressBar, ProgressStyle};
use miette::miette;

use super::{DesignArgs, Failure, conclude, seed};
use crate::design::Design;
use crate::link::Link;
use crate::render::programme::{Job, render};
use crate::signal::wav::SampleFormat;

/// Run a WAV through a design and write what the receiver puts out
#[derive(clap::Args)]
pub struct Args {
    #[command(flatten)]
    design: DesignArgs,
    /// The WAV that is sent; - is standard input
    #[arg(long, value_name = "WAV")]
    input: PathBuf,
    /// The WAV to write; - is standard output
    #[arg(long, value_name = "WAV")]
    output: PathBuf,
    /// Also write the figures to this JSON file
    #[arg(long, value_name = "JSON")]
    figures: Option<PathBuf>,
    /// Also write what only the noise added, what only the distortion added, and the clean link
    #[arg(long)]
    stems: bool,
    /// Sample format of the output (default: the input's; with --stems 32f)
    #[arg(long)]
    bits: Option<Bits>,
    /// Change of level at the source, dB
    #[arg(
        long,
        value_name = "DB",
        default_value = "0",
        allow_hyphen_values = true
    )]
    drive: String,
    /// Samples of the link for each of the file: 1, 2, 4, 8, 16, 32 or auto
    #[arg(long, value_name = "N", default_value = "auto")]
    oversample: String,
    /// Start with discharged capacitors and a cold LED
    #[arg(long)]
    cold: bool,
    /// Mix a stereo input to one channel
    #[arg(long)]
    mono: bool,
}

#[derive(Clone, Copy, ValueEnum)]
enum Bits {
    #[value(name = "16")]
    Sixteen,
    #[value(name = "24")]
    TwentyFour,
    #[value(name = "32f")]
    Float,
}

/// Work that takes longer than this shows its progress.
const PATIENCE: Duration = Duration::from_millis(800);

/// Runs the command.
pub fn run(args: &Args) -> Result<ExitCode, Failure> {
    let to_terminal = args.output.as_os_str() == "-";
    if to_terminal && args.design.json {
        return Err(miette!(
            help = "write the audio to a file, or the figures with --figures FILE",
            "standard output cannot carry the audio and --json at once"
        )
        .into());
    }
    let drive = crate::quantity::parse(&args.drive, crate::quantity::Dimension::Decibel)
        .ok()
        .filter(|db| db.is_finite() && db.abs() <= 200.0)
        .ok_or_else(|| {
            miette!(
                help = "a level in decibels from -200 to 200, as -6",
                "--drive {} is no such level",
                args.drive
            )
        })?;
    let oversample = match args.oversample.as_str() {
        "auto" => None,
        text => Some(
            text.parse()
                .ok()
                .filter(|n| [1, 2, 4, 8, 16, 32].contains(n))
                .ok_or_else(|| {
                    miette!(
                        help = "1, 2, 4, 8, 16, 32 or auto",
                        "--oversample {text} is no such number"
                    )
                })?,
        ),
    };
    let design = Design::load(&args.design.design, &args.design.sets)?;
    let link = Link::new(&design)?;
    let job = Job {
        input: args.input.clone(),
        output: args.output.clone(),
        format: args.bits.map(|b| match b {
            Bits::Sixteen => SampleFormat::Int16,
            Bits::TwentyFour => SampleFormat::Int24,
            Bits::Float => SampleFormat::Float32,
        }),
        mono: args.mono,
        stems: args.stems,
        drive,
        oversample,
        cold: args.cold,
        seed: seed(&args.design, &design),
    };
    let bar = progress_bar();
    let outcome = render(&link, &job, |done, total| {
        if bar.length() != Some(total) {
            bar.set_length(total);
        }
        if bar.elapsed() > PATIENCE {
            bar.set_position(done);
        }
    });
    bar.finish_and_clear();
    conclude(
        &args.design,
        &design,
        &link,
        Some(&outcome?),
        args.figures.as_deref(),
        to_terminal,
    )
}

/// A bar on standard error, or nothing where that is no terminal.
fn progress_bar() -> ProgressBar {
    let bar = ProgressBar::new(0);
    if let Ok(style) = ProgressStyle::with_template("{wide_bar} {percent} %  {eta}") {
        bar.set_style(style);
    }
    bar
}
