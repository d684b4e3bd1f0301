//! Designs at random, extremes included: whatever the checks let through runs, and stays finite.

mod designs;

use proptest::prelude::*;
use proptest::strategy::ValueTree;
use proptest::test_runner::{RngSeed, TestRunner};

use crate::bench::Draft;
use designs::draft;
use harklight::design::Design;
use harklight::link::{Link, budget};
use harklight::render::test_signals::{Bench, measure};
use harklight::station::{Conditions, Curves};

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
    #![proptest_config(config(1200))]

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
    #![proptest_config(config(40))]

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

/// The checks refuse some of these designs; what is left still has every kind in it.
#[test]
fn enough_designs_pass_the_checks() {
    const DRAFTS: usize = 300;
    let mut runner = TestRunner::new(config(1));
    let mut passed = Vec::new();
    for _ in 0..DRAFTS {
        let draft = draft().new_tree(&mut runner).unwrap().current();
        if link(&draft).is_some() {
            passed.push(format!("{draft:?}"));
        }
    }
    assert!(
        passed.len() > DRAFTS / 3,
        "{} of {DRAFTS} pass",
        passed.len()
    );
    for kind in [
        "coupling",
        "trim",
        "opamp",
        "\\\"transistor\\\"",
        "filter",
        "power",
        "emitter_resistor = \\\"0 Ω\\\"",
        "servo = ",
        "ambient_servo",
        "curve = ",
        "divergence",
        "fibre",
        "diffuse",
        "turbulence",
        "sway",
        "interruption",
        "steady",
        "incandescent",
        "daylight",
        "tube-magnetic",
        "tube-electronic",
        "pwm-lamp",
        "photodiode",
        "phototransistor",
        "photocell",
        "transimpedance",
        "loudspeaker",
        "headphone",
    ] {
        assert!(
            passed.iter().any(|draft| draft.contains(kind)),
            "no {kind} among {} designs",
            passed.len()
        );
    }
}
