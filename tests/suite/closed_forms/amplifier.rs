//! Finite gain-bandwidth and slew rate (Bode; Gray and Meyer; formulas from memory).

use std::f64::consts::TAU;

use super::{db, near};
use crate::bench::{Draft, IDEAL_OPAMP, distortion, phasor, quiet, run, station, tone};

const PATH: &str = "transmitter.stage.1";

/// An op-amp of `gain`, ideal but for these edits, on rails of a megavolt.
fn amplifier(gain: f64, edits: &[&str]) -> Draft {
    let feedback = (gain - 1.0) * 1e3;
    let stage = format!(
        "[[transmitter.stage]]\nkind = \"opamp\"\nconnection = \"non-inverting\"\nfeedback = {feedback}\n\
         ground = \"1 kΩ\"\nsupply = [\"-1 MV\", \"1 MV\"]\n{IDEAL_OPAMP}"
    );
    edits
        .iter()
        .fold(Draft::ideal().transmitter(&stage), |draft, edit| {
            draft.set(format!("{PATH}.{edit}"))
        })
}

/// |A| = G/√(1 + (f·Gn/GBW)²), with the phase −atan: on paper to the table's digits, in time to 0.003 dB and 0.1°, which is what the
/// rule keeps up to a twentieth of the sample rate.
#[test]
fn closed_loops_have_gain_bandwidth_over_noise_gain() {
    for (gain, gbw, f, level, degrees) in [
        (100.0, "1 MHz", 20e3, -6.98970, -63.4349),
        (100.0, "1 MHz", 10e3, -3.01030, -45.0),
        (101.0, "3 MHz", 20e3, -1.62378, f64::NAN),
        (11.0, "1 MHz", 20e3, -0.205270, f64::NAN),
    ] {
        let gbw = format!("gbw={gbw}");
        let link = amplifier(gain, &[&gbw]).link();
        let stage = station(&link, PATH);
        let paper = stage.transfer(f) / gain;
        assert!((db(paper.norm()) - level).abs() < 1e-5, "{paper}");
        if degrees.is_finite() {
            assert!((paper.arg().to_degrees() - degrees).abs() < 1e-4);
        }
        let input = tone(384e3, f, 1e-3, 19_200 * 2);
        let output = run(stage, &quiet(384e3), &input);
        let ratio = phasor(&output[19_200..], 384e3, f) / phasor(&input[19_200..], 384e3, f);
        let seam = ratio / gain / paper;
        assert!(db(seam.norm()).abs() < 0.003, "{} dB", db(seam.norm()));
        assert!(seam.arg().to_degrees().abs() < 0.1);
    }
}

/// n equal poles: the half-power frequency shrinks by √(2^(1/n) − 1).
#[test]
fn cascades_shrink() {
    for (stages, factor) in [
        (1, 1.0),
        (2, 0.643594),
        (3, 0.509825),
        (4, 0.434979),
        (5, 0.385614),
    ] {
        let count = format!("stages={stages}");
        let link = amplifier(10.0, &["gbw=1 MHz", &count]).link();
        let row: Vec<_> = link
            .stations()
            .iter()
            .filter(|s| s.path() == PATH)
            .collect();
        assert_eq!(row.len(), stages);
        let level: f64 = row
            .iter()
            .map(|s| s.transfer(factor * 100e3).norm() / 10.0)
            .product();
        near(level, 0.5f64.sqrt(), 3e-6);
    }
}

/// Slew/(2πV): 0.5 V/µs and 10 V 7957.75 Hz; 0.3 V/µs and 4 V 11 936.6 Hz. One per cent below it nothing slews, one above something does.
#[test]
fn full_power_bandwidth() {
    for (slew, peak, bandwidth) in [("0.5 V/µs", 10.0, 7957.75), ("0.3 V/µs", 4.0, 11_936.6)] {
        let slew = format!("slew={slew}");
        let link = amplifier(1.0, &[&slew]).link();
        let slewing = |f: f64| {
            let mut runner = station(&link, PATH).runner(&quiet(384e3));
            // The sine starts with its steepest part: a smooth start must come before it.
            let mut block = tone(384e3, f, peak, 38_400);
            for (n, x) in block.iter_mut().take(9600).enumerate() {
                *x *= n as f64 / 9600.0;
            }
            runner.run(&mut block, &[]);
            runner.events().slewing
        };
        assert_eq!(slewing(0.99 * bandwidth), 0);
        assert!(slewing(1.01 * bandwidth) > 0);
    }
}

/// A sine that slews through and through leaves as a triangle: amplitude slew/(4f), THD 0.121153, H3/H1 1/9. Once with a hard limit alone,
/// once through an input pair that is driven far beyond its range.
#[test]
fn full_slewing_makes_a_triangle() {
    for edits in [&["slew=2 V/ms"][..], &["slew=2 V/ms", "gbw=1 MHz"]] {
        let link = amplifier(1.0, edits).link();
        let f = 997.0;
        let input = tone(384e3, f, 200.0, 384_000);
        let output = run(station(&link, PATH), &quiet(384e3), &input);
        let found = distortion(&output[192_000..], 384e3, f, 100e3);
        let triangle = 2e3 / (4.0 * f) * 8.0 / std::f64::consts::PI.powi(2) / 2f64.sqrt();
        // The corners are found to a sample: 2e-3 of the amplitude each.
        near(found.fundamental, triangle, 2e-3);
        near(found.thd(), 0.121153, 2e-3);
        near(found.harmonics[1] / found.fundamental, 1.0 / 9.0, 2e-3);
        assert!(found.harmonics[0] < 1e-3 * found.fundamental);
    }
}

/// The input pair alone: i = tanh(z/2·sin), odd harmonics. With next to no feedback the op-amp integrates what the pair lets through,
/// so that harmonic n comes out n times smaller.
#[test]
fn differential_pair() {
    for (z, third, fifth) in [
        (0.5, 0.00512829, f64::NAN),
        (1.0, 0.0196123, 0.000466270),
        (2.0, 0.0668319, f64::NAN),
        (4.0, 0.168830, f64::NAN),
        (10.0, 0.292133, f64::NAN),
    ] {
        // V_L = slew/(2π·GBW) = 50 mV; the loop's own corner is 1 MHz/10⁷.
        let slew = format!("slew={}", TAU * 1e6 * 0.05);
        let link = amplifier(1e7, &["gbw=1 MHz", &slew]).link();
        let f = 1000.0;
        let input = tone(384e3, f, z / 2.0 * 0.05, 384_000);
        let output = run(station(&link, PATH), &quiet(384e3), &input);
        let found = distortion(&output[192_000..], 384e3, f, 20e3);
        let relative = |n: usize| n as f64 * found.harmonics[n - 2] / found.fundamental;
        near(relative(3), third, 1e-4);
        if fifth.is_finite() {
            near(relative(5), fifth, 1e-3);
        }
        // The integrator starts from 0 and keeps a mean of up to slew/(2πf) = 50 V; 1e-7 of it unbalances the 50 mV of the pair by 1e-4.
        assert!(relative(2) < 1e-4);
    }
}
