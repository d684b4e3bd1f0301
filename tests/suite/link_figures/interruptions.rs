//! Cuts of the beam.

use crate::bench::{Draft, quiet, station};
use harklight::station::Conditions;

fn with_interruptions(rate: f64, seed: u64) -> Conditions {
    Conditions {
        fades: true,
        seed,
        ..quiet(rate)
    }
}

/// A cut at 0.2 s for 0.1 s with edges of 2 ms: the ideal link's output falls by its quiescent volt, half of it half an edge in.
#[test]
fn a_cut_falls_where_it_is_put() {
    let link = Draft::ideal()
        .with("[[path.interruption]]\nat = \"0.2 s\"\nlasts = \"100 ms\"\nedge = \"2 ms\"\n")
        .link();
    let rate = 48e3;
    let mut block = vec![0.0; 24_000];
    let mut chain = link.chain(&with_interruptions(rate, 1));
    chain.run(&mut block);
    for (seconds, volts) in [
        (0.0, 0.0),
        (0.19999, 0.0),
        (0.2005, -0.146447),
        (0.201, -0.5),
        (0.203, -1.0),
        (0.29999, -1.0),
        (0.301, -0.5),
        (0.303, 0.0),
        (0.49, 0.0),
    ] {
        let found = block[(seconds * rate) as usize];
        // A sample's place on the edge: 21 µs of 2 ms.
        assert!((found - volts).abs() < 0.02, "{found} at {seconds} s");
    }
    let events = chain.events();
    let path = events.iter().find(|e| e.path == "path").unwrap();
    assert_eq!(path.events.interruptions, 1);
    // Left out on request.
    let mut block = vec![0.0; 24_000];
    link.chain(&quiet(rate)).run(&mut block);
    assert!(block.iter().all(|x| x.abs() < 1e-9));
}

/// The audio goes with the light: under a tone the cut leaves darkness, not the tone.
#[test]
fn a_cut_takes_the_signal_with_it() {
    let link = Draft::ideal()
        .with("[[path.interruption]]\nat = 0\nlasts = \"1 s\"\nedge = 0\n")
        .link();
    let mut block = crate::bench::tone(48e3, 1000.0, 1.0, 4800);
    link.chain(&with_interruptions(48e3, 1)).run(&mut block);
    // The amplifier without limits counts as a million times faster than the samples.
    assert!(block.iter().all(|x| (x + 1.0).abs() < 1e-6));
}

/// Cuts at random: each waits an exponential time from the end of the one before, so that T seconds hold T/(1/rate + lasts) of them, with a
/// variance smaller than a Poisson count's. Ten seeds, each within four of its deviations and all together as well.
#[test]
fn random_cuts_come_at_their_rate() {
    let (rate, lasts, seconds) = (2.0f64, 0.05f64, 500.0f64);
    let link = Draft::ideal()
        .with("[[path.interruption]]\nrate = \"2 Hz\"\nlasts = \"50 ms\"\nedge = 0\n")
        .link();
    let path = station(&link, "path");
    let wait = 1.0 / rate + lasts;
    let mean = seconds / wait;
    // Renewal theory (Cox 1962, from memory): variance T·σ²/μ³, σ the exponential wait's 1/rate.
    let deviation = (seconds / wait.powi(3)).sqrt() / rate;
    let mut total = 0.0;
    for seed in 1..=10 {
        let mut runner = path.runner(&with_interruptions(1000.0, seed));
        let mut block = vec![0.0; (seconds * 1000.0) as usize];
        runner.run(&mut block, &[]);
        let count = runner.events().interruptions as f64;
        assert!((count - mean).abs() < 4.0 * deviation, "{count} of {mean}");
        total += count;
        // The share of dark time is the mean count times its length.
        let dark = block.iter().filter(|x| **x < -1e-9).count() as f64 / 1000.0;
        assert!((dark - count * lasts).abs() < 0.002 * count + lasts);
    }
    assert!((total - 10.0 * mean).abs() < 4.0 * deviation * 10f64.sqrt());
}

/// Every channel sees the same cuts, and a second cause its own.
#[test]
fn the_beam_is_one_for_all_channels() {
    let cut = "[[path.interruption]]\nrate = \"5 Hz\"\nlasts = \"20 ms\"\n";
    let link = Draft::ideal().with(cut).link();
    let path = station(&link, "path");
    let record = |channel, seed| {
        let mut block = vec![0.0; 10_000];
        let conditions = Conditions {
            channel,
            ..with_interruptions(1000.0, seed)
        };
        path.runner(&conditions).run(&mut block, &[]);
        block
    };
    assert_eq!(record(0, 1), record(1, 1));
    assert_ne!(record(0, 1), record(0, 2));
}
