//! What every Runner owes whatever it models.

use super::cases::{Case, all};
use crate::bench::{Multisine, quiet};
use harklight::station::{Conditions, Curves, Model, Runner};

/// The case's signal over its whole span, with every noise.
fn lively(case: &Case) -> (Conditions, Vec<f64>) {
    let conditions = Conditions {
        noise: true,
        ..quiet(384e3)
    };
    let (low, high) = case.span;
    let mut signal = Multisine::new(384e3, 20e3).samples(4.0, 0.03);
    for x in &mut signal {
        *x = (low + high) / 2.0 + (high - low) / 2.0 * x.clamp(-1.0, 1.0);
    }
    (conditions, signal)
}

/// `signal` through a fresh runner, in blocks of `size`.
fn in_blocks(model: &dyn Model, conditions: &Conditions, signal: &[f64], size: usize) -> Vec<f64> {
    let mut samples = signal.to_vec();
    let mut runner: Box<dyn Runner> = model.runner(conditions);
    for block in samples.chunks_mut(size) {
        runner.run(block, &[]);
    }
    samples
}

#[test]
fn the_size_of_blocks_does_not_matter_and_runs_repeat() {
    for case in all() {
        let link = case.link();
        let (conditions, signal) = lively(&case);
        for model in case.stations(&link) {
            let whole = in_blocks(model, &conditions, &signal, 4096);
            for size in [1, 7, 4096] {
                let pieces = in_blocks(model, &conditions, &signal, size);
                let same = whole
                    .iter()
                    .zip(&pieces)
                    .all(|(a, b)| a.to_bits() == b.to_bits());
                assert!(same, "{}: blocks of {size}", case.name);
            }
        }
    }
}

#[test]
fn the_other_seed_is_another_run() {
    for case in all() {
        let link = case.link();
        let (conditions, signal) = lively(&case);
        for model in case
            .stations(&link)
            .into_iter()
            .filter(|m| !m.noise(1e3).is_empty())
        {
            let sounds: f64 = model.noise(1e3).iter().map(|s| s.density).sum();
            let other = Conditions {
                seed: 2,
                ..conditions.clone()
            };
            let same = in_blocks(model, &conditions, &signal, 512)
                == in_blocks(model, &other, &signal, 512);
            assert_eq!(same, sounds == 0.0, "{}", case.name);
        }
    }
}

#[test]
fn silence_and_storms_stay_finite() {
    for case in all() {
        let link = case.link();
        for model in case.stations(&link) {
            for curves in [Curves::Bent, Curves::Straight] {
                for cold in [false, true] {
                    for peak in [0.0, 1e6, -1e6, 1e-300] {
                        let conditions = Conditions {
                            noise: peak != 0.0,
                            curves,
                            cold,
                            ..quiet(384e3)
                        };
                        // A step, its end, and the worst alternation.
                        let signal: Vec<f64> = (0..3000)
                            .map(|n| match n / 1000 {
                                0 => peak,
                                1 => 0.0,
                                _ if n % 2 == 0 => peak,
                                _ => -peak,
                            })
                            .collect();
                        let output = in_blocks(model, &conditions, &signal, 512);
                        let bad = output.iter().position(|x| !x.is_finite());
                        assert!(
                            bad.is_none(),
                            "{}, {curves:?}, cold {cold}, {peak}: sample {bad:?}",
                            case.name
                        );
                        let still = peak == 0.0 && !cold;
                        assert!(
                            !still || output.iter().all(|x| x.abs() < 1e-9),
                            "{}: rest moves",
                            case.name
                        );
                    }
                }
            }
        }
    }
}
