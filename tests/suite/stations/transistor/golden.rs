//! The stage against integrations by scipy's stiff solvers (tests/golden/make_transistor.py and its CSVs).

use super::bench::{RATE, REAL, at, coupling, link, loaded_sink, quiet, stage, usual};
use std::f64::consts::{PI, TAU};

fn columns(name: &str) -> Vec<Vec<f64>> {
    let path = format!("{}/tests/golden/{name}.csv", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(path).unwrap();
    let rows = text.lines().filter(|l| !l.starts_with('#')).skip(1);
    let rows: Vec<Vec<f64>> = rows
        .map(|l| l.split(',').map(|x| x.parse().unwrap()).collect())
        .collect();
    (0..rows[0].len())
        .map(|c| rows.iter().map(|r| r[c]).collect())
        .collect()
}

fn drive(parts: &[(f64, f64)], t: f64) -> f64 {
    let s = if t < 0.5e-3 {
        0.5 - 0.5 * (PI * t / 0.5e-3).cos()
    } else {
        1.0
    };
    s * parts
        .iter()
        .map(|(a, f)| a * (TAU * f * t).sin())
        .sum::<f64>()
}

/// Largest and rms error of a row of stations over the golden column's span, at `times` the file's rate.
fn errors(
    link: &harklight::link::Link,
    paths: &[&str],
    parts: &[(f64, f64)],
    golden: &[f64],
    times: usize,
) -> (f64, f64) {
    let rate = RATE * times as f64;
    let mut block: Vec<f64> = (0..(golden.len() - 1) * times + 1)
        .map(|n| drive(parts, n as f64 / rate))
        .collect();
    for path in paths {
        at(link, path).runner(&quiet(rate)).run(&mut block, &[]);
    }
    let span = golden.iter().fold(f64::MIN, |m, x| m.max(*x))
        - golden.iter().fold(f64::MAX, |m, x| m.min(*x));
    let off: Vec<f64> = golden
        .iter()
        .enumerate()
        .map(|(n, g)| (block[n * times] - (g - golden[0])) / span)
        .collect();
    let largest = off.iter().fold(0.0f64, |m, x| m.max(x.abs()));
    let rms = (off.iter().map(|x| x * x).sum::<f64>() / off.len() as f64).sqrt();
    (largest, rms)
}

/// Through cut-off and saturation by the same equations, at the file's rate and at four times it.
///
/// The rules are of third order but for corners: there the node's lag, τ = 13 ns against a sample of 2.6 µs, turns the change of slope,
/// at most 13·0.6 V·2π·3.7 kHz, by τ into 2e-3 V, 4e-4 of the span, for a sample or two.
#[test]
fn the_stage_is_its_equations_integrated() {
    let golden = columns("transistor_stage");
    let stages = stage(&usual(0.8), REAL) + &coupling("47 nF");
    let link = link(2.2e3, &stages, &loaded_sink(), &[]);
    let parts = [(0.4, 1000.0), (0.2, 3700.0)];
    let row = ["transmitter.stage.amp"];
    let (largest, rms) = errors(&link, &row, &parts, &golden[2], 1);
    assert!(largest < 4e-4 && rms < 2e-5, "{largest:e} {rms:e}");
    let (fine, fine_rms) = errors(&link, &row, &parts, &golden[2], 4);
    assert!(fine < largest / 2.0 && fine_rms < rms / 2.0, "{fine:e}");
}

/// The whole circuit with its charges and both coupling capacitors, swung until the base current charges the first of them.
///
/// What differs is the input pole, in the circuit's life proportional to the current that flows: 0.33 µs of lag at rest. The signal's
/// steepest slope, 2.4 of the span a millisecond, times ten such lags (the current's peak over its rest is under 3, and the
/// collector's own share comes on top) is 8e-3 of the span.
#[test]
fn the_stage_stands_for_the_circuit() {
    let golden = columns("transistor_circuit");
    let part = REAL.replace("50 MHz", "250 MHz").replace("4 pF", "1.5 pF");
    let stages = coupling("100 nF") + &stage(&usual(1.0), &part) + &coupling("47 nF");
    let link = link(2.2e3, &stages, &loaded_sink(), &[]);
    let parts = [(0.025, 1000.0), (0.01, 1700.0)];
    let row = [
        "transmitter.stage.1",
        "transmitter.stage.amp",
        "transmitter.stage.3",
    ];
    for (row, column) in [(&row[..2], 2), (&row[..], 3)] {
        let (largest, rms) = errors(&link, row, &parts, &golden[column], 1);
        assert!(largest < 8e-3 && rms < 1e-3, "{largest:e} {rms:e}");
    }
}
