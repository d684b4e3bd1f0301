//! `harklight render`: a WAV through the link, and its figures.

use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::time::Duration;

use clap::ValueEnum;
use indicatif::{ProgressBar, ProgressStyle};
use miette::miette;

use super::outputs::{FiguresFile, refuse_overwriting};
use super::{DesignArgs, Failure, conclude, seed};
use crate::design::Design;
use crate::link::Link;
use crate::quantity::{self, Dimension};
use crate::render::programme::{Job, STEMS, render, stem_path};
use crate::signal::wav::SampleFormat;

/// Run a WAV through a design and write what the receiver puts out
#[derive(clap::Args)]
pub struct Args {
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
    #[command(flatten)]
    design: DesignArgs,
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
    let drive = level(&args.drive)?;
    let oversample = oversample(&args.oversample)?;
    let design = Design::load(&args.design.design, &args.design.sets)?;
    check_files(args, &design)?;
    let figures = args.figures.as_deref().map(FiguresFile::create);
    let figures = figures.transpose()?;
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
        figures,
        to_terminal,
    )
}

/// The level that `--drive` names, dB.
fn level(text: &str) -> Result<f64, Failure> {
    const HELP: &str = "a level in decibels from -200 to 200, for example -6";
    let level = quantity::parse(text, Dimension::Decibel)
        .map_err(|e| miette!(help = HELP, "--drive `{text}`: {e}"))?;
    if level.abs() <= 200.0 {
        Ok(level)
    } else {
        Err(miette!(help = HELP, "--drive `{text}` is out of range").into())
    }
}

/// The factor that `--oversample` names; none for `auto`.
fn oversample(text: &str) -> Result<Option<u32>, Failure> {
    if text == "auto" {
        return Ok(None);
    }
    let factor = text.parse().ok();
    factor
        .filter(|n| [1, 2, 4, 8, 16, 32].contains(n))
        .map(Some)
        .ok_or_else(|| {
            miette!("--oversample takes 1, 2, 4, 8, 16, 32 or auto, not `{text}`").into()
        })
}

/// Refuses to write over anything that is read.
fn check_files(args: &Args, design: &Design) -> Result<(), Failure> {
    let folder = args.design.design.parent().unwrap_or(Path::new(""));
    let parts = design.value_at("parts").ok();
    let catalogue = parts
        .and_then(|found| found.section.optional_word("parts"))
        .map(|name| folder.join(name));
    let mut inputs = vec![
        ("the input", args.input.as_path()),
        ("the design file", args.design.design.as_path()),
    ];
    inputs.extend(catalogue.as_deref().map(|c| ("the design's catalogue", c)));
    let stems: Vec<PathBuf> = STEMS
        .iter()
        .filter(|_| args.stems)
        .map(|s| stem_path(&args.output, s))
        .collect();
    let mut outputs = vec![("--output", args.output.as_path())];
    outputs.extend(stems.iter().map(|s| ("the stem", s.as_path())));
    outputs.extend(args.figures.as_deref().map(|f| ("--figures", f)));
    refuse_overwriting(&outputs, &inputs)
}

/// A bar on standard error, or nothing where that is no terminal.
fn progress_bar() -> ProgressBar {
    let bar = ProgressBar::new(0);
    if let Ok(style) = ProgressStyle::with_template("{wide_bar} {percent} %  {eta}") {
        bar.set_style(style);
    }
    bar
}
