//! A quiet link around a stage or an output, and readings of it.

use std::f64::consts::TAU;
use std::path::Path;

use harklight::design::{Design, DesignError};
use harklight::link::Link;
use harklight::station::{Conditions, Curves, Model};
use num_complex::Complex64;

pub use crate::bench::reading;

pub const RATE: f64 = 384e3;

/// An op-amp without limits and without noise, as keys of a section.
pub const IDEAL: &str =
    "gbw = \"inf\"\nslew = \"inf\"\nswing_low = 0\nswing_high = 0\noutput_current = \"inf\"\n";

/// A line output, as a section.
pub const LINE: &str = "[output]\nkind = \"line\"\nfull_scale = \"1 V\"\n";

/// The text of a design: stages before the driver, stages after the front end, the output's section.
pub fn text(before: &str, after: &str, output: &str) -> String {
    format!(
        r#"temperature = "300 K"
[source]
full_scale = "1 V"
resistance = "10 kΩ"
{before}
[transmitter.driver]
kind = "current-sink"
supply = "1 kV"
bias = "10 mA"
slope = "1 mA/V"
sense = 0
saturation = 0
[transmitter.emitter]
part = "ir-led-narrow"
[path]
kind = "air"
distance = "1 m"
[receiver.optics]
aperture = "20 mm"
[receiver.detector]
kind = "photodiode"
part = "pin-7mm2"
[receiver.front_end]
kind = "transimpedance"
supply = ["-9 V", "9 V"]
bias = "5 V"
feedback = "100 kΩ"
feedback_capacitor = "2 pF"
{IDEAL}
{after}
{output}"#
    )
}

/// What such a design is, or what is wrong with it.
pub fn try_link(before: &str, after: &str, output: &str) -> Result<Link, DesignError> {
    let text = text(before, after, output);
    Link::new(&Design::from_text(
        "bench.toml",
        &text,
        Path::new("."),
        &[],
    )?)
}

pub fn link(before: &str, after: &str, output: &str) -> Link {
    try_link(before, after, output).unwrap_or_else(|e| panic!("{:?}", miette::Report::new(e)))
}

/// A stage of `kind` before the driver, named "it".
pub fn stage(kind: &str, keys: &str) -> String {
    format!("[[transmitter.stage]]\nname = \"it\"\nkind = \"{kind}\"\n{keys}\n")
}

/// The station at `path`.
pub fn at<'a>(link: &'a Link, path: &str) -> &'a dyn Model {
    let found = link.stations().iter().find(|s| s.path() == path);
    found
        .unwrap_or_else(|| panic!("nothing at {path}"))
        .as_ref()
}

/// The stage of [`stage`].
pub fn it(link: &Link) -> &dyn Model {
    at(link, "transmitter.stage.it")
}

/// A run with nothing random.
pub fn quiet(curves: Curves) -> Conditions {
    Conditions {
        curves,
        ..crate::bench::quiet(RATE)
    }
}

/// What a fresh runner makes of `input`.
pub fn run(model: &dyn Model, conditions: &Conditions, input: &[f64]) -> Vec<f64> {
    let mut block = input.to_vec();
    let mut runner = model.runner(conditions);
    block.chunks_mut(500).for_each(|b| runner.run(b, &[]));
    block
}

/// The response in time at whole multiples of 50 Hz, after `settling` seconds: sines of `peak` together.
pub fn responses(
    model: &dyn Model,
    frequencies: &[f64],
    peak: f64,
    settling: f64,
) -> Vec<Complex64> {
    let period = (RATE / 50.0) as usize;
    let samples = period * (settling * 50.0).ceil() as usize + period;
    let wave = |f: f64, n: usize| TAU * (f * n as f64 / RATE).fract();
    let input: Vec<f64> = (0..samples)
        .map(|n| frequencies.iter().map(|f| peak * wave(*f, n).sin()).sum())
        .collect();
    let output = run(model, &quiet(Curves::Bent), &input);
    let phasor = |record: &[f64], f: f64| -> Complex64 {
        let from = samples - period;
        (from..samples)
            .map(|n| record[n] * Complex64::from_polar(1.0, -wave(f, n)))
            .sum()
    };
    let all = frequencies.iter();
    all.map(|f| phasor(&output, *f) / phasor(&input, *f))
        .collect()
}

/// Both faces within 0.1 dB and 1°.
pub fn assert_faces_agree(name: &str, model: &dyn Model, peak: f64) {
    let frequencies = [50.0, 100.0, 300.0, 1e3, 3e3, 8e3, 15e3, 20e3];
    let settling = (20.0 * model.slowest_time()).clamp(0.02, 1.0);
    for (f, measured) in frequencies
        .iter()
        .zip(responses(model, &frequencies, peak, settling))
    {
        let law = model.transfer(*f);
        if law.norm() < 1e-4 * model.curve(1.0).abs() {
            continue;
        }
        let ratio = measured / law;
        let (db, degrees) = (20.0 * ratio.norm().log10(), ratio.arg().to_degrees());
        assert!(
            db.abs() < 0.1 && degrees.abs() < 1.0,
            "{name} at {f} Hz: {db} dB, {degrees}°"
        );
    }
}

/// Harmonics of every order over the fundamental of one period: √(2·mean square/b₁² − 1), mean left out.
pub fn total_distortion(period: &[f64]) -> f64 {
    let n = period.len() as f64;
    let mean = period.iter().sum::<f64>() / n;
    let power = period.iter().map(|x| (x - mean).powi(2)).sum::<f64>() / n;
    let first: Complex64 = period
        .iter()
        .enumerate()
        .map(|(k, x)| x * Complex64::from_polar(2.0 / n, -TAU * k as f64 / n))
        .sum();
    (2.0 * power / first.norm_sqr() - 1.0).sqrt()
}

/// One period of a sine of `peak` in `samples` samples.
pub fn sine(peak: f64, samples: usize) -> Vec<f64> {
    (0..samples)
        .map(|n| peak * (TAU * n as f64 / samples as f64).sin())
        .collect()
}

/// The rows of a golden file beside the checks, comments and names left out.
pub fn rows(text: &str) -> impl Iterator<Item = Vec<&str>> {
    let lines = text.lines().filter(|line| !line.starts_with('#')).skip(1);
    lines.map(|line| line.split(',').collect())
}
