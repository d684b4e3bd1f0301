//! What limits a link, and what the choice of rate may not change.

use std::path::Path;

use super::measured;
use crate::bench::{Draft, Multisine, quiet, reading, rms, station};
use harklight::design::Design;
use harklight::link::{Link, budget};

/// 5 V less 0.4 V of saturation less the LED's forward voltage leave 3.3 V over 33 Ω: the emitter cannot have the 200 mA asked for.
#[test]
fn a_supply_runs_out_of_room() {
    let link = Draft::ideal()
        .driver("kind = \"current-sink\"\nsupply = \"5 V\"\nbias = \"200 mA\"\nslope = \"10 mA/V\"\nsense = \"33 Ω\"\nsaturation = \"0.4 V\"\n")
        .emitter("part = \"ir-led-narrow\"\nthermal_resistance = 0\n")
        .link();
    let head = station(&link, "transmitter.emitter");
    let (current, forward) = (
        reading(head, "bias current"),
        reading(head, "forward voltage"),
    );
    // Kirchhoff around the loop.
    assert!((33.0 * current + forward - 4.6).abs() < 1e-9);
    let warnings = link.warnings();
    assert!(
        warnings
            .iter()
            .any(|w| w.contains("too little room for the bias")),
        "{warnings:?}"
    );
    assert_eq!(link.transfer(1000.0).norm(), 0.0);
}

/// With bias to spare, the upper half of a large tone is held at the compliance: THD rises and the events say why.
#[test]
fn a_large_tone_reaches_the_compliance() {
    let link = Draft::ideal()
        .driver("kind = \"current-sink\"\nsupply = \"5 V\"\nbias = \"80 mA\"\nslope = \"40 mA/V\"\nsense = \"33 Ω\"\nsaturation = \"0.4 V\"\n")
        .emitter("part = \"ir-led-narrow\"\nthermal_resistance = 0\n")
        .set("receiver.front_end.feedback=1 kΩ")
        .link();
    let (small, large) = (measured(&link, -20.0), measured(&link, 0.0));
    let head = |m: &harklight::render::test_signals::Measured| {
        let found = m.events.iter().find(|e| e.path == "transmitter.emitter");
        found.unwrap().events
    };
    assert_eq!(head(&small).clipped, 0);
    assert!(head(&large).clipped > 0);
    let most = head(&large).peak.unwrap();
    assert!((0.08..0.12).contains(&most), "{most} A");
    assert!(large.figures.thd_percent.unwrap() > small.figures.thd_percent.unwrap() + 1.0);
    let headroom = small.figures.headroom_db.unwrap();
    assert!((10.0..20.0).contains(&headroom), "{headroom} dB");
}

/// The demonstration design at 8 and at 32 times 48 kHz, without noise, near its full level: what the finer rate changes stays under the
/// link's own noise in its band.
#[test]
fn a_finer_rate_changes_less_than_the_noise() {
    for name in ["dome-talkback", "dome-talkback-hurried"] {
        let path = format!("{}/configs/{name}.toml", env!("CARGO_MANIFEST_DIR"));
        let design = Design::load(Path::new(&path), &[]).unwrap();
        let link = Link::new(&design).unwrap();
        let record = |times: usize| {
            let rate = 48e3 * times as f64;
            let mut block = Multisine::new(rate, 16e3).samples(0.7, 0.25);
            // A smooth start, so that no step is sampled differently.
            let onset = (0.05 * rate) as usize;
            for (n, x) in block.iter_mut().take(onset).enumerate() {
                *x *= (n as f64 / onset as f64 * std::f64::consts::FRAC_PI_2)
                    .sin()
                    .powi(2);
            }
            link.chain(&quiet(rate)).run(&mut block);
            let every: Vec<f64> = block.iter().step_by(times / 8).copied().collect();
            every
        };
        let (coarse, fine) = (record(8), record(32));
        let apart: Vec<f64> = coarse.iter().zip(&fine).map(|(a, b)| a - b).collect();
        let noise: f64 = budget(&link, (80.0, 15e3))
            .iter()
            .filter(|line| !line.name.ends_with(".hum"))
            .map(|line| line.rms * line.rms)
            .sum::<f64>()
            .sqrt();
        assert!(
            rms(&apart) < noise,
            "{name}: {} V apart, {noise} V of noise",
            rms(&apart)
        );
    }
}
