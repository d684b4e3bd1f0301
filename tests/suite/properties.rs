//! Designs at random, extremes included: whatever the checks let through runs, and stays finite.

use proptest::prelude::*;
use proptest::sample::select;
use proptest::test_runner::RngSeed;

use crate::bench::Draft;
use harklight::design::Design;
use harklight::link::{Link, budget};
use harklight::render::test_signals::{Bench, measure};
use harklight::station::{Conditions, Curves};

fn words(list: &'static [&'static str]) -> impl Strategy<Value = String> {
    select(list).prop_map(str::to_owned)
}

const OHMS: &[&str] = &["1 mΩ", "1 Ω", "600 Ω", "10 kΩ", "1 MΩ", "100 MΩ"];
const OHMS_OR_NONE: &[&str] = &["0 Ω", "1 Ω", "600 Ω", "10 kΩ", "1 MΩ", "100 MΩ"];
const FARADS: &[&str] = &["1 fF", "10 pF", "1 nF", "100 nF", "10 µF", "1 F"];
const FARADS_OR_NONE: &[&str] = &["0 F", "0.1 pF", "10 pF", "1 nF", "1 µF"];
const SUPPLIES: &[&str] = &["1 V", "3.3 V", "9 V", "48 V", "1 kV"];
const OPAMPS: &[&str] = &[
    "slow-bipolar",
    "low-noise-bipolar",
    "jfet-input",
    "micropower",
];

/// One electrical stage of `side`.
fn stage(side: &'static str) -> impl Strategy<Value = String> {
    let coupling = words(FARADS)
        .prop_map(move |c| format!("[[{side}.stage]]\nkind = \"coupling\"\ncapacitor = \"{c}\"\n"));
    let trim = (words(OHMS), 0.0..=1.0f64, words(&["linear", "audio"])).prop_map(move |(r, w, taper)| {
        format!("[[{side}.stage]]\nkind = \"trim\"\nresistance = \"{r}\"\nwiper = {w}\ntaper = \"{taper}\"\n")
    });
    let opamp = (
        words(&["non-inverting", "inverting"]),
        words(OHMS_OR_NONE),
        words(&["1 Ω", "1 kΩ", "100 kΩ", "100 MΩ", "inf"]),
        words(&["1 Ω", "47 kΩ", "100 MΩ", "inf"]),
        words(OPAMPS),
        1..4usize,
        words(&["", "gbw = \"inf\"\n", "slew = \"inf\"\n", "gbw = \"1 kHz\"\n", "input_capacitance = 0\n", "output_current = \"1 µA\"\n", "input_linear = \"inf\"\n", "supply = [\"-15 V\", \"15 V\"]\n"]),
    )
        .prop_map(move |(connection, feedback, ground, bias, part, stages, more)| {
            format!(
                "[[{side}.stage]]\nkind = \"opamp\"\nconnection = \"{connection}\"\nfeedback = \"{feedback}\"\n\
                 ground = \"{ground}\"\nbias_resistance = \"{bias}\"\npart = \"{part}\"\nstages = {stages}\n{more}"
            )
        });
    prop_oneof![coupling, trim, opamp]
}

fn stages(side: &'static str) -> impl Strategy<Value = String> {
    prop::collection::vec(stage(side), 0..4).prop_map(|all| all.concat())
}

fn driver() -> impl Strategy<Value = String> {
    let resistor = (words(SUPPLIES), words(OHMS_OR_NONE)).prop_map(|(v, r)| {
        format!("kind = \"series-resistor\"\nsupply = \"{v}\"\nresistor = \"{r}\"\n")
    });
    let sink = (
        words(SUPPLIES),
        words(&["1 nA", "1 mA", "50 mA", "10 A"]),
        words(&["1 µA/V", "20 mA/V", "10 A/V"]),
        words(OHMS_OR_NONE),
        words(&["0 V", "0.4 V", "5 V"]),
    )
        .prop_map(|(v, bias, slope, sense, saturation)| {
            format!(
                "kind = \"current-sink\"\nsupply = \"{v}\"\nbias = \"{bias}\"\nslope = \"{slope}\"\nsense = \"{sense}\"\n\
                 saturation = \"{saturation}\"\n"
            )
        });
    (
        prop_oneof![resistor, sink],
        words(&[
            "",
            "input_resistance = \"1 Ω\"\n",
            "input_resistance = \"47 kΩ\"\n",
        ]),
    )
        .prop_map(|(driver, more)| driver + &more)
}

fn emitter() -> impl Strategy<Value = String> {
    words(&[
        "part = \"ir-led-narrow\"\n",
        "part = \"ir-led-wide\"\ncount = 3\n",
        "part = \"ir-led-narrow\"\nthermal_resistance = \"5000 K/W\"\nthermal_time = \"1 µs\"\n",
        "part = \"ir-led-narrow\"\nthermal_resistance = 0\nlow_current = 0\ndroop_current = \"inf\"\nbandwidth = \"inf\"\nseries_resistance = 0\n",
        "part = \"ir-led-narrow\"\nflux_temperature = \"10 %/K\"\nbandwidth = \"1 kHz\"\nintensity_noise = \"-10 dB/Hz\"\n",
        "part = \"ir-led-narrow\"\nsaturation_current = \"1 mA\"\nideality = 10\n",
    ])
}

fn light() -> impl Strategy<Value = String> {
    let lamps = words(&[
        "",
        "[[ambient]]\nkind = \"steady\"\nphotocurrent = \"1 mA\"\n",
        "[[ambient]]\nkind = \"steady\"\nphotocurrent = \"1 A\"\n",
        "[[ambient]]\nkind = \"incandescent\"\nirradiance = \"500 W/m²\"\nripple = 1\n",
        "[[ambient]]\nkind = \"daylight\"\nirradiance = \"1000 W/m²\"\nsun = \"in\"\n",
    ]);
    let cuts = words(&[
        "",
        "[[path.interruption]]\nat = 0\nlasts = \"1 ms\"\nedge = 0\n",
        "[[path.interruption]]\nrate = \"1 kHz\"\nlasts = \"100 µs\"\n",
    ]);
    (lamps, cuts).prop_map(|(a, b)| a + &b)
}

fn front_end() -> impl Strategy<Value = String> {
    let load = (words(SUPPLIES), words(OHMS), words(FARADS_OR_NONE), words(&["anode", "cathode"])).prop_map(
        |(v, r, c, at)| {
            format!("kind = \"load\"\nsupply = \"{v}\"\nload = \"{r}\"\ncapacitance = \"{c}\"\nload_at = \"{at}\"\n")
        },
    );
    let amplifier = (
        words(SUPPLIES),
        words(&["0 V", "1 V", "100 V"]),
        words(OHMS),
        words(FARADS_OR_NONE),
        words(OPAMPS),
        words(&["", "gbw = \"inf\"\n", "slew = \"inf\"\n", "slew = \"1 V/s\"\n", "input_capacitance = 0\n", "output_current = \"1 nA\"\n", "bias_current = \"1 mA\"\n"]),
    )
        .prop_map(|(v, bias, r, c, part, more)| {
            format!(
                "kind = \"transimpedance\"\nsupply = \"{v}\"\nbias = \"{bias}\"\nfeedback = \"{r}\"\n\
                 feedback_capacitor = \"{c}\"\npart = \"{part}\"\n{more}"
            )
        });
    prop_oneof![load, amplifier]
}

fn detector() -> impl Strategy<Value = String> {
    words(&[
        "kind = \"photodiode\"\npart = \"pin-7mm2\"\n",
        "kind = \"photodiode\"\npart = \"pin-7mm2\"\ncapacitance = 0\ndark_current = 0\n",
        "kind = \"photodiode\"\npart = \"pin-7mm2\"\ncapacitance = \"10 nF\"\ngrading = 0.99\nshunt_resistance = \"1 Ω\"\ncount = 10\n",
        "kind = \"photodiode\"\npart = \"pin-7mm2\"\nsaturation_current = \"1 µA\"\ndark_current = \"1 mA\"\nideality = 0.5\n",
    ])
}

prop_compose! {
    /// A draft in which anything may stand beside anything.
    fn draft()(
        electrical in (stages("transmitter"), driver(), emitter(), stages("receiver")),
        optical in (light(), detector(), front_end()),
        full_scale in words(&["1 µV", "1 V", "100 V"]),
        resistance in words(OHMS_OR_NONE),
        distance in words(&["1 mm", "3 m", "10 km"]),
        impedance in words(&["1 Ω", "10 kΩ", "inf"]),
        temperature in words(&["100 K", "293.15 K", "600 K"]),
    ) -> Draft {
        let (transmitter, driver, emitter, receiver) = electrical;
        let (light, detector, front_end) = optical;
        Draft::ideal()
            .transmitter(&transmitter)
            .driver(&driver)
            .emitter(&emitter)
            .with(&light)
            .detector(&detector)
            .front_end(&front_end)
            .receiver(&receiver)
            .set(format!("source.full_scale={full_scale}"))
            .set(format!("source.resistance={resistance}"))
            .set(format!("path.distance={distance}"))
            .set(format!("output.impedance={impedance}"))
            .set(format!("temperature={temperature}"))
    }
}

/// So many designs, the same ones every time.
fn config(cases: u32) -> ProptestConfig {
    ProptestConfig {
        cases,
        rng_seed: RngSeed::Fixed(1),
        failure_persistence: None,
        ..ProptestConfig::default()
    }
}

/// The link, where the checks let it through.
fn link(draft: &Draft) -> Option<(Design, Link)> {
    let design = draft.try_design().ok()?;
    let link = Link::new(&design).ok()?;
    Some((design, link))
}

/// Full-scale noise from a congruential generator: rough enough to find what a sine would not.
fn storm(samples: usize) -> Vec<f64> {
    let mut state = 1u64;
    (0..samples)
        .map(|_| {
            state = state
                .wrapping_mul(6_364_136_223_846_793_005)
                .wrapping_add(1_442_695_040_888_963_407);
            (state >> 33) as f64 / 2f64.powi(30) - 1.0
        })
        .collect()
}

proptest! {
    #![proptest_config(config(400))]

    #[test]
    fn chains_stay_finite(draft in draft(), bent in any::<bool>(), cold in any::<bool>()) {
        let Some((_, link)) = link(&draft) else { return Ok(()) };
        let conditions = Conditions {
            curves: if bent { Curves::Bent } else { Curves::Straight },
            cold,
            ..link.conditions(384e3, 1)
        };
        let mut block = storm(2000);
        link.chain(&conditions).run(&mut block);
        let bad = block.iter().position(|x| !x.is_finite());
        prop_assert!(bad.is_none(), "sample {bad:?}\n{}", draft.text());
        for f in [1e-3, 1.0, 1e3, 1e6, 1e9] {
            let h = link.transfer(f);
            prop_assert!(h.re.is_finite() && h.im.is_finite(), "{h} at {f} Hz\n{}", draft.text());
            for share in link.stations().iter().flat_map(|s| s.noise(f)) {
                prop_assert!(share.density.is_finite() && share.density >= 0.0, "{share:?}\n{}", draft.text());
            }
        }
        for line in budget(&link, (20.0, 20e3)) {
            prop_assert!(line.rms.is_finite() && (0.0..=1.000001).contains(&line.share), "{line:?}\n{}", draft.text());
        }
        for station in link.stations() {
            for reading in station.operating_point() {
                prop_assert!(!reading.value.is_nan(), "{reading:?}\n{}", draft.text());
            }
        }
        for warning in link.warnings() {
            prop_assert!(!warning.contains("NaN"), "{warning}");
        }
    }
}

proptest! {
    #![proptest_config(config(12))]

    #[test]
    fn figures_are_numbers_or_null_with_a_reason(draft in draft()) {
        let Some((design, link)) = link(&draft) else { return Ok(()) };
        let figures = measure(&link, &Bench::of(&design), 1).figures;
        let json = serde_json::to_value(&figures).unwrap();
        for (key, value) in json.as_object().unwrap() {
            // A NaN or an infinity would come out as null without a reason.
            let known = value.is_number() || figures.reasons.contains_key(key) || key == "clipped_samples";
            prop_assert!(known, "{key} is {value} without a reason\n{}", draft.text());
        }
    }
}
