//! Whole links, measured, against what an engineer works out by hand.

mod ambient;
mod hand;
mod interruptions;
mod limits;

use harklight::link::Link;
use harklight::render::test_signals::{Bench, Measured, measure};

/// Tone 1 kHz at `level` dB, 20 Hz to 20 kHz.
fn measured(link: &Link, level: f64) -> Measured {
    let bench = Bench {
        tone: 1000.0,
        level,
        band: (20.0, 20e3),
    };
    measure(link, &bench, 5)
}

/// Whether a figure is what it ought to be, to `within`.
fn close(figure: Option<f64>, expected: f64, within: f64) {
    let figure = figure.expect("a figure");
    assert!(
        (figure - expected).abs() < within,
        "{figure} against {expected}"
    );
}

fn db(ratio: f64) -> f64 {
    20.0 * ratio.log10()
}
