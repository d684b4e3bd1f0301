//! Every command through the program itself: the files, the texts and the exit codes as a user or a script meets them.
//!
//! Inputs are written and outputs read back with `hound`, an independent library.

mod bad_designs;
mod bad_files;
mod catalogue;
mod contract;
mod demo_clips;
mod demo_designs;
mod hard_designs;
mod options;
mod rendering;
mod stems;
mod streams;

use std::collections::BTreeMap;
use std::f64::consts::TAU;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use hound::{SampleFormat, WavReader, WavSpec, WavWriter};
use tempfile::TempDir;

/// A link without noise, curves, memory or loss: a straight wire of light, whose output is its input.
///
/// Its output's full scale is the volts that 1 V at the source gives: a sink of 10 mA/V; an LED of 0.5 W/A; a Lambertian source of
/// 60° half angle, whose axial intensity is flux/π; 1 cm² at 1 m; 0.5 A/W into 1 MΩ: 10e-3·0.5/π·1e-4·0.5·1e6 = 1/(4π) V.
pub const STRAIGHT: &str = r#"
format = 1
title = "A straight wire of light"
silence = ["transmitter.driver.sense", "receiver.detector.shot", "receiver.front_end.load"]

[source]
full_scale = "1 V"
resistance = "0 Ω"

[transmitter.driver]
kind = "current-sink"
supply = "100 V"
bias = "1 A"
slope = "10 mA/V"
sense = "0 Ω"
saturation = "0 V"

[transmitter.emitter]
wavelength = "940 nm"
linewidth = "0 nm"
flux = "500 mW"
at_current = "1 A"
low_current = "0 A"
droop_current = "inf"
saturation_current = "1 pA"
ideality = 1
series_resistance = "0 Ω"
half_angle = "60°"
bandwidth = "inf"
thermal_resistance = "0 K/W"
thermal_time = "0 s"
flux_temperature = "0 %/K"
max_current = "inf"

[path]
kind = "air"
distance = "1 m"

[receiver.detector]
kind = "photodiode"
area = "1 cm²"
responsivity = "0.5 A/W"
dark_current = "0 A"
capacitance = "0 F"
built_in = "0.6 V"
grading = 0.5
saturation_current = "1e-30 A"
ideality = 1

[receiver.front_end]
kind = "load"
supply = "1 kV"
load = "1 MΩ"

[output]
kind = "line"
full_scale = "79.577471545947668 mV"
"#;

/// A folder of its own for one test, with the straight design in it.
pub struct Folder(TempDir);

/// What a run of the program left.
pub struct Done {
    pub code: Option<i32>,
    pub out: Vec<u8>,
    pub err: String,
}

impl From<Output> for Done {
    fn from(output: Output) -> Self {
        Self {
            code: output.status.code(),
            out: output.stdout,
            err: String::from_utf8(output.stderr).expect("messages are text"),
        }
    }
}

impl Done {
    /// Standard output as text.
    pub fn text(&self) -> &str {
        std::str::from_utf8(&self.out).expect("standard output is text")
    }

    /// Standard output as one JSON document.
    pub fn json(&self) -> serde_json::Value {
        serde_json::from_slice(&self.out).expect("standard output is one JSON document")
    }

    /// Asserts the exit code, with the messages beside it.
    #[track_caller]
    pub fn expect(self, code: i32) -> Self {
        assert_eq!(self.code, Some(code), "standard error:\n{}", self.err);
        self
    }
}

impl Folder {
    pub fn new() -> Self {
        let folder = Self(tempfile::tempdir().expect("a temporary folder"));
        folder.write("straight.toml", STRAIGHT);
        folder
    }

    pub fn path(&self, name: &str) -> PathBuf {
        self.0.path().join(name)
    }

    pub fn write(&self, name: &str, content: impl AsRef<[u8]>) {
        fs::write(self.path(name), content).expect("a file in the temporary folder");
    }

    pub fn bytes(&self, name: &str) -> Vec<u8> {
        fs::read(self.path(name)).unwrap_or_else(|e| panic!("{name}: {e}"))
    }

    /// The program, to be run inside this folder.
    pub fn command(&self, args: &[&str]) -> Command {
        let mut command = Command::new(env!("CARGO_BIN_EXE_harklight"));
        command.current_dir(self.0.path()).args(args);
        command
    }

    /// Runs the program inside this folder.
    pub fn run(&self, args: &[&str]) -> Done {
        self.command(args)
            .output()
            .expect("the program starts")
            .into()
    }

    /// `render straight.toml --input sent.wav --output received.wav` and `more`.
    pub fn render(&self, more: &[&str]) -> Done {
        let mut args = vec!["render", "straight.toml"];
        args.extend(["--input", "sent.wav", "--output", "received.wav"]);
        args.extend(more);
        self.run(&args)
    }

    /// Every file below this folder with its content.
    pub fn content(&self) -> BTreeMap<PathBuf, Vec<u8>> {
        fn walk(folder: &Path, all: &mut BTreeMap<PathBuf, Vec<u8>>) {
            for entry in fs::read_dir(folder).expect("a folder") {
                let path = entry.expect("an entry").path();
                if path.is_dir() {
                    walk(&path, all);
                } else {
                    let bytes = fs::read(&path).unwrap_or_default();
                    all.insert(path, bytes);
                }
            }
        }
        let mut all = BTreeMap::new();
        walk(self.0.path(), &mut all);
        all
    }

    /// Runs the program and asserts that it refuses: the exit code, nothing on standard output, one error that holds every one of
    /// `words`, no panic, and no file made, changed or left behind.
    #[track_caller]
    pub fn refuses(&self, code: i32, args: &[&str], words: &[&str]) -> Done {
        let before = self.content();
        let done = self.run(args).expect(code);
        assert!(done.out.is_empty(), "on standard output: {}", done.text());
        for word in words {
            // Messages are wrapped to the terminal's width: compare without the breaks.
            assert!(
                plain(&done.err).contains(&plain(word)),
                "`{word}` is missing in:\n{}",
                done.err
            );
        }
        assert_eq!(errors(&done.err), 1, "one error in:\n{}", done.err);
        assert!(!done.err.contains("panicked"), "{}", done.err);
        assert!(self.content() == before, "a file was made or changed");
        done
    }

    /// Writes `sent.wav`: 32-bit float, mono.
    pub fn sent(&self, rate: u32, samples: &[f64]) {
        let spec = WavSpec {
            channels: 1,
            sample_rate: rate,
            bits_per_sample: 32,
            sample_format: SampleFormat::Float,
        };
        write_wav(&self.path("sent.wav"), spec, samples);
    }
}

/// A text without the breaks, rulers and bars of a message.
fn plain(text: &str) -> String {
    let kept: String = text
        .chars()
        .map(|c| {
            if "│|·╰─▶╭".contains(c) {
                ' '
            } else {
                c
            }
        })
        .collect();
    kept.split_whitespace().collect::<Vec<_>>().join(" ")
}

/// Error messages in a text: each opens with its sign, or, from the argument parser, with its word.
fn errors(text: &str) -> usize {
    text.lines()
        .map(str::trim_start)
        .filter(|l| l.starts_with("× ") || l.starts_with("x ") || l.starts_with("error: "))
        .count()
}

/// Writes interleaved samples (full scale 1) as `spec` says.
pub fn write_wav(path: &Path, spec: WavSpec, samples: &[f64]) {
    let mut writer = WavWriter::create(path, spec).expect("a WAV to write");
    for &x in samples {
        if spec.sample_format == SampleFormat::Float {
            writer.write_sample(x as f32).expect("a sample");
        } else {
            let full = 2f64.powi(i32::from(spec.bits_per_sample) - 1);
            let code = (x * full).round().clamp(-full, full - 1.0) as i32;
            writer.write_sample(code).expect("a sample");
        }
    }
    writer.finalize().expect("a whole WAV");
}

/// A WAV's header and its interleaved samples, full scale 1.
pub fn read_wav(path: &Path) -> (WavSpec, Vec<f64>) {
    let mut reader = WavReader::open(path).unwrap_or_else(|e| panic!("{}: {e}", path.display()));
    let spec = reader.spec();
    let samples = if spec.sample_format == SampleFormat::Float {
        let all = reader.samples::<f32>();
        all.map(|x| f64::from(x.expect("a sample"))).collect()
    } else {
        let full = 2f64.powi(i32::from(spec.bits_per_sample) - 1);
        let all = reader.samples::<i32>();
        all.map(|x| f64::from(x.expect("a sample")) / full)
            .collect()
    };
    (spec, samples)
}

/// `count` samples of a sine of `peak`.
pub fn tone(rate: u32, frequency: f64, peak: f64, count: usize) -> Vec<f64> {
    let turn = TAU * frequency / f64::from(rate);
    (0..count).map(|n| peak * (turn * n as f64).sin()).collect()
}

/// A sine under a raised-cosine envelope: nothing of it lies beyond the pass band.
pub fn burst(rate: u32, frequency: f64, peak: f64, count: usize) -> Vec<f64> {
    let envelope = |n: usize| 0.5 - 0.5 * (TAU * n as f64 / (count - 1) as f64).cos();
    let tone = tone(rate, frequency, peak, count);
    tone.iter()
        .enumerate()
        .map(|(n, x)| x * envelope(n))
        .collect()
}

/// Largest difference of two equally long runs of samples.
#[track_caller]
pub fn largest_difference(a: &[f64], b: &[f64]) -> f64 {
    assert_eq!(a.len(), b.len());
    a.iter()
        .zip(b)
        .map(|(a, b)| (a - b).abs())
        .fold(0.0, f64::max)
}

/// A design of `configs/`.
pub fn config(name: &str) -> String {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("configs")
        .join(name);
    path.to_str().expect("a path of text").to_owned()
}
