//! The measured light–current curve.

use super::*;

fn points(points: &[[f64; 2]]) -> String {
    let list: Vec<String> = points
        .iter()
        .map(|[i, p]| format!("[{i:e}, {p:e}]"))
        .collect();
    format!("[{}]", list.join(", "))
}

/// The bench's text with a curve in place of its flux law.
fn text(curve: &str) -> String {
    let law =
        "flux = \"12 mW\"\nat_current = \"50 mA\"\nlow_current = 0\ndroop_current = \"0.2 A\"\n";
    assert!(DESIGN.contains(law));
    DESIGN.replace(law, &format!("curve = {curve}\n"))
}

/// P = ηI/(1 + I/0.2 A) through 12 mW at 50 mA, the bench's law.
fn law(i: f64) -> f64 {
    0.24 * 1.25 * i / (1.0 + i / 0.2)
}

fn dense() -> String {
    let all: Vec<[f64; 2]> = (1..=400)
        .map(|k| 0.25e-3 * f64::from(k))
        .map(|i| [i, law(i)])
        .collect();
    points(&all)
}

/// Dense points of the law give the law's rest, static curve and second harmonic, and count and heat act on them alike.
#[test]
fn dense_points_of_the_law_are_the_law() {
    for sets in [
        &[][..],
        &["transmitter.emitter.count=2"],
        &["transmitter.emitter.thermal_resistance=300 K/W"],
    ] {
        let (curve, analytic) = (link_of(&text(&dense()), sets), link(sets));
        let (curve, analytic) = (station(&curve, HEAD), station(&analytic, HEAD));
        assert!((reading(curve, "flux") / reading(analytic, "flux") - 1.0).abs() < 1e-7);
        for x in [-1.4, -0.5, 0.1, 1.0, 3.0] {
            let off = (curve.curve(x) - analytic.curve(x)).abs();
            assert!(off < 1e-7 * 12e-3, "{x}: {off}");
        }
        let h = |m: &dyn Model| {
            let h = harmonics(m, &quiet(RATE), 1e3, 0.5, 0.05, 3);
            [h[1] / h[0], h[2] / h[0]]
        };
        let (one, other) = (h(curve), h(analytic));
        assert!((one[0] / other[0] - 1.0).abs() < 1e-4, "{one:?} {other:?}");
        assert!((one[1] / other[1] - 1.0).abs() < 1e-2, "{one:?} {other:?}");
    }
}

#[test]
fn points_are_met_at_rest_and_the_end_is_told() {
    let curve = "[[0, 0], [\"30 mA\", \"5 mW\"], [\"60 mA\", \"9 mW\"]]";
    let link = link_of(&text(curve), &[]);
    let head = station(&link, HEAD);
    assert!((reading(head, "flux") - 5e-3).abs() < 1e-12);
    assert!((head.curve(1.5) - 4e-3).abs() < 1e-12);
    assert_eq!(link.measured_to(), Some(60e-3));
    assert!(head.warnings().is_empty());
    follows_its_transfer("curve", head, &quiet(RATE), 1e-4);
    let beyond = link_of(&text(curve), &["transmitter.driver.bias=70 mA"]);
    let warnings = station(&beyond, HEAD).warnings();
    assert!(
        warnings[0].contains("beyond its curve, which ends at 60 mA"),
        "{warnings:?}"
    );
}

#[test]
fn curves_that_no_emitter_has_are_refused_at_their_line() {
    for (curve, message) in [
        ("[[\"10 mA\", \"1 mW\"]]", "at least two pairs"),
        (
            "[[\"10 mA\", \"1 mW\"], [\"10 mA\", \"2 mW\"]]",
            "must rise",
        ),
        (
            "[[\"10 mA\", \"2 mW\"], [\"20 mA\", \"1 mW\"]]",
            "falls from 2 mW at 10 mA to 1 mW at 20 mA",
        ),
        (
            "[[0, \"1 mW\"], [\"20 mA\", \"2 mW\"]]",
            "1 mW at no current",
        ),
        ("[[\"10 mA\", 0], [\"20 mA\", 0]]", "no light in it"),
        ("[[\"10 mA\", \"1 V\"], [\"20 mA\", 0]]", "curve"),
    ] {
        let error = read(&text(curve), &[])
            .err()
            .unwrap_or_else(|| panic!("accepted {curve}"));
        assert!(error.to_string().contains(message), "{error:?}");
        let line = DESIGN
            .lines()
            .position(|l| l.starts_with("flux ="))
            .map(|n| n + 1);
        assert_eq!(error.line(), line, "{error:?}");
    }
    let both = read(&text(&dense()), &["transmitter.emitter.flux=1 mW"]);
    assert!(both.unwrap_err().to_string().contains("exclude each other"));
    // A part's law gives way to a curve of one's own.
    let part = read(&text(&dense()), &["transmitter.emitter.part=red-led"]).unwrap();
    assert!(!part.emitter.given("flux") && part.emitter.given("curve"));
}
