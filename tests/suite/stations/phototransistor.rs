//! The phototransistor against the Ebers–Moll table, closed forms of its speed, storage and noise, and independent integrations.

use super::bench::{
    Golden, Head, contract, corner, front, near, quiet, reading, run, second_order,
    settles_on_curve, two_faces,
};
use harklight::physics::constants::thermal_voltage;

/// A transistor of constant gain without Early effect and without charge.
const IDEAL: &str = r#"kind = "phototransistor"
gain = 300
gain_low_current = 0
gain_high_current = "inf"
saturation_current = "1e-14 A"
reverse_gain = 5
early_voltage = "inf"
transit_time = 0
emitter_capacitance = 0
collector_capacitance = 0
"#;

/// The one of the golden files.
const REAL: &str = r#"kind = "phototransistor"
gain = 400
gain_low_current = "3 µA"
gain_high_current = "30 mA"
saturation_current = "20 fA"
reverse_gain = 3
early_voltage = "60 V"
transit_time = "1.5 ns"
emitter_capacitance = "6 pF"
collector_capacitance = "4 pF"
"#;

fn head(detector: &str, edits: &[(&str, &str)], supply: f64, load: f64, flux: f64) -> Head {
    let detector = detector
        .lines()
        .map(|line| {
            let key = line.split(" =").next().unwrap();
            let edit = edits.iter().find(|e| e.0 == key);
            edit.map_or(line.to_owned(), |(k, v)| format!("{k} = {v}")) + "\n"
        })
        .collect();
    Head {
        detector,
        front_end: format!("supply = {supply}\nload = {load}\n"),
        flux,
        behind: None,
        temperature: 300.0,
    }
}

/// tests/data/phototransistor_em.csv (Ebers and Moll 1954, transport form, computed apart) leaves the primary photocurrent out of
/// the collector lead, where it flows as well: the load is chosen to carry both at the table's voltage.
#[test]
fn saturation_points_of_the_table() {
    let text = include_str!("../../data/phototransistor_em.csv");
    let mut rows = 0;
    for line in text.lines().filter(|l| l.starts_with(char::is_numeric)) {
        let row: Vec<f64> = line.split(',').map(|x| x.parse().unwrap()).collect();
        let (light, voltage, current) = (row[0], row[1], row[2]);
        near((5.0 - voltage) / 10e3, current, 2e-6);
        let load = (5.0 - voltage) / (current + light);
        let link = head(IDEAL, &[("gain", "200")], 5.0, load, light).link();
        let found = reading(front(&link), "collector-emitter voltage");
        // Six digits of the voltage, and in the active region six of the current across the load.
        assert!(
            (found - voltage).abs() < 2e-6 * (5.0 - voltage) + 1e-6 * voltage,
            "{light}: {found}"
        );
        rows += 1;
    }
    assert_eq!(rows, 7);
}

/// Rise time 2.2·β·R_L·C_cb of the load and the Miller-multiplied capacitance (handbook formula): β 300, 5 pF: 3.3 µs, 106 kHz at
/// 1 kΩ; 33 µs, 10.6 kHz at 10 kΩ. The formula leaves out β + 1 for β and C_cb·r_π: 1 % together at this bias.
#[test]
fn bandwidth_falls_as_the_load_grows() {
    for (load, supply, rise, hertz) in [(1e3, 50.0, 3.3e-6, 106e3), (10e3, 500.0, 33e-6, 10.6e3)] {
        let head = head(
            IDEAL,
            &[("collector_capacitance", "\"5 pF\"")],
            supply,
            load,
            60e-6,
        );
        let link = head.link();
        let model = front(&link);
        near(corner(model), hertz, 0.015);
        near(reading(model, "corner"), hertz, 0.015);
        // In time: a small step, from 10 to 90 %.
        let rate = 1000.0 / rise;
        let step = run(model, &quiet(rate), &vec![0.6e-6; 6000]);
        let last = step[5999];
        let reach = |share: f64| step.iter().position(|y| y / last > share).unwrap() as f64;
        near((reach(0.9) - reach(0.1)) / rate, rise, 0.015);
    }
}

/// Charge control with one lifetime τ_B = τ_F·β (Beaufoy and Sparkes 1957): after the light ends the base charge falls as
/// e^(−t/τ_B) whatever the collector does, so that the collector current returns to I at t = τ_B·ln(β·I_ph/I), storage included.
#[test]
fn saturation_stores_charge() {
    for (load, light) in [(1e3, 200e-6), (10e3, 20e-6), (10e3, 400e-6)] {
        let model = head(IDEAL, &[("transit_time", "\"2 ns\"")], 5.0, load, light).link();
        let model = front(&model);
        let (rate, lifetime) = (1e9, 300.0 * 2e-9);
        let off = run(model, &quiet(rate), &vec![-light; 6000]);
        let rest = reading(model, "output");
        let half = off.iter().position(|y| rest + y > 2.5).unwrap() as f64 / rate;
        let expected = lifetime * (300.0 * light / (2.5 / load)).ln();
        assert!(
            (half - expected).abs() < 2.0 / rate + 1e-3 * lifetime,
            "{load}, {light}: {half:e} against {expected:e}"
        );
    }
}

/// S_ic = 2q·I_C(1 + 2β) with a floating base (after de La Moneda, Chenette and van der Ziel 1971). It leaves the primary
/// photocurrent out of the collector lead, in which its own noise counts (β + 1)² here.
#[test]
fn noise_of_a_floating_base() {
    for (gain, current, pico) in [
        (100.0, 1e-3, 253.786),
        (300.0, 0.1e-3, 138.774),
        (500.0, 1e-3, 566.353),
    ] {
        let text = gain.to_string();
        let light = current / gain;
        let link = head(IDEAL, &[("gain", &text)], 10.0, 10.0, light).link();
        let model = front(&link);
        // The base–collector junction's own leakage I_s/β_R is amplified as the photocurrent is.
        let leakage = 1e-14 * (1.0 + (gain + 2.0) / 5.0);
        near(
            reading(model, "collector current"),
            current + light,
            1e-9 + leakage / current,
        );
        let density: f64 = model
            .noise(1e3)
            .iter()
            .map(|share| match share.name.as_str() {
                "receiver.detector.shot" => share.density * (gain / (gain + 1.0f64)).powi(2),
                "receiver.detector.base_shot" | "receiver.detector.collector_shot" => share.density,
                _ => 0.0,
            })
            .sum();
        near(density.sqrt() / 10.0 * 1e12, pico, 2e-6);
    }
}

/// At one collector current a resistor from base to emitter divides gain by 1 + r_π/R_b, r_π = β·V_T/I_C, and multiplies the
/// bandwidth by it, as both come from one base conductance (common practice: less gain, more speed). It also takes V_BE/R_b of the
/// photocurrent.
#[test]
fn base_resistor_lowers_gain_and_raises_speed() {
    let constant = [
        ("gain_low_current", "0"),
        ("gain_high_current", "\"inf\""),
        ("early_voltage", "\"inf\""),
    ];
    let mut loaded = head(REAL, &constant, 9.0, 1e3, 8e-6);
    loaded.detector += "base_resistor = \"100 kΩ\"\n";
    let loaded = loaded.link();
    let loaded = front(&loaded);
    let lead = reading(loaded, "collector current");
    let vt = thermal_voltage(300.0);
    let lost = vt * (lead / 20e-15).ln() / 100e3;
    near(lead, 400.0 * (8e-6 - lost) + 8e-6, 0.01);

    let collector = lead - 8e-6;
    let bare = head(REAL, &constant, 9.0, 1e3, collector / 400.0).link();
    let bare = front(&bare);
    let less = 1.0 + 400.0 * vt / collector / 100e3;
    assert!(less > 1.1, "{less}");
    near(
        bare.transfer(1.0).norm() / loaded.transfer(1.0).norm(),
        less,
        0.01,
    );
    near(corner(loaded) / corner(bare), less, 0.01);
}

#[test]
fn equal_detectors_in_parallel_are_one_of_that_size() {
    let mut several = head(REAL, &[], 9.0, 1e3, 8e-6);
    several.detector += "base_resistor = \"2 MΩ\"\ncount = 4\n";
    let mut one = head(
        REAL,
        &[
            ("gain_low_current", "\"12 µA\""),
            ("gain_high_current", "\"120 mA\""),
            ("saturation_current", "\"80 fA\""),
            ("emitter_capacitance", "\"24 pF\""),
            ("collector_capacitance", "\"16 pF\""),
        ],
        9.0,
        1e3,
        8e-6,
    );
    one.detector += "base_resistor = \"500 kΩ\"\n";
    let (several, one) = (several.link(), one.link());
    let (several, one) = (front(&several), front(&one));
    near(reading(several, "output"), reading(one, "output"), 1e-9);
    for f in [1e3, 50e3] {
        let ratio = several.transfer(f) / one.transfer(f);
        assert!((ratio - 1.0).norm() < 1e-9);
        for (a, b) in several.noise(f).iter().zip(one.noise(f)) {
            near(a.density, b.density, 1e-9);
        }
    }
}

/// The golden designs, by file: the head, the swing of the light, harmonics that the corner of saturation has.
fn golden() -> [(&'static str, Head, f64, f64); 3] {
    let case = |load, flux| Head {
        temperature: 293.15,
        ..head(REAL, &[], 9.0, load, flux)
    };
    let mut last = case(100e3, 0.25e-6);
    last.detector += "base_resistor = \"20 MΩ\"\n";
    last.front_end += "capacitance = \"10 pF\"\nload_at = \"emitter\"\n";
    last.behind = Some((470e3, 10e-9));
    [
        ("phototransistor_1k", case(1e3, 5e-6), 4e-6, 1.0),
        ("phototransistor_10k", case(10e3, 1.6e-6), 1.4e-6, 5.0),
        ("phototransistor_100k", last, 0.15e-6, 5.0),
    ]
}

/// tests/golden/make_detectors.py: active throughout; into saturation and out of it; the same with a branch and a base resistor.
#[test]
fn agrees_with_independent_integrations() {
    for (file, head, swing, harmonics) in golden() {
        let golden = Golden::read(file);
        let link = head.link();
        let model = front(&link);
        let drop = golden.column("u_V")[0];
        let output = if file.ends_with("100k") {
            drop
        } else {
            9.0 - drop
        };
        near(reading(model, "output"), output, 1e-10);
        let coarse = golden.error(model, "u_V", swing, 1);
        let fine = golden.error(model, "u_V", swing, 4);
        let allowed = second_order(harmonics);
        assert!(coarse < allowed, "{file}: {coarse:e}, allowed {allowed:e}");
        assert!(fine < coarse / 8.0, "{file}: {coarse:e}, then {fine:e}");
    }
}

#[test]
fn both_faces_agree() {
    for (file, head, swing, _) in golden() {
        let link = head.link();
        two_faces(file, front(&link), 1e-3 * swing);
    }
    for (name, load, flux) in [
        ("saturated", 10e3, 20e-6),
        ("starved", 100e3, 9e-9),
        ("bright", 100.0, 100e-6),
    ] {
        let link = head(REAL, &[], 9.0, load, flux).link();
        two_faces(name, front(&link), 1e-4 * flux);
    }
    // Algebra.
    let link = head(IDEAL, &[], 9.0, 1e3, 10e-6).link();
    two_faces("no charge", front(&link), 1e-9);
}

#[test]
fn runs_keep_their_contract() {
    for (file, head, swing, _) in golden() {
        let link = head.link();
        contract(file, front(&link), (-2.0 * swing, 50.0 * swing));
        if head.behind.is_none() {
            settles_on_curve(file, front(&link), (-2.0 * swing, 20.0 * swing));
        }
    }
    for load in [10.0, 1e3, 1e8] {
        for flux in [1e-15, 1e-6, 1e-2] {
            for part in [REAL, IDEAL] {
                let link = head(part, &[], 9.0, load, flux).link();
                let name = format!("{load} Ω, {flux} W");
                contract(&name, front(&link), (-2.0 * flux, 10.0 * flux));
            }
        }
    }
}

/// From sun to darkness and back within a sample, the drop stays between the rails, but for the photovoltage beyond them.
#[test]
fn a_cut_beam_leaves_no_overshoot() {
    for rate in [64e3, 384e3] {
        for load in [10.0, 1e3, 100e3, 100e6] {
            let link = head(REAL, &[], 9.0, load, 5e-3).link();
            let model = front(&link);
            let rest = reading(model, "output");
            let cut: Vec<f64> = (0..400)
                .map(|n| if n / 50 % 2 == 1 { -5e-3 } else { 0.0 })
                .collect();
            for y in run(model, &quiet(rate), &cut) {
                let voltage = rest + y;
                assert!((-0.3..9.3).contains(&voltage), "{rate}, {load}: {voltage}");
            }
        }
    }
}

#[test]
fn states_are_named_with_their_numbers() {
    let state = |load, flux| {
        let link = head(REAL, &[], 9.0, load, flux).link();
        let model = front(&link);
        (
            model.title(),
            model.warnings(),
            reading(model, "room before saturation"),
        )
    };
    let (title, warnings, room) = state(1e3, 5e-6);
    assert!(
        title.ends_with("active") && warnings.is_empty() && room > 6.0,
        "{title} {warnings:?} {room}"
    );
    let (title, warnings, room) = state(10e3, 50e-6);
    assert!(
        title.ends_with("saturated") && warnings[0].contains("50 µA of photocurrent") && room < 0.0,
        "{title} {warnings:?} {room}"
    );
    let (title, warnings, _) = state(1e3, 5e-9);
    assert!(
        title.ends_with("starved") && warnings[0].contains("7.5 nA"),
        "{title} {warnings:?}"
    );
}
