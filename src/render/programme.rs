//! The main job: a WAV through the link to the received WAV, streaming.

use std::path::{Path, PathBuf};

use miette::Diagnostic;
use rayon::prelude::*;
use thiserror::Error;

use super::lane::{Lane, Run};
use crate::figures::programme::{LevelMeter, ResidualMeter};
use crate::link::{Link, StationEvents};
use crate::signal::resample::RatioError;
use crate::signal::wav::{SampleFormat, WavError, WavReader, WavSpec, WavWriter};
use crate::whole_file::same_file;

/// What to render, and how.
#[derive(Debug, Clone)]
pub struct Job {
    /// `-` is standard input.
    pub input: PathBuf,
    /// `-` is standard output.
    pub output: PathBuf,
    /// Sample format of what is written; the input's where none is asked for.
    pub format: Option<SampleFormat>,
    /// Mix the channels to one.
    pub mono: bool,
    /// Also write what only the noise and only the distortion added, and the clean link.
    pub stems: bool,
    /// Change of level at the source, dB.
    pub drive: f64,
    /// Samples of the link for each of the file; chosen where none is asked for.
    pub oversample: Option<u32>,
    pub cold: bool,
    pub seed: u64,
}

/// Why a render ended early.
#[derive(Debug, Error, Diagnostic)]
pub enum RenderError {
    #[error(transparent)]
    #[diagnostic(transparent)]
    Wav(#[from] WavError),
    #[error(transparent)]
    Ratio(#[from] RatioError),
    #[error("the output `{}` is the input", .0.display())]
    #[diagnostic(help("an input is never overwritten: give another --output"))]
    SameFile(PathBuf),
    #[error("stems cannot be written to standard output")]
    #[diagnostic(help("they are files beside the output: give --output a file name"))]
    StemsToStandardOutput,
}

impl RenderError {
    /// Whether the machine failed, not the input.
    pub fn is_machine_fault(&self) -> bool {
        matches!(self, Self::Wav(e) if e.is_machine_fault())
    }
}

/// One channel of the rendered programme.
#[derive(Debug, Clone)]
pub struct ChannelOutcome {
    pub sent: LevelMeter,
    pub received: LevelMeter,
    /// Clean programme over what the noise added; where stems were made.
    pub noise: Option<ResidualMeter>,
    /// Clean programme over what the distortion added; where stems were made.
    pub distortion: Option<ResidualMeter>,
    pub events: Vec<StationEvents>,
}

/// What came of a render.
#[derive(Debug)]
pub struct Outcome {
    pub spec: WavSpec,
    pub frames: u64,
    /// Change of level at the source, dB; what is said of the sent programme is without it.
    pub drive: f64,
    pub cold: bool,
    pub oversample: u32,
    /// Rate that the stations saw, Hz.
    pub link_rate: f64,
    pub channels: Vec<ChannelOutcome>,
    /// The files written.
    pub files: Vec<PathBuf>,
}

/// Frames of the file that are taken at a time.
const BLOCK: usize = 4096;
/// Rate that `auto` brings the link to at least, Hz: harmonics up to the tenth of 20 kHz then fold above the band.
const AUTO_RATE: u32 = 320_000;

/// The factor that `auto` chooses for a file's `rate`: 8 up to 48 kHz, 4 up to 96 kHz, 2 above.
pub fn auto_oversample(rate: u32) -> u32 {
    [2, 4]
        .into_iter()
        .find(|n| rate * n >= AUTO_RATE)
        .unwrap_or(8)
}

/// The stems, in the order they are written.
pub const STEMS: [&str; 3] = ["clean", "noise", "distortion"];

/// Path of the stem `name` beside `output`: received.wav → received.noise.wav.
pub fn stem_path(output: &Path, name: &str) -> PathBuf {
    let extension = output
        .extension()
        .map_or("wav".into(), |e| e.to_string_lossy().into_owned());
    output.with_extension(format!("{name}.{extension}"))
}

/// Renders `job` through `link`; `progress` hears of frames done and to do.
///
/// The received file has the input's length and lines up with it to the sample. Outputs appear when all is done, or not at all.
pub fn render(
    link: &Link,
    job: &Job,
    mut progress: impl FnMut(u64, u64),
) -> Result<Outcome, RenderError> {
    let to_terminal = job.output.as_os_str() == "-";
    if job.stems && to_terminal {
        return Err(RenderError::StemsToStandardOutput);
    }
    let mut reader = WavReader::open(&job.input)?;
    let from = reader.spec();
    let channels = if job.mono { 1 } else { from.channels };
    let format = job.format.unwrap_or(if job.stems {
        SampleFormat::Float32
    } else {
        from.format
    });
    let spec = WavSpec {
        rate: from.rate,
        channels,
        format,
    };
    let mut paths = vec![job.output.clone()];
    if job.stems {
        paths.extend(STEMS.map(|s| stem_path(&job.output, s)));
    }
    if let Some(path) = paths
        .iter()
        .find(|p| p.as_os_str() != "-" && same_file(&job.input, p))
    {
        return Err(RenderError::SameFile(path.clone()));
    }
    let mut writers = paths
        .iter()
        .enumerate()
        .map(|(n, path)| WavWriter::create(path, spec, job.seed.wrapping_add(n as u64)))
        .collect::<Result<Vec<_>, _>>()?;

    let factor = job.oversample.unwrap_or_else(|| auto_oversample(from.rate));
    let mut lanes = (0..usize::from(channels))
        .map(|channel| Lane::new(link, job, from.rate, factor, channel))
        .collect::<Result<Vec<_>, _>>()?;
    let gain = 10f64.powf(job.drive / 20.0);
    let mut input = vec![Vec::new(); usize::from(from.channels)];
    let (mut done, total) = (0, reader.frames());
    loop {
        let frames = reader.read(&mut input, BLOCK)?;
        if job.mono && input.len() > 1 {
            let (first, others) = input.split_at_mut(1);
            for other in others.iter() {
                first[0].iter_mut().zip(other).for_each(|(a, b)| *a += b);
            }
            let share = 1.0 / (others.len() + 1) as f64;
            first[0].iter_mut().for_each(|x| *x *= share);
        }
        let last = frames == 0;
        lanes
            .par_iter_mut()
            .zip(&mut input)
            .for_each(|(lane, sent)| {
                lane.sent.add(sent);
                sent.iter_mut().for_each(|x| *x *= gain);
                lane.feed(sent, last);
            });
        write_ready(&mut lanes, &mut writers)?;
        done += frames as u64;
        progress(done, total);
        if last {
            break;
        }
    }
    for writer in writers {
        writer.finish()?;
    }
    Ok(Outcome {
        spec,
        frames: done,
        drive: job.drive,
        cold: job.cold,
        oversample: factor,
        link_rate: f64::from(from.rate) * f64::from(factor),
        channels: lanes.into_iter().map(Lane::outcome).collect(),
        files: paths,
    })
}

/// Writes what every run of every channel has ready, and measures it.
fn write_ready(lanes: &mut [Lane], writers: &mut [WavWriter]) -> Result<(), RenderError> {
    let ready = lanes
        .iter()
        .flat_map(|l| &l.runs)
        .map(Run::waiting)
        .min()
        .unwrap_or(0);
    let mut tracks: Vec<Vec<Vec<f64>>> = vec![Vec::new(); writers.len()];
    for lane in lanes.iter_mut() {
        let mut parts: Vec<Vec<f64>> = lane.runs.iter_mut().map(|r| r.take(ready)).collect();
        lane.received.add(&parts[0]);
        if let [full, noiseless, clean] = &mut parts[..] {
            let noise: Vec<f64> = full
                .iter()
                .zip(noiseless.iter())
                .map(|(a, b)| a - b)
                .collect();
            let distortion: Vec<f64> = noiseless
                .iter()
                .zip(clean.iter())
                .map(|(a, b)| a - b)
                .collect();
            lane.noise.add(clean, &noise);
            lane.distortion.add(clean, &distortion);
            parts = vec![
                std::mem::take(full),
                std::mem::take(clean),
                noise,
                distortion,
            ];
        }
        for (track, part) in tracks.iter_mut().zip(parts) {
            track.push(part);
        }
    }
    for (writer, track) in writers.iter_mut().zip(&tracks) {
        let views: Vec<&[f64]> = track.iter().map(Vec::as_slice).collect();
        writer.write(&views)?;
    }
    Ok(())
}
