//! The power amplifier by closed forms and an independent integration; loudspeaker and headphone levels.

use std::f64::consts::{PI, TAU};
use std::process::Command;

use num_complex::Complex64;

use super::workbench::*;
use harklight::link::Link;
use harklight::station::{Curves, Limit};

const IDEAL_POWER: [(&str, &str); 6] = [
    ("gain", "\"0 dB\""),
    ("supply", "[\"-1 kV\", \"1 kV\"]"),
    ("output_current", "\"inf\""),
    ("dead_zone", "0"),
    ("gbw", "\"inf\""),
    ("slew", "\"inf\""),
];

/// An amplifier without limits but for those `changed`, before the driver.
fn keys(changed: &[(&str, &str)]) -> String {
    IDEAL_POWER
        .iter()
        .chain(
            changed
                .iter()
                .filter(|(name, _)| IDEAL_POWER.iter().all(|(n, _)| n != name)),
        )
        .map(|(name, value)| {
            let value = changed
                .iter()
                .find(|(n, _)| n == name)
                .map_or(value, |(_, v)| v);
            format!("{name} = {value}\n")
        })
        .collect()
}

fn amplifier(changed: &[(&str, &str)]) -> Link {
    link(&stage("power", &keys(changed)), "", LINE)
}

/// After the front end, into an output of 8 Ω.
fn into_eight_ohms(changed: &[(&str, &str)], between: &str) -> Link {
    let stage = stage("power", &keys(changed)).replace("transmitter", "receiver");
    link(
        "",
        &format!("{stage}{between}"),
        &LINE.replace("full_scale", "impedance = \"8 Ω\"\nfull_scale"),
    )
}

/// Crossover distortion of a unit sine with a gap of ±d: b₁ = 1 − (2/π)(asin d + d√(1 − d²)), every harmonic counted (Fourier; values of
/// the shared check list, section 6).
#[test]
fn crossover_distortion_is_its_closed_form() {
    for (gap, distortion) in [
        (0.01, 0.006_164_76),
        (0.05, 0.031_033_4),
        (0.1, 0.062_675_1),
        (0.3, 0.198_738),
    ] {
        let first = 1.0 - 2.0 / PI * (f64::asin(gap) + gap * (1.0 - gap * gap).sqrt());
        let link = amplifier(&[("dead_zone", &gap.to_string())]);
        let output = run(it(&link), &quiet(Curves::Bent), &sine(1.0, 9973));
        assert!(
            (total_distortion(&output) / distortion - 1.0).abs() < 1e-5,
            "{gap}: {}",
            total_distortion(&output)
        );
        let fundamental: f64 = output
            .iter()
            .zip(sine(2.0 / 9973.0, 9973))
            .map(|(y, s)| y * s)
            .sum();
        assert!((fundamental / first - 1.0).abs() < 1e-6);
        let curve: Vec<f64> = sine(1.0, 9973)
            .iter()
            .map(|x| it(&link).curve(*x))
            .collect();
        assert_eq!(curve, output);
        assert!(it(&link).warnings()[0].contains("class-B"));
    }
}

/// A sine clipped at the share c of its peak (closed form; values of the shared check list, section 6). The rails are the supply's.
#[test]
fn rails_clip_to_the_closed_form() {
    for (share, distortion) in [
        (0.95, 0.019_240_1),
        (0.8, 0.089_785_8),
        (0.5, 0.232_938),
        (0.1, 0.430_397),
    ] {
        let link = amplifier(&[("supply", "[\"-5 V\", \"5 V\"]"), ("gain", "\"20 dB\"")]);
        let output = run(it(&link), &quiet(Curves::Bent), &sine(0.5 / share, 9973));
        assert!(
            (total_distortion(&output) / distortion - 1.0).abs() < 1e-5,
            "{share}"
        );
        // With a gap the rails stand where they stood.
        let link = amplifier(&[
            ("supply", "\"10 V\""),
            ("gain", "\"20 dB\""),
            ("dead_zone", "0.5"),
        ]);
        let gapped = run(it(&link), &quiet(Curves::Bent), &sine(50.0, 100));
        assert_eq!(gapped.iter().fold(0.0f64, |m, y| m.max(*y)), 5.0);
        assert_eq!(reading(it(&link), "output"), 5.0);
    }
}

/// |A| = G/√(1 + (f·G/GBW)²): 40 dB and 1 MHz at 20 kHz −6.98970 dB and −63.4349°, at 10 kHz −3.01030 dB (shared check list, section 8).
#[test]
fn gain_bandwidth_is_its_closed_form() {
    let link = amplifier(&[("gain", "\"40 dB\""), ("gbw", "\"1 MHz\"")]);
    let model = it(&link);
    let at_20k = model.transfer(20e3) / 100.0;
    assert!((20.0 * at_20k.norm().log10() + 6.98970).abs() < 1e-5);
    assert!((at_20k.arg().to_degrees() + 63.4349).abs() < 1e-4);
    assert!((20.0 * (model.transfer(10e3).norm() / 100.0).log10() + 3.01030).abs() < 1e-5);
    assert!((reading(model, "bandwidth") / 10e3 - 1.0).abs() < 1e-12);
    assert_faces_agree("power amplifier", model, 1e-4);
    let quick = amplifier(&[
        ("gain", "\"26 dB\""),
        ("gbw", "\"3 MHz\""),
        ("slew", "\"8 V/µs\""),
        ("noise_voltage", "\"20 nV/√Hz\""),
    ]);
    assert_faces_agree("power amplifier", it(&quick), 1e-3);
    // Noise at the input, times the gain.
    let share = &it(&quick).noise(100.0)[0];
    assert_eq!(share.name, "transmitter.stage.it.voltage_noise");
    assert!((share.density.sqrt() / (20e-9 * 10f64.powf(1.3)) - 1.0).abs() < 1e-3);
}

/// Driven far beyond its slew rate the output is a triangle of SR/(4f), THD 0.121153 (Fourier; shared check list, sections 6 and 8).
#[test]
fn slewing_makes_triangles() {
    let link = amplifier(&[
        ("slew", "\"20 kV/s\""),
        ("gbw", "\"1 GHz\""),
        ("supply", "[\"-1 MV\", \"1 MV\"]"),
    ]);
    let period = 384;
    let input: Vec<f64> = sine(2e4, period)
        .into_iter()
        .cycle()
        .take(20 * period)
        .collect();
    let output = run(it(&link), &quiet(Curves::Bent), &input);
    let last = &output[19 * period..];
    let (low, high) = last
        .iter()
        .fold((f64::MAX, f64::MIN), |(l, h), y| (l.min(*y), h.max(*y)));
    // One sample of rounding at each corner of 384.
    assert!(
        ((high - low) / 2.0 / 5.0 - 1.0).abs() < 0.01,
        "{low} {high}"
    );
    assert!(
        (total_distortion(last) - 0.121_153).abs() < 1e-3,
        "{}",
        total_distortion(last)
    );
    let mut runner = it(&link).runner(&quiet(Curves::Bent));
    runner.run(&mut input.clone(), &[]);
    assert!(runner.events().slewing > 19 * 370);
}

/// Class B with finite gain-bandwidth and slew against scipy's DOP853, sample by sample.
///
/// The loop is exact but for the bend of its input pair, which is taken as a parabola through three samples: third order, on an 11 kHz tone
/// 2·10⁻⁴ of the bend, itself some per cent of the swing. The gap is static behind it.
#[test]
fn class_b_follows_the_independent_integration() {
    let link = amplifier(&[
        ("gain", "\"20 dB\""),
        ("gbw", "\"600 kHz\""),
        ("slew", "\"0.4 V/µs\""),
        ("dead_zone", "\"150 mV\""),
        ("supply", "[\"-9 V\", \"9 V\"]"),
    ]);
    let golden: Vec<[f64; 2]> = rows(include_str!("../../golden/class_b.csv"))
        .map(|row| [1, 2].map(|k| row[k].parse().unwrap()))
        .collect();
    let input: Vec<f64> = golden.iter().map(|r| r[0]).collect();
    let output = run(it(&link), &quiet(Curves::Bent), &input);
    let swing = golden.iter().fold(0.0f64, |m, r| m.max(r[1].abs()));
    let off = golden
        .iter()
        .zip(&output)
        .map(|(r, y)| (r[1] - y).abs())
        .fold(0.0, f64::max);
    println!("largest difference {off} V of {swing} V");
    assert!(off < 1e-3 * swing, "{off} of {swing}");
    assert!(golden.iter().any(|r| r[1] == 0.0) && swing > 3.0);
}

/// 0.5 A into 8 Ω is 4 V; without a load the rails limit.
#[test]
fn output_current_limits_into_the_load() {
    let limited = [
        ("output_current", "\"0.5 A\""),
        ("supply", "[\"-12 V\", \"12 V\"]"),
    ];
    let link = into_eight_ohms(&limited, "");
    let model = at(&link, "receiver.stage.it");
    assert_eq!(model.curve(100.0), 4.0);
    assert_eq!(
        model.limits()[0],
        Limit::Level {
            cause: "output current",
            at: 4.0
        }
    );
    let mut runner = model.runner(&quiet(Curves::Bent));
    let mut block = sine(100.0, 1000);
    runner.run(&mut block, &[]);
    assert!(block.iter().all(|y| y.abs() <= 4.0) && runner.events().clipped > 900);
    assert_eq!(it(&amplifier(&limited)).curve(100.0), 12.0);
}

/// A single supply rests in the middle: straight into 8 Ω it drives a steady current and says so; behind 220 µF the corner is 90.4289 Hz
/// (shared check list, section 8).
#[test]
fn a_single_supply_needs_its_coupling_capacitor() {
    let supply = [("supply", "\"12 V\"")];
    let straight = into_eight_ohms(&supply, "");
    let warnings = at(&straight, "receiver.stage.it").warnings();
    assert!(
        warnings[0].contains("6 V") && warnings[0].contains("750 mA"),
        "{warnings:?}"
    );
    let coupled = into_eight_ohms(
        &supply,
        "[[receiver.stage]]\nkind = \"coupling\"\ncapacitor = \"220 µF\"\n",
    );
    assert!(at(&coupled, "receiver.stage.it").warnings().is_empty());
    let coupling = at(&coupled, "receiver.stage.2");
    assert!((reading(coupling, "corner") - 90.4289).abs() < 5e-5);
    assert!((20.0 * coupling.transfer(90.4289).norm().log10() + 3.0103).abs() < 1e-4);
}

/// The straight run of an amplifier with a gap is its line, so that the gap is distortion alone.
#[test]
fn straight_runs_leave_the_gap_out() {
    let link = amplifier(&[
        ("dead_zone", "0.3"),
        ("gain", "\"6 dB\""),
        ("supply", "[\"-1 V\", \"1 V\"]"),
    ]);
    let gain = 10f64.powf(0.3);
    let output = run(it(&link), &quiet(Curves::Straight), &sine(3.0, 500));
    let off = output
        .iter()
        .zip(sine(3.0, 500))
        .map(|(y, x)| (y - gain * x).abs())
        .fold(0.0, f64::max);
    assert!(off < 1e-12, "{off}");
}

#[test]
fn storms_stay_finite() {
    for changed in [
        vec![
            ("gbw", "\"1 Hz\""),
            ("slew", "\"1 V/s\""),
            ("gain", "\"80 dB\""),
        ],
        vec![
            ("gbw", "\"inf\""),
            ("slew", "\"1 V/s\""),
            ("supply", "\"1 V\""),
        ],
        vec![
            ("gain", "\"-40 dB\""),
            ("dead_zone", "\"1 kV\""),
            ("gbw", "\"1 MHz\""),
        ],
    ] {
        let link = amplifier(&changed);
        let input: Vec<f64> = (0..2000)
            .map(|n| [1e6, -1e6, 0.0][if n < 1000 { n % 2 } else { 2 }])
            .collect();
        for curves in [Curves::Bent, Curves::Straight] {
            assert!(
                run(it(&link), &quiet(curves), &input)
                    .iter()
                    .all(|y| y.is_finite()),
                "{changed:?}"
            );
            assert!(
                run(it(&link), &quiet(curves), &[0.0; 100])
                    .iter()
                    .all(|y| *y == 0.0),
                "{changed:?}"
            );
        }
    }
}

const SPEAKER: &str = "[output]\nkind = \"loudspeaker\"\nfull_scale = \"10 V\"\nimpedance = \"8 Ω\"\nresonance = \"80 Hz\"\nquality = 0.9\nvoice_coil = \"5 kHz\"\nsensitivity = \"87 dB\"\ndistance = \"0.5 m\"\n";
const HEADPHONE: &str = "[output]\nkind = \"headphone\"\nfull_scale = \"1 V\"\nimpedance = \"32 Ω\"\nsensitivity = \"100 dB\"\n";

/// s²/(s² + ω₀s/Q + ω₀²)·1/(1 + s/ω_c); at resonance Q times the coil's share.
#[test]
fn a_loudspeaker_shapes_the_voltage() {
    let link = link_to(SPEAKER);
    let model = at(&link, "output");
    for f in [20.0, 80.0, 1e3, 5e3, 20e3] {
        let (s, w) = (Complex64::new(0.0, TAU * f), TAU * 80.0);
        let expected = s * s / (s * s + s * w / 0.9 + w * w) / (1.0 + s / (TAU * 5e3));
        assert!((model.transfer(f) / expected - 1.0).norm() < 1e-12);
    }
    assert_faces_agree("loudspeaker", model, 1.0);
    // A headphone without a resonance of its own is flat.
    assert_eq!(
        at(&link_to(HEADPHONE), "output").transfer(20e3),
        Complex64::from(1.0)
    );
}

fn link_to(output: &str) -> Link {
    link("", "", output)
}

/// L = S + 10 lg P − 20 lg r: 87 dB, 0.5 W (2 V across 8 Ω), 0.5 m: 90.0103 dB (shared check list, section 13); a headphone at 1 mW.
#[test]
fn levels_are_predicted() {
    let speaker = link_to(SPEAKER);
    let level = |link: &Link, volts: f64| link.sound().unwrap().level(volts);
    assert!((level(&speaker, 2.0) - 90.0103).abs() < 5e-5);
    // A sine of 10 V peak: 6.25 W, 11 dB more.
    let full = reading(at(&speaker, "output"), "full scale sound level");
    assert!((full - 90.0103 - 10.0 * 12.5f64.log10()).abs() < 5e-5);
    assert!((level(&link_to(HEADPHONE), (1e-3f64 * 32.0).sqrt()) - 100.0).abs() < 1e-9);
    assert!(link_to(LINE).sound().is_none());
}

#[test]
fn incomplete_outputs_are_refused() {
    for (text, wanted) in [
        (SPEAKER.replace("impedance = \"8 Ω\"\n", ""), "impedance"),
        (format!("{HEADPHONE}resonance = \"60 Hz\"\n"), "quality"),
    ] {
        let error = try_link("", "", &text)
            .err()
            .map(|e| e.to_string())
            .unwrap_or_default();
        assert!(error.contains(wanted), "{error}");
    }
}

/// The cautions stand on the terminal and in the document, with the levels they speak of.
#[test]
fn cautions_are_reported() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("loud.toml");
    std::fs::write(&file, text("", "", SPEAKER)).unwrap();
    let measure = |more: &[&str]| {
        let mut command = Command::new(env!("CARGO_BIN_EXE_harklight"));
        let output = command
            .arg("measure")
            .arg(&file)
            .args(more)
            .output()
            .unwrap();
        assert!(
            output.status.success(),
            "{}",
            String::from_utf8_lossy(&output.stderr)
        );
        String::from_utf8(output.stdout).unwrap()
    };
    let terminal = measure(&[]);
    assert!(terminal.contains("Cautions") && terminal.contains("NIOSH 98-126"));
    let document: serde_json::Value = serde_json::from_str(&measure(&["--json"])).unwrap();
    let cautions = document["cautions"].as_array().unwrap();
    assert!(
        cautions
            .iter()
            .any(|c| c.as_str().unwrap().contains("H.870"))
    );
    assert!(
        cautions
            .last()
            .unwrap()
            .as_str()
            .unwrap()
            .contains("licensed practice")
    );
    let volts = document["figures"]["signal_rms_v"].as_f64().unwrap();
    let expected = 87.0 + 10.0 * (volts * volts / 8.0).log10() + 20.0 * 2f64.log10();
    assert!((document["sound"]["tone_level_db"].as_f64().unwrap() - expected).abs() < 1e-9);
}
