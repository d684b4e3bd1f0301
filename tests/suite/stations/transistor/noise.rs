//! Noise against the textbook's sums.

use super::bench::*;
use harklight::link::Link;

const AMP: &str = "transmitter.stage.amp";
const K_T4: f64 = 4.0 * 1.380_649e-23 * 293.15;
const Q2: f64 = 2.0 * 1.602_176_634e-19;

fn share(link: &Link, path: &str, cause: &str, f: f64) -> f64 {
    let name = format!("{path}.{cause}");
    let shares = at(link, path).noise(f);
    let found = shares.iter().find(|s| s.name == name);
    found
        .unwrap_or_else(|| panic!("no {name} in {shares:?}"))
        .density
}

/// Each contributor by hand, referred to the source (Gray and Meyer, noise of the common emitter; van der Ziel):
/// 4kT·r_b, 2qI_B(R_s + r_b)², 2qI_C((R_s + r_b + r_π)/β)², 4kT/R_c·((R_s + r_b + r_π)/β)², the divider's (R_s in parallel).
#[test]
fn contributors_are_the_textbooks() {
    let part = REAL
        .replace("early_voltage = \"80 V\"", "early_voltage = \"inf\"")
        .replace("50 MHz", "inf")
        .replace("\"4 pF\"", "0");
    let source = 2e3;
    let link = link(source, &stage(&usual(1.0), &part), SINK, &[]);
    let amp = at(&link, AMP);
    let f = 1e3;
    // Referred to the divided source.
    let divided = 47e3 / (47e3 + source);
    let gain = amp.transfer(f).norm_sqr() / (divided * divided);
    let r_th = source * divided;
    let r_pi = 200.0 * V_T / 1e-3;
    let to_input = (r_th + 200.0 + r_pi) / 200.0;
    for (cause, expected) in [
        ("base_resistance", K_T4 * 200.0),
        ("bias_resistance", K_T4 / 47e3 * r_th * r_th),
        ("base_shot", Q2 * 5e-6 * (r_th + 200.0).powi(2)),
        ("collector_shot", Q2 * 1e-3 * to_input * to_input),
        ("collector_resistor", K_T4 / 4.7e3 * to_input * to_input),
    ] {
        near(share(&link, AMP, cause, f) / gain, expected, 1e-9);
    }
    assert_eq!(share(&link, AMP, "emitter_resistor", f), 0.0);
}

/// With an emitter resistor: its own noise stands in series with the base, the collector's shot is lowered by the feedback.
#[test]
fn the_emitter_resistor_is_a_source_and_a_feedback() {
    let part = REAL.replace("early_voltage = \"80 V\"", "early_voltage = \"inf\"");
    let link = link(600.0, &stage(&usual(0.5), &part), SINK, &[]);
    let gain = (at(&link, AMP).transfer(1e2).norm() * (47.6 / 47.0)).powi(2);
    near(
        share(&link, AMP, "emitter_resistor", 1e2) / gain,
        K_T4 * 500.0,
        1e-4,
    );
    let (r_th, r_pi) = (600.0 * 47.0 / 47.6, 200.0 * V_T / 1e-3);
    let within = r_th + 200.0 + r_pi + 500.0;
    let expected = Q2 * 1e-3 * (within / 200.0).powi(2);
    near(
        share(&link, AMP, "collector_shot", 1e2) / gain,
        expected,
        1e-4,
    );
    let expected = Q2 * 5e-6 * (r_th + 200.0 + 500.0).powi(2);
    near(share(&link, AMP, "base_shot", 1e2) / gain, expected, 1e-4);
}

/// Noise factor at the output of the stations in `row`, from the source's own Johnson noise on.
fn factor(link: &Link, last: usize) -> f64 {
    let f = 5e3;
    let mut total = 0.0;
    for k in 0..=last {
        let onwards: f64 = link.stations()[k + 1..=last]
            .iter()
            .map(|s| s.transfer(f).norm_sqr())
            .product();
        total += link.stations()[k]
            .noise(f)
            .iter()
            .map(|s| s.density)
            .sum::<f64>()
            * onwards;
    }
    let source: f64 = link.stations()[0].noise(f).iter().map(|s| s.density).sum();
    let gain: f64 = link.stations()[1..=last]
        .iter()
        .map(|s| s.transfer(f).norm_sqr())
        .product();
    total / (source * gain)
}

/// White noise factor of the transistor alone (Nielsen 1957; van der Ziel):
/// F = 1 + r_b/R_s + r_e/(2R_s) + (R_s + r_b + r_e)²/(2β·r_e·R_s), good to the order of 1/β.
#[test]
fn the_noise_factor_is_nielsens() {
    for (source, bias) in [(500.0, "1 mA"), (2e3, "100 µA"), (20e3, "20 µA")] {
        let keys = format!(
            "supply = \"900 V\"\nbias = \"{bias}\"\ncollector_resistor = \"1 MΩ\"\nemitter_resistor = 0\nbypassed = 0\n"
        );
        let keys = if bias == "1 mA" {
            keys.replace("900 V", "9 kV")
        } else {
            keys
        };
        let part = REAL.replace("50 MHz", "inf").replace("\"4 pF\"", "0");
        let link = link(source, &(coupling("1 F") + &stage(&keys, &part)), SINK, &[]);
        let current = reading(at(&link, AMP), "collector current");
        let (r_b, r_e, beta) = (200.0, V_T / current, 200.0);
        let expected = 1.0
            + r_b / source
            + r_e / (2.0 * source)
            + (source + r_b + r_e).powi(2) / (2.0 * beta * r_e * source);
        near(factor(&link, 2), expected, 3e-3);
    }
}

/// Friis 1944: F = F₁ + (F₂ − 1)/G₁, G₁ the available gain, over two stages that load each other.
#[test]
fn a_cascade_follows_friis() {
    let keys = |bias: &str| usual(1.0).replace("1 mA", bias);
    let part = REAL.replace("50 MHz", "inf").replace("\"4 pF\"", "0");
    let first = coupling("1 F") + &stage(&keys("200 µA"), &part);
    let second = coupling("1 F") + &stage(&keys("1 mA"), &part).replace("amp", "two");
    let source = 1e3;
    let alone = link(source, &first, SINK, &[]);
    let f1 = factor(&alone, 2);
    let open = alone.stations()[1].transfer(5e3) * alone.stations()[2].transfer(5e3);
    let out = reading(at(&alone, AMP), "output resistance");
    let available = open.norm_sqr() * source / out;
    let f2 = factor(&link(out, &second, SINK, &[]), 2);
    let both = factor(&link(source, &(first + &second), SINK, &[]), 4);
    near(both, f1 + (f2 - 1.0) / available, 1e-4);
    assert!((f2 - 1.0) / available > 1e-4 * f1);
}

/// Below the corner of the coupling capacitor the divider alone stands at the base: i_b = i·(Z ∥ R_B)/(Z ∥ R_B + r_in).
#[test]
fn an_open_source_leaves_the_divider_to_its_noise() {
    let part = IDEAL.replace("base_resistance = 0", "base_resistance = 200");
    let link = link(
        600.0,
        &(coupling("1 µF") + &stage(&usual(0.8), &part)),
        SINK,
        &[],
    );
    let input = 200.0 + 200.0 * V_T / 1e-3 + 201.0 * 200.0;
    for f in [0.5, 5.0, 50.0, 5e3] {
        let s = num_complex::Complex64::new(0.0, std::f64::consts::TAU * f);
        let outside = 1.0 / (1.0 / 47e3 + 1.0 / (600.0 + 1.0 / (s * 1e-6)));
        let expected = K_T4 / 47e3 * (outside / (outside + input) * 200.0 * 4.7e3).norm_sqr();
        near(share(&link, AMP, "bias_resistance", f), expected, 1e-9);
        let expected = K_T4 * 200.0 * (1.0 / (outside + input) * 200.0 * 4.7e3).norm_sqr();
        near(share(&link, AMP, "base_resistance", f), expected, 1e-9);
        // Base shot: i_j(Z + r_in) = −i(Z + r_b + R_E).
        let worth = (outside + 200.0 + 200.0) / (outside + input) * 200.0 * 4.7e3;
        near(
            share(&link, AMP, "base_shot", f),
            Q2 * 5e-6 * worth.norm_sqr(),
            1e-9,
        );
        let loop_ = outside + input - 200.0 * 200.0;
        let worth = loop_ / (outside + input) * 4.7e3;
        near(
            share(&link, AMP, "collector_shot", f),
            Q2 * 1e-3 * worth.norm_sqr(),
            1e-9,
        );
    }
}
