//! Distortion of the exponential (tests/data/harmonics.csv: Clarke and Hess 1971, Bessel functions) and what feedback leaves of it.

use super::bench::{IDEAL, SINK, V_T, at, harmonics, link, near, stage};

/// 1 mA into 10 Ω: the collector never moves by more than a volt or two.
fn exponential(source: f64, emitter: &str, part: &str) -> harklight::link::Link {
    let keys = format!(
        "supply = \"9 V\"\nbias = \"1 mA\"\ncollector_resistor = \"10 Ω\"\nemitter_resistor = \"{emitter}\"\nbypassed = 0\n"
    );
    link(source, &stage(&keys, part), SINK, &[])
}

/// (x, HD2, HD3, THD) of exp(x·cos) from the table.
fn table() -> Vec<(f64, f64, f64, f64)> {
    let text = include_str!("../../../data/harmonics.csv");
    let value = |x: &str, what: &str| {
        let start = format!("exp,x={x} {what}");
        let line = text.lines().find(|l| l.starts_with(&start)).unwrap();
        line.rsplit(',').next().unwrap().parse::<f64>().unwrap()
    };
    ["0.01", "0.1", "0.2", "0.5", "1", "2", "5"]
        .iter()
        .map(|x| {
            (
                x.parse().unwrap(),
                value(x, "HD2"),
                value(x, "HD3"),
                value(x, "THD_F"),
            )
        })
        .collect()
}

/// A stiff source without r_b leaves the base current no say: the table holds to its six digits at any gain.
#[test]
fn a_voltage_driven_base_distorts_as_the_exponential() {
    let link = exponential(0.0, "0 Ω", IDEAL);
    let amp = at(&link, "transmitter.stage.amp");
    for (x, hd2, hd3, thd) in table() {
        let h = harmonics(amp, x * V_T, 40);
        near(h[1] / h[0], hd2, 5e-6);
        near(h[2] / h[0], hd3, 5e-6);
        let rest: f64 = h[1..].iter().map(|a| a * a).sum();
        near(rest.sqrt() / h[0], thd, 5e-6);
    }
}

/// A resistance that the current flows through, R_b/β or R_E, divides HD2 by (1 + g_m·R)² at a given base voltage
/// (Gray and Meyer; from v = V_T·ln(1 + d) + a·d: HD2 = V₁V_T/4(V_T + a)²).
#[test]
fn resistance_straightens_the_base() {
    let v = 1e-3;
    for (source, emitter, ohms, part) in [
        (
            0.0,
            "0 Ω",
            200.0 / 200.0,
            IDEAL.replace("base_resistance = 0", "base_resistance = 200"),
        ),
        (10e3, "0 Ω", 10e3 / 200.0, IDEAL.into()),
        (0.0, "100 Ω", 100.0 * 201.0 / 200.0, IDEAL.into()),
        (
            1e6,
            "100 Ω",
            1e6 / 200.0 + 100.0 * 201.0 / 200.0,
            IDEAL.into(),
        ),
    ] {
        let link = exponential(source, emitter, &part);
        let h = harmonics(at(&link, "transmitter.stage.amp"), v, 2);
        let a = 1e-3 * ohms;
        near(h[1] / h[0], v * V_T / (4.0 * (V_T + a) * (V_T + a)), 2e-3);
    }
}

/// What a stage hears through a coupling capacitor is the node under its own small-signal load; the source's resistance has to
/// come back out of it. Behind 1 MΩ the collector follows the current, though the base's voltage bends.
#[test]
fn a_current_drives_straight() {
    let keys = "supply = \"9 V\"\nbias = \"2 mA\"\ncollector_resistor = \"100 Ω\"\nemitter_resistor = 0\nbypassed = 0\n";
    let stages = super::bench::coupling("100 µF") + &stage(keys, IDEAL);
    let link = link(1e6, &stages, SINK, &[]);
    let (a, b) = (
        at(&link, "transmitter.stage.1"),
        at(&link, "transmitter.stage.amp"),
    );
    // 5 V peak behind 1 MΩ: 5 µA on a rest of 10 µA, half of the way to cut-off.
    let v = 5.0 * a.transfer(1e3).norm();
    let h = harmonics(b, v, 3);
    near(h[0], 100.0 * 200.0 * 5e-6, 6e-3);
    let (r_base, r_pi) = (1e6, V_T / 10e-6);
    let loop_share = r_pi / (r_base + r_pi);
    // HD2 of what is left: a quarter of the modulation times r_π's share of the loop, to first order in a modulation of a half.
    near(h[1] / h[0], 0.5 * loop_share / 4.0, 0.2);
    // The same node voltage taken for a stiff source would distort as exp(0.5) does and worse.
    assert!(h[1] / h[0] < 1e-3);
}
