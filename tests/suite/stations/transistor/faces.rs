//! The two faces of both stations held against each other.

use super::bench::*;
use harklight::link::Link;
use harklight::signal::spectrum::Analyser;
use harklight::station::{Conditions, Curves, Model};
use std::f64::consts::{PI, TAU};

struct Case {
    name: &'static str,
    link: Link,
    path: &'static str,
    small: f64,
    large: f64,
    /// Whether a held input shows the curve.
    holds: bool,
}

impl Case {
    fn model(&self) -> &dyn Model {
        at(&self.link, self.path)
    }
}

fn cases() -> Vec<Case> {
    let amp = "transmitter.stage.amp";
    let slow = REAL
        .replace("50 MHz", "20 MHz")
        .replace("\"4 pF\"", "\"9 pF\"");
    let case = |name, link, path, small, large, holds| Case {
        name,
        link,
        path,
        small,
        large,
        holds,
    };
    let modulator = format!(
        "kind = \"transistor\"\nbias = \"20 mA\"\nemitter_resistor = \"33 Ω\"\nbias_resistance = \"10 kΩ\"\n{REAL}"
    );
    vec![
        case(
            "plain",
            link(600.0, &stage(&usual(1.0), REAL), SINK, &[]),
            amp,
            1e-5,
            0.3,
            true,
        ),
        case(
            "degenerated",
            link(600.0, &stage(&usual(0.0), REAL), SINK, &[]),
            amp,
            1e-3,
            5.0,
            true,
        ),
        case(
            "loaded",
            link(600.0, &stage(&usual(0.8), REAL), &loaded_sink(), &[]),
            amp,
            1e-4,
            1.0,
            true,
        ),
        case(
            "slow input",
            link(5e3, &stage(&usual(1.0), &slow), SINK, &[]),
            amp,
            1e-5,
            0.5,
            true,
        ),
        case(
            "coupled",
            link(
                2.2e3,
                &(coupling("220 nF") + &stage(&usual(0.8), REAL) + &coupling("470 nF")),
                &loaded_sink(),
                &[],
            ),
            amp,
            1e-4,
            1.0,
            false,
        ),
        case(
            "saturated",
            link(
                600.0,
                &stage(&usual(0.8).replace("1 mA", "3 mA"), REAL),
                SINK,
                &[],
            ),
            amp,
            1e-4,
            1.0,
            true,
        ),
        case(
            "modulator",
            link(600.0, "", &modulator, &[]),
            "transmitter.emitter",
            1e-3,
            3.0,
            true,
        ),
        case(
            "coupled modulator",
            link(
                10e3,
                &coupling("1 µF"),
                &modulator.replace("33 Ω", "0 Ω"),
                &[],
            ),
            "transmitter.emitter",
            1e-5,
            1.0,
            true,
        ),
    ]
}

const TONES: [f64; 10] = [
    20.0, 60.0, 160.0, 440.0, 1000.0, 2600.0, 3200.0, 8000.0, 14_000.0, 20_000.0,
];

fn departures(case: &Case, conditions: &Conditions, top: f64, peak: f64) {
    let rate = conditions.rate;
    let tones: Vec<f64> = TONES.into_iter().filter(|f| *f <= top).collect();
    let count = tones.len() as f64;
    let window = (rate / 20.0) as usize;
    let samples = window * 6;
    let mut input = vec![0.0; samples];
    for (k, f) in tones.iter().enumerate() {
        for (n, x) in input.iter_mut().enumerate() {
            *x += peak / count
                * (TAU * (f * n as f64 / rate).fract() + PI * (k * k) as f64 / count).sin();
        }
    }
    let output = run(case.model(), conditions, &input);
    let line = |record: &[f64], f: f64| -> num_complex::Complex64 {
        record[samples - window..]
            .iter()
            .enumerate()
            .map(|(n, x)| {
                x * num_complex::Complex64::from_polar(1.0, -TAU * (f * n as f64 / rate).fract())
            })
            .sum()
    };
    for f in tones {
        let ratio = line(&output, f) / line(&input, f) / case.model().transfer(f);
        let (db, degrees) = (20.0 * ratio.norm().log10(), ratio.arg().to_degrees());
        assert!(
            db.abs() < 0.1 && degrees.abs() < 1.0,
            "{} {:?} {rate}: {db} dB, {degrees}° at {f}",
            case.name,
            conditions.curves
        );
    }
}

#[test]
fn runs_follow_the_transfer() {
    for case in cases() {
        departures(&case, &quiet(RATE), 20e3, case.small);
        departures(&case, &quiet(64e3), 3200.0, case.small);
        let straight = Conditions {
            curves: Curves::Straight,
            ..quiet(RATE)
        };
        departures(&case, &straight, 20e3, 1e4 * case.small);
    }
}

#[test]
fn held_inputs_end_on_the_curve_and_rest_stands_still() {
    for case in cases() {
        let model = case.model();
        assert!(
            run(model, &quiet(RATE), &[0.0; 1000])
                .iter()
                .all(|x| x.abs() < 1e-12),
            "{}",
            case.name
        );
        let slope = (model.curve(case.small) - model.curve(-case.small)) / (2.0 * case.small);
        if case.name != "saturated" {
            near(slope, model.transfer(2e3).re, 1e-2);
        }
        let largest = model
            .curve(case.large)
            .abs()
            .max(model.curve(-case.large).abs());
        for k in -10..=10 {
            let x = case.large * f64::from(k) / 10.0;
            let y = model.curve(x);
            if case.holds {
                let end = run(model, &quiet(RATE), &vec![x; 4000])[3999];
                assert!(
                    (end - y).abs() < 1e-6 * largest,
                    "{} {x}: {end} {y}",
                    case.name
                );
            }
        }
    }
}

#[test]
fn noise_is_as_promised() {
    const SAMPLES: usize = 1 << 19;
    let analyser = Analyser::new(RATE, 1 << 14, 8.0);
    for case in cases() {
        let model = case.model();
        let conditions = Conditions {
            noise: true,
            seed: 5,
            ..quiet(RATE)
        };
        let mut record = vec![0.0; SAMPLES + SAMPLES / 4];
        model.runner(&conditions).run(&mut record, &[]);
        let spectrum = analyser.average(&record[SAMPLES / 4..]);
        for (low, high) in [(200.0, 500.0), (1e3, 3e3), (12e3, 20e3)] {
            let step = (high - low) / 200.0;
            let promised: f64 = (0..200)
                .flat_map(|k| model.noise(low + step * (f64::from(k) + 0.5)))
                .map(|s| s.density * step)
                .sum();
            let ratio = spectrum.band_power(low, high) / promised;
            let sigma = analyser.scatter(SAMPLES, high - low);
            assert!(
                (ratio - 1.0).abs() < 4.0 * sigma,
                "{} {low}: {ratio}, sigma {sigma}",
                case.name
            );
        }
    }
}

#[test]
fn blocks_storms_and_silence() {
    for case in cases() {
        let model = case.model();
        let noisy = Conditions {
            noise: true,
            ..quiet(RATE)
        };
        let signal = tone(1700.0, case.large, 3000);
        let whole = run(model, &noisy, &signal);
        let mut pieces = signal.clone();
        let mut runner = model.runner(&noisy);
        pieces
            .chunks_mut(7)
            .for_each(|block| runner.run(block, &[]));
        assert!(
            whole
                .iter()
                .zip(&pieces)
                .all(|(a, b)| a.to_bits() == b.to_bits()),
            "{}",
            case.name
        );
        for curves in [Curves::Bent, Curves::Straight] {
            for cold in [false, true] {
                for peak in [1e6, -1e6, 1e-300, 40.0] {
                    let conditions = Conditions {
                        curves,
                        cold,
                        ..noisy.clone()
                    };
                    let storm: Vec<f64> = (0..3000)
                        .map(|n| match n / 1000 {
                            0 => peak,
                            1 => 0.0,
                            _ if n % 2 == 0 => peak,
                            _ => -peak,
                        })
                        .collect();
                    let output = run(model, &conditions, &storm);
                    assert!(
                        output.iter().all(|x| x.is_finite()),
                        "{} {curves:?} {cold} {peak}",
                        case.name
                    );
                }
            }
        }
    }
}
