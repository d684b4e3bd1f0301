//! A receive head on the bench: designs as text, runs, golden files.

use std::f64::consts::{PI, TAU};
use std::path::Path;

use harklight::design::Design;
use harklight::link::Link;
use harklight::station::{Conditions, Curves, Model};
use num_complex::Complex64;

pub use crate::bench::{quiet, reading};
use realfft::RealFftPlanner;

/// A design whose detector catches `flux` watts at rest and makes 1 A/W of them.
#[derive(Debug, Clone)]
pub struct Head {
    pub detector: String,
    pub front_end: String,
    pub flux: f64,
    /// Resistance of the line output behind a capacitor; straight on the head where the capacitor is 0.
    pub behind: Option<(f64, f64)>,
    pub temperature: f64,
}

impl Head {
    pub fn link(&self) -> Link {
        let (impedance, coupling) = match self.behind {
            Some((r, c)) if c > 0.0 => (
                format!("impedance = {r}"),
                format!("[[receiver.stage]]\nkind = \"coupling\"\ncapacitor = {c:e}\n"),
            ),
            Some((r, _)) => (format!("impedance = {r}"), String::new()),
            None => (String::new(), String::new()),
        };
        // Four square metres at one metre catch all of the light.
        let text = format!(
            r#"temperature = {}
[source]
full_scale = "1 V"
resistance = 0
[transmitter.driver]
kind = "current-sink"
supply = "1 MV"
bias = "10 mA"
slope = "1 mA/V"
sense = 0
saturation = 0
[transmitter.emitter]
wavelength = "940 nm"
linewidth = 0
flux = {:e}
at_current = "10 mA"
low_current = 0
droop_current = "inf"
saturation_current = "1 pA"
ideality = 1
series_resistance = 0
half_angle = "60°"
bandwidth = "inf"
thermal_resistance = 0
thermal_time = 0
flux_temperature = 0
max_current = "inf"
[path]
kind = "air"
distance = "1 m"
[receiver.optics]
area = "4 m²"
[receiver.detector]
area = "1 cm²"
responsivity = "1 A/W"
{}
[receiver.front_end]
kind = "load"
{}
{coupling}
[output]
kind = "line"
full_scale = "1 V"
{impedance}
"#,
            self.temperature, self.flux, self.detector, self.front_end
        );
        let design = Design::from_text("bench.toml", &text, Path::new("."), &[])
            .unwrap_or_else(|e| panic!("{:?}\n{text}", miette::Report::new(e)));
        Link::new(&design).unwrap_or_else(|e| panic!("{:?}", miette::Report::new(e)))
    }
}

pub fn station<'a>(link: &'a Link, path: &str) -> &'a dyn Model {
    let found = link.stations().iter().find(|s| s.path() == path);
    found.unwrap_or_else(|| panic!("no {path}")).as_ref()
}

pub fn front(link: &Link) -> &dyn Model {
    station(link, "receiver.front_end")
}

pub fn run(model: &dyn Model, conditions: &Conditions, input: &[f64]) -> Vec<f64> {
    in_blocks(model, conditions, input, input.len())
}

pub fn in_blocks(
    model: &dyn Model,
    conditions: &Conditions,
    input: &[f64],
    size: usize,
) -> Vec<f64> {
    let mut samples = input.to_vec();
    let mut runner = model.runner(conditions);
    for block in samples.chunks_mut(size) {
        runner.run(block, &[]);
    }
    samples
}

pub fn near(a: f64, b: f64, relative: f64) {
    assert!(
        (a - b).abs() <= relative * b.abs(),
        "{a} against {b}, allowed {relative:e}"
    );
}

/// Frequency up to 1 GHz where the response has fallen by 3.01 dB from that at 1 mHz.
pub fn corner(model: &dyn Model) -> f64 {
    let still = model.transfer(1e-3).norm();
    let (mut low, mut high) = (1e-3f64, 1e9f64);
    for _ in 0..100 {
        let f = (low * high).sqrt();
        if model.transfer(f).norm() > still * 0.5f64.sqrt() {
            low = f;
        } else {
            high = f;
        }
    }
    low
}

/// Runner and Model in agreement: response to 20 kHz within 0.1 dB and 1°, each contributor's noise within its record's scatter.
pub fn two_faces(name: &str, model: &dyn Model, small: f64) {
    let rate = 384e3;
    for curves in [Curves::Bent, Curves::Straight] {
        let conditions = Conditions {
            curves,
            ..quiet(rate)
        };
        for f in [20.0, 200.0, 1e3, 5e3, 20e3] {
            let settle = (0.02f64.max(12.0 * model.slowest_time()).min(2.0) * rate) as usize;
            let length = (rate / 20.0) as usize * if f < 100.0 { 2 } else { 1 };
            let input: Vec<f64> = (0..settle + length)
                .map(|n| small * (TAU * (f * n as f64 / rate).fract()).sin())
                .collect();
            let output = run(model, &conditions, &input);
            let at = |x: &[f64]| -> Complex64 {
                (settle..settle + length)
                    .map(|n| {
                        x[n] * Complex64::from_polar(1.0, -TAU * (f * n as f64 / rate).fract())
                    })
                    .sum()
            };
            let ratio = at(&output) / at(&input) / model.transfer(f);
            let (db, degrees) = (20.0 * ratio.norm().log10(), ratio.arg().to_degrees());
            assert!(
                db.abs() < 0.1 && degrees.abs() < 1.0,
                "{name}, {curves:?}, {f} Hz: {db} dB, {degrees}°"
            );
        }
    }
    for share in model.noise(1e3) {
        if share.density == 0.0 {
            continue;
        }
        let others = model.noise(1e3).into_iter().map(|s| s.name);
        let conditions = Conditions {
            noise: true,
            silence: others.filter(|n| *n != share.name).collect(),
            ..quiet(rate)
        };
        noise_agrees(
            &format!("{name}, {}", share.name),
            model,
            &conditions,
            &share.name,
        );
    }
}

/// Bins of the noise spectra, records averaged.
const BINS: usize = 4096;
const RECORDS: usize = 128;

fn noise_agrees(label: &str, model: &dyn Model, conditions: &Conditions, contributor: &str) {
    let settle = (12.0 * model.slowest_time()).min(1.0) * conditions.rate;
    let samples = vec![0.0; settle as usize + BINS * RECORDS];
    let output = run(model, conditions, &samples);
    let mut planner = RealFftPlanner::<f64>::new();
    let fft = planner.plan_fft_forward(BINS);
    let window: Vec<f64> = (0..BINS)
        .map(|n| 0.5 - 0.5 * (TAU * n as f64 / BINS as f64).cos())
        .collect();
    let energy: f64 = window.iter().map(|w| w * w).sum();
    let mut spectrum = fft.make_output_vec();
    // 1 to 4 kHz, and to 20 kHz.
    for (from, to) in [(11, 43), (43, 213)] {
        let mut measured = 0.0;
        for record in output[settle as usize..].chunks_exact(BINS) {
            let mut x: Vec<f64> = record.iter().zip(&window).map(|(x, w)| x * w).collect();
            fft.process(&mut x, &mut spectrum).unwrap();
            measured += spectrum[from..to].iter().map(|c| c.norm_sqr()).sum::<f64>();
        }
        measured *= 2.0 / (energy * conditions.rate * (RECORDS * (to - from)) as f64);
        let expected = (from..to)
            .map(|k| {
                let f = k as f64 * conditions.rate / BINS as f64;
                let shares = model.noise(f);
                shares
                    .iter()
                    .find(|s| s.name == contributor)
                    .unwrap()
                    .density
            })
            .sum::<f64>()
            / (to - from) as f64;
        // Hann windows tie neighbouring bins: two thirds as many count.
        let scatter = (1.5 / (RECORDS * (to - from)) as f64).sqrt();
        let off = measured / expected - 1.0;
        assert!(
            off.abs() < 5.0 * scatter,
            "{label}, bins {from}…{to}: {off} off, scatter {scatter}"
        );
    }
}

/// What every runner owes: block sizes do not matter, nothing becomes infinite, rest is rest, held inputs follow the curve.
pub fn contract(name: &str, model: &dyn Model, span: (f64, f64)) {
    let lively = Conditions {
        noise: true,
        ..quiet(384e3)
    };
    let (low, high) = span;
    let signal: Vec<f64> = (0..6000)
        .map(|n| low + (high - low) * (0.5 + 0.5 * (TAU * n as f64 / 370.0).sin()))
        .collect();
    let whole = run(model, &lively, &signal);
    for size in [1, 7, 4096] {
        assert_eq!(
            whole,
            in_blocks(model, &lively, &signal, size),
            "{name}: blocks of {size}"
        );
    }
    for curves in [Curves::Bent, Curves::Straight] {
        for cold in [false, true] {
            for peak in [0.0, 1e6, -1e6, 1e-300] {
                let conditions = Conditions {
                    noise: peak != 0.0,
                    curves,
                    cold,
                    ..quiet(384e3)
                };
                let storm: Vec<f64> = (0..1500)
                    .map(|n| match n / 500 {
                        0 => peak,
                        1 => 0.0,
                        _ if n % 2 == 0 => peak,
                        _ => -peak,
                    })
                    .collect();
                let output = run(model, &conditions, &storm);
                assert!(
                    output.iter().all(|x| x.is_finite()),
                    "{name}, {curves:?}, cold {cold}, {peak}"
                );
                if peak == 0.0 && !cold {
                    assert!(output.iter().all(|x| x.abs() < 1e-9), "{name}: rest moves");
                }
            }
        }
    }
    assert!(model.curve(0.0).abs() < 1e-9, "{name}: curve at rest");
}

/// Held inputs end on the curve.
pub fn settles_on_curve(name: &str, model: &dyn Model, span: (f64, f64)) {
    let (low, high) = span;
    for step in 0..=8 {
        let x = low + (high - low) * f64::from(step) / 8.0;
        let seconds = (40.0 * model.slowest_time()).clamp(0.01, 2.0);
        let held = vec![x; (seconds * 384e3) as usize];
        let y = *run(model, &quiet(384e3), &held).last().unwrap();
        let curve = model.curve(x);
        assert!(
            (y - curve).abs() < 1e-6 * curve.abs() + 1e-9,
            "{name}, {x}: {y} against {curve}"
        );
    }
}

/// The columns of a golden file by name.
pub struct Golden {
    names: Vec<String>,
    rows: Vec<Vec<f64>>,
}

impl Golden {
    pub fn read(name: &str) -> Self {
        let path = format!("{}/tests/golden/{name}.csv", env!("CARGO_MANIFEST_DIR"));
        let text = std::fs::read_to_string(path).unwrap();
        let mut lines = text.lines().filter(|l| !l.starts_with('#'));
        let names = lines.next().unwrap().split(',').map(str::to_owned);
        Self {
            names: names.collect(),
            rows: lines
                .map(|l| l.split(',').map(|x| x.parse().unwrap()).collect())
                .collect(),
        }
    }

    pub fn column(&self, name: &str) -> Vec<f64> {
        let at = self.names.iter().position(|n| n == name).unwrap();
        self.rows.iter().map(|r| r[at]).collect()
    }

    /// Largest error of `model` at `times` the file's rate, as a share of the largest swing of `column`; `swing` is that of the input.
    pub fn error(&self, model: &dyn Model, column: &str, swing: f64, times: usize) -> f64 {
        let rate = 384e3 * times as f64;
        let expected = self.column(column);
        let input: Vec<f64> = (0..(expected.len() - 1) * times + 1)
            .map(|n| swing * drive(n as f64 / rate))
            .collect();
        let output = run(model, &quiet(rate), &input);
        let sign = model.transfer(1e-3).re.signum();
        let rest = expected[0];
        let largest = |x: &mut dyn Iterator<Item = f64>| x.fold(0.0f64, |m, x| m.max(x.abs()));
        let worst = largest(
            &mut output
                .iter()
                .step_by(times)
                .zip(&expected)
                .map(|(y, x)| sign * y - (x - rest)),
        );
        worst / largest(&mut expected.iter().map(|x| x - rest))
    }
}

/// The two sines of every file, under the smooth start of half a millisecond.
fn drive(t: f64) -> f64 {
    let start = 0.5e-3;
    let s = if t < start {
        0.5 - 0.5 * (PI * t / start).cos()
    } else {
        1.0
    };
    s * (0.7 * (TAU * 1000.0 * t).sin() + 0.3 * (TAU * 5200.0 * t).sin())
}

/// Error that TR-BDF2 leaves on these sines at 384 kHz, as a share of the swing: (3γ² − 4γ + 2)/(12(2 − γ)) = 0.04 times (ωh)² of
/// each (Bank et al. 1985). A corner has harmonics that fall as 1/n², which all err alike: `harmonics` of them are counted.
pub fn second_order(harmonics: f64) -> f64 {
    let each = |level: f64, f: f64| 0.04 * level * (TAU * f / 384e3).powi(2);
    harmonics * (each(0.7, 1000.0) + each(0.3, 5200.0))
}
