//! Gains, poles, levels and loading against hand formulas (Gray and Meyer, common emitter) and nodal arithmetic.

use super::bench::*;
use harklight::station::Limit;
use num_complex::Complex64;
use std::f64::consts::TAU;

const AMP: &str = "transmitter.stage.amp";

#[test]
fn gain_tends_to_the_ratio_of_resistors() {
    let part = IDEAL.replace("gain = 200", "gain = 1e12");
    let link = link(0.0, &stage(&usual(0.0), &part), SINK, &[]);
    let r_e = V_T / 1e-3;
    near(at(&link, AMP).transfer(1e3).re, -4.7e3 / (r_e + 1e3), 1e-9);
    // Bypassed: −g_m·R_c.
    let link = super::bench::link(0.0, &stage(&usual(1.0), &part), SINK, &[]);
    near(at(&link, AMP).transfer(1e3).re, -4.7e3 / r_e, 1e-9);
}

#[test]
fn the_early_effect_and_the_load_stand_across_the_collector_resistor() {
    let part = IDEAL.replace("early_voltage = \"inf\"", "early_voltage = \"80 V\"");
    let stages = stage(&usual(1.0), &part) + &coupling("100 µF");
    let link = link(0.0, &stages, &loaded_sink(), &[]);
    // V_CE at rest: 9 − 4.7 − 1.005 V.
    let r_o = (80.0 + 3.295) / 1e-3;
    let together = 1.0 / (1.0 / 4.7e3 + 1.0 / r_o + 1.0 / 10e3);
    near(
        at(&link, AMP).transfer(1e4).re,
        -together * 1e-3 / V_T,
        1e-4,
    );
    near(
        reading(at(&link, AMP), "output resistance"),
        4.7e3 * r_o / (4.7e3 + r_o),
        1e-9,
    );
}

#[test]
fn the_rest_is_that_of_the_schematic() {
    let link = link(
        600.0,
        &(coupling("1 µF") + &stage(&usual(0.8), REAL)),
        SINK,
        &[],
    );
    let amp = at(&link, AMP);
    near(reading(amp, "collector current"), 1e-3, 1e-12);
    near(reading(amp, "output"), 9.0 - 4.7, 1e-12);
    near(
        reading(amp, "collector to emitter"),
        9.0 - 4.7 - 1.005,
        1e-12,
    );
    let v_be = V_T * (1e-3 / (7e-15 * (1.0 + 3.295 / 80.0)) + 1.0f64).ln();
    near(reading(amp, "base"), 1.005 + v_be, 1e-12);
    // 47 kΩ ∥ (r_b + r_π + (β + 1)·200 Ω).
    let input = 200.0 + 200.0 * V_T / 1e-3 + 201.0 * 200.0;
    near(
        reading(amp, "input resistance"),
        47e3 * input / (47e3 + input),
        1e-9,
    );
    let coupled = at(&link, "transmitter.stage.1");
    near(reading(coupled, "voltage across"), -(1.005 + v_be), 1e-9);
    assert!(link.warnings().iter().all(|w| !w.contains(AMP)));
}

/// Cut-off and saturation along the load line, with a load behind a capacitor.
#[test]
fn the_collector_stops_where_the_load_line_ends() {
    let stages = stage(&usual(0.8), REAL) + &coupling("100 µF");
    let link = link(100.0, &stages, &loaded_sink(), &[]);
    let amp = at(&link, AMP);
    let z = 4.7e3 * 10e3 / 14.7e3;
    near(amp.curve(-50.0), 1e-3 * z, 1e-12);
    // V_CE falls by 3.295 − 0.2 V over z and the 200 Ω, short of what an overdriven base lifts the emitter.
    let down = -(3.295 - 0.2) * z / (z + 200.0);
    near(amp.curve(0.25), down, 1e-2);
    assert!(amp.curve(0.5) > amp.curve(0.25));
    let limits = amp.limits();
    assert_eq!(limits.len(), 2);
    for limit in limits {
        match limit {
            Limit::Level {
                cause: "cut-off",
                at,
            } => near(at, 1e-3 * z, 1e-12),
            Limit::Level {
                cause: "saturation",
                at,
            } => near(at, down, 1e-9),
            other => panic!("{other:?}"),
        }
    }
    let mut runner = amp.runner(&quiet(RATE));
    runner.run(&mut tone(1e3, 0.05, 3840), &[]);
    assert_eq!(runner.events().clipped, 0);
    runner.run(&mut tone(1e3, 1.0, 3840), &[]);
    assert!(runner.events().clipped > 1000);
}

/// The exact two-node circuit, r_π ∥ C_π and C_µ around g_m, against the one pole and the node's lag: inside 0.1 dB and 1° to
/// 20 kHz for poles down to 40 kHz; and the pole itself is Miller's.
#[test]
fn the_input_pole_is_millers() {
    for (source, f_t, c_mu) in [
        (600.0, 300e6, 4e-12),
        (10e3, 300e6, 4e-12),
        (5e3, 20e6, 9e-12),
    ] {
        let part = IDEAL
            .replace("\"inf\"\ncoll", &format!("{f_t}\ncoll"))
            .replace(
                "collector_capacitance = 0",
                &format!("collector_capacitance = {c_mu}"),
            )
            .replace("base_resistance = 0", "base_resistance = 200");
        let keys = usual(1.0).replace("bias_resistance = \"47 kΩ\"\n", "");
        let link = link(source, &stage(&keys, &part), SINK, &[]);
        let amp = at(&link, AMP);
        let (gm, r_pi, load) = (1e-3 / V_T, 200.0 * V_T / 1e-3, 4.7e3);
        let c_pi = gm / (TAU * f_t);
        let r = source + 200.0;
        let miller = 1.0 / (TAU * (r * r_pi / (r + r_pi)) * (c_pi + c_mu * (1.0 + gm * load)));
        near(reading(amp, "input pole"), miller, 1e-9);
        for f in [100.0, 1e3, 5e3, 10e3, 20e3] {
            let s = Complex64::new(0.0, TAU * f);
            // Base: (v − b)/r = b/r_π + sC_π·b + sC_µ(b − c). Collector: sC_µ(b − c) = g_m·b + c/R.
            let y = 1.0 / r + 1.0 / r_pi + s * (c_pi + c_mu);
            let exact =
                (s * c_mu - gm) / r / (y * (1.0 / load + s * c_mu) - s * c_mu * (s * c_mu - gm));
            let ratio = amp.transfer(f) / exact;
            let (db, degrees) = (20.0 * ratio.norm().log10(), ratio.arg().to_degrees());
            assert!(
                db.abs() < 0.1 && degrees.abs() < 1.0,
                "{source} {f}: {db} {degrees}"
            );
        }
    }
}

/// Two stages with couplings: more than ten thousand over the audio band, each loading the other as by hand.
#[test]
fn two_stages_make_ten_thousand() {
    let named = |name: &str| stage(&usual(1.0), REAL).replace("\"amp\"", &format!("\"{name}\""));
    let stages =
        coupling("10 µF") + &named("one") + &coupling("10 µF") + &named("two") + &coupling("10 µF");
    let link = link(
        100.0,
        &stages,
        &SINK.replace("sense", "input_resistance = \"100 kΩ\"\nsense"),
        &[],
    );
    let row = &link.stations()[1..6];
    let gain = |f: f64| -> Complex64 { row.iter().map(|s| s.transfer(f)).product() };
    assert!(gain(1e3).re > 1e4, "{}", gain(1e3));
    // By hand in mid-band.
    let (gm, r_pi, r_o) = (1e-3 / V_T, 200.0 * V_T / 1e-3, 83.295e3);
    let parallel = |list: &[f64]| 1.0 / list.iter().map(|r| 1.0 / r).sum::<f64>();
    let input = parallel(&[47e3, 200.0 + r_pi]);
    let inner = r_pi / (200.0 + r_pi);
    let first = input / (100.0 + input) * inner * gm * parallel(&[4.7e3, r_o, input]);
    let second = inner * gm * parallel(&[4.7e3, r_o, 100e3]);
    near(gain(1e3).re, first * second, 2e-3);
    // Band: −3 dB below 30 Hz and above 20 kHz.
    assert!(gain(30.0).norm() > 0.707 * gain(1e3).norm());
    assert!(gain(20e3).norm() > 0.707 * gain(1e3).norm());
    let mut signal = tone(1e3, 10e-6, 384 * 400);
    for station in row {
        station.runner(&quiet(RATE)).run(&mut signal, &[]);
    }
    let settled = &signal[384 * 390..];
    let ratio = phasor(settled, 1e3) / Complex64::new(0.0, -10e-6) / gain(1e3);
    assert!((ratio - 1.0).norm() < 2e-3, "{ratio}");
}

/// A bent base current charges the capacitor before it: under two V_T and a divider of infinite resistance the collector's mean
/// stays at its rest, where a stiff base would lift it to I₀(2) = 2.28 of that.
#[test]
fn the_mean_base_current_stays_where_the_divider_holds_it() {
    let keys = "supply = \"9 V\"\nbias = \"1 mA\"\ncollector_resistor = \"100 Ω\"\nemitter_resistor = 0\nbypassed = 0\n";
    let link = link(1.0, &(coupling("1 µF") + &stage(keys, IDEAL)), SINK, &[]);
    let mut signal = tone(1e3, 2.0 * V_T, 384 * 400);
    for path in ["transmitter.stage.1", AMP] {
        at(&link, path).runner(&quiet(RATE)).run(&mut signal, &[]);
    }
    let settled = &signal[384 * 390..];
    let mean = settled.iter().sum::<f64>() / settled.len() as f64;
    assert!(mean.abs() < 1e-3 * 0.1, "{mean}");
    // The fundamental is then 2·I₁(x)/I₀(x) of the rest (tests/data/harmonics.csv: 1.39555 for x = 2).
    near(phasor(settled, 1e3).norm(), 0.1 * 1.39555, 1e-2);
}

#[test]
fn what_an_engineer_would_want_to_know_is_said() {
    let says = |edit: &str, part: &str, coupled: bool, word: &str| {
        let first = if coupled {
            coupling("1 µF")
        } else {
            String::new()
        };
        let link = link(600.0, &(first + &stage(&usual(0.8), part)), SINK, &[edit]);
        let found = link
            .warnings()
            .iter()
            .any(|w| w.contains(AMP) && w.contains(word));
        assert!(found, "{word}: {:?}", link.warnings());
        link
    };
    let link = says(
        "transmitter.stage.amp.bias=3 mA",
        REAL,
        true,
        "saturated at rest",
    );
    let amp = at(&link, AMP);
    // 9 V over 4.7 kΩ and 1 kΩ, less the least voltage and what the base lets flow through the emitter resistor.
    near(
        reading(amp, "collector current"),
        (9.0 - 0.2 - 15e-6 * 1e3) / 5.7e3,
        1e-9,
    );
    assert!(amp.transfer(1e3).norm() < 1.0);
    says(
        "transmitter.stage.amp.emitter_resistor=10 MΩ",
        REAL,
        true,
        "no divider",
    );
    says(
        "transmitter.stage.amp.bias=1 mA",
        REAL,
        false,
        "no coupling capacitor",
    );
    says(
        "transmitter.stage.amp.collector_capacitance=1 nF",
        REAL,
        true,
        "inside the audio band",
    )
    .warnings();
    says(
        "transmitter.stage.amp.transition_frequency=100 kHz",
        REAL,
        true,
        "below the model's range",
    );
}
