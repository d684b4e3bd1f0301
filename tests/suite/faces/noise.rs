//! Noise densities, measured in time.

use super::cases::all;
use crate::bench::quiet;
use harklight::signal::spectrum::Analyser;
use harklight::station::{Conditions, Model};

/// Bands that are compared, Hz.
const BANDS: [(f64, f64); 5] = [
    (200.0, 400.0),
    (1e3, 2e3),
    (4e3, 6e3),
    (10e3, 13e3),
    (16e3, 20e3),
];
const RATE: f64 = 384e3;
/// Length of the record, and of one piece of it.
const SAMPLES: usize = 1 << 20;
const PIECE: usize = 1 << 14;

/// Power that the Model promises between two frequencies, by the midpoint rule on a fine grid.
fn promised(model: &dyn Model, (low, high): (f64, f64)) -> f64 {
    let step = (high - low) / 200.0;
    (0..200)
        .map(|k| low + step * (f64::from(k) + 0.5))
        .flat_map(|f| model.noise(f))
        .map(|share| share.density * step)
        .sum()
}

/// Measured power over promised power differs from 1 by no more than four times the standard deviation that a record of this length
/// leaves. Seeds are fixed: over some 140 comparisons four deviations are passed by chance once in a hundred sets of seeds.
#[test]
fn densities_are_those_promised() {
    let analyser = Analyser::new(RATE, PIECE, 8.0);
    let mut wrong = Vec::new();
    for case in all() {
        let link = case.link();
        for (unit, model) in case.stations(&link).into_iter().enumerate() {
            if promised(model, BANDS[0]) == 0.0 {
                continue;
            }
            let conditions = Conditions {
                noise: true,
                seed: 20 + unit as u64,
                ..quiet(RATE)
            };
            // The 1/f parts and slow poles start at rest and take time to come to their full variance.
            let mut record = vec![0.0; SAMPLES + SAMPLES / 4];
            model.runner(&conditions).run(&mut record, &[]);
            let spectrum = analyser.average(&record[SAMPLES / 4..]);
            for band in BANDS {
                let ratio = spectrum.band_power(band.0, band.1) / promised(model, band);
                let sigma = analyser.scatter(SAMPLES, band.1 - band.0);
                if ratio.is_nan() || (ratio - 1.0).abs() > 4.0 * sigma {
                    wrong.push(format!(
                        "{}: power {ratio:.4} of the promised one in {band:?} Hz, {:.1} deviations",
                        case.name,
                        (ratio - 1.0) / sigma
                    ));
                }
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}
