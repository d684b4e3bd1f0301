//! The photovoltaic cell against the single-diode table, its corner, and independent integrations.

use super::bench::{
    Golden, Head, contract, corner, front, near, reading, second_order, settles_on_curve, two_faces,
};

/// Case 1 of the single-diode table at 300 K, its capacitance left out.
const TABLE: &str = r#"kind = "photocell"
saturation_current = "1 nA"
ideality = 1.5
series_resistance = "1 Ω"
shunt_resistance = "10 kΩ"
capacitance = 0
"#;

/// The one of the golden files.
const REAL: &str = r#"kind = "photocell"
saturation_current = "10 pA"
ideality = 1
series_resistance = "20 Ω"
shunt_resistance = "20 kΩ"
capacitance = "30 nF"
"#;

fn head(detector: &str, load: f64, flux: f64) -> Head {
    Head {
        detector: detector.into(),
        front_end: format!("supply = 9\nload = {load}\n"),
        flux,
        behind: None,
        temperature: 300.0,
    }
}

/// Single-diode model into loads (reference values computed apart, six digits).
#[test]
fn loads_of_the_table() {
    for (load, volts) in [
        (100.0, 0.0989989),
        (300.0, 0.290696),
        (1e3, 0.503894),
        (10e3, 0.531328),
    ] {
        let link = head(TABLE, load, 1e-3).link();
        near(reading(front(&link), "output"), volts, 2e-6);
    }
    let link = head(TABLE, 1e3, 1e-3).link();
    near(
        reading(front(&link), "open-circuit voltage"),
        0.533611,
        2e-6,
    );
}

/// 30 nF into 1 kΩ: 5305.16 Hz while the diode's own r_d = n·V_T/I stays out of it; at r_d = 1 kΩ twice that.
#[test]
fn corner_of_the_capacitance() {
    let cell = TABLE
        .replace("capacitance = 0", "capacitance = \"30 nF\"")
        .replace("\"1 Ω\"", "0")
        .replace("\"10 kΩ\"", "\"inf\"")
        .replace("1 nA", "1 fA");
    let link = head(&cell, 1e3, 1e-6).link();
    near(corner(front(&link)), 5305.16, 1e-5);
    // r_d = 1 kΩ where the diode carries n·V_T/1 kΩ = 38.7780 µA at V = n·V_T·ln(I/I_0).
    let (current, voltage) = (38.7780e-6, 0.038778 * (38.7780e-6f64 / 1e-15).ln());
    let link = head(&cell, 1e3, current + voltage / 1e3).link();
    near(corner(front(&link)), 2.0 * 5305.16, 1e-5);
}

#[test]
fn compresses_as_light_grows() {
    let gains: Vec<f64> = [20e-6, 400e-6, 3e-3, 30e-3]
        .into_iter()
        .map(|flux| {
            let link = head(REAL, 1e3, flux).link();
            let model = front(&link);
            let warned = !model.warnings().is_empty();
            assert_eq!(warned, flux > 400e-6, "{flux}: {:?}", model.warnings());
            model.transfer(1.0).norm()
        })
        .collect();
    assert!(gains.windows(2).all(|w| w[1] < w[0]), "{gains:?}");
    // Far up the gain is n·V_T/I_ph (logarithm).
    near(gains[3], 0.025852 / 30e-3, 0.05);
}

fn golden() -> [(&'static str, Head, f64); 3] {
    let case = |flux| Head {
        front_end: "supply = 9\nload = 1000\ncapacitance = \"10 nF\"\n".into(),
        behind: Some((10e3, 100e-9)),
        temperature: 293.15,
        ..head(REAL, 1e3, flux)
    };
    [
        ("photocell_dim", case(20e-6), 16e-6),
        ("photocell_office", case(400e-6), 320e-6),
        ("photocell_sun", case(3e-3), 2.4e-3),
    ]
}

/// tests/golden/make_detectors.py, at three light levels: linear, at the knee, logarithmic. The bent ones have corners.
#[test]
fn agrees_with_independent_integrations() {
    for (file, head, swing) in golden() {
        let golden = Golden::read(file);
        let link = head.link();
        let model = front(&link);
        near(reading(model, "output"), golden.column("u_V")[0], 1e-10);
        let coarse = golden.error(model, "u_V", swing, 1);
        let fine = golden.error(model, "u_V", swing, 4);
        let allowed = second_order(if file == "photocell_dim" { 1.0 } else { 5.0 });
        assert!(coarse < allowed, "{file}: {coarse:e}, allowed {allowed:e}");
        assert!(fine < coarse / 8.0, "{file}: {coarse:e}, then {fine:e}");
    }
}

#[test]
fn both_faces_agree() {
    for (file, head, swing) in golden() {
        let link = head.link();
        two_faces(file, front(&link), 1e-3 * swing);
    }
    for (name, part) in [
        ("no capacitance", TABLE.to_owned()),
        ("no series resistance", REAL.replace("\"20 Ω\"", "0")),
    ] {
        let link = head(&part, 1e3, 100e-6).link();
        two_faces(name, front(&link), 1e-7);
    }
}

#[test]
fn runs_keep_their_contract() {
    for (file, head, swing) in golden() {
        let link = head.link();
        contract(file, front(&link), (-2.0 * swing, 50.0 * swing));
    }
    for load in [10.0, 1e3, 1e8] {
        for flux in [1e-15, 1e-6, 1e-2] {
            for part in [REAL, TABLE] {
                let link = head(part, load, flux).link();
                let name = format!("{load} Ω, {flux} W");
                contract(&name, front(&link), (-2.0 * flux, 10.0 * flux));
            }
        }
    }
    let link = head(REAL, 1e3, 100e-6).link();
    settles_on_curve("1 kΩ", front(&link), (-200e-6, 5e-3));
}

#[test]
fn equal_cells_in_parallel_are_one_of_that_size() {
    let several = head(&format!("{REAL}count = 4\n"), 1e3, 400e-6).link();
    let one = REAL
        .replace("10 pA", "40 pA")
        .replace("\"20 Ω\"", "\"5 Ω\"")
        .replace("20 kΩ", "5 kΩ")
        .replace("30 nF", "120 nF");
    let one = head(&one, 1e3, 400e-6).link();
    let (several, one) = (front(&several), front(&one));
    near(reading(several, "output"), reading(one, "output"), 1e-9);
    let ratio = several.transfer(3e3) / one.transfer(3e3);
    assert!((ratio - 1.0).norm() < 1e-9);
    for (a, b) in several.noise(3e3).iter().zip(one.noise(3e3)) {
        near(a.density, b.density, 1e-9);
    }
}
