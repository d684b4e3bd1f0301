//! Response and static law, measured in time.

use super::cases::{Hold, all};
use crate::bench::{Multisine, largest, quiet, run};
use harklight::station::{Conditions, Curves, Model};

/// Seconds until what a station remembers has died away below 1e-10, within reason.
fn settling(model: &dyn Model) -> f64 {
    (25.0 * model.slowest_time()).clamp(0.05, 2.0)
}

/// Where the response departs from the transfer by more than 0.1 dB or 1° (the seam that the design documents promise).
fn departures(
    name: &str,
    model: &dyn Model,
    conditions: &Conditions,
    top: f64,
    peak: f64,
) -> Vec<String> {
    let signal = Multisine::new(conditions.rate, top);
    let input = signal.samples(peak, settling(model) + 0.05);
    let output = run(model, conditions, &input);
    let response = signal.response(&input, &output);
    let mut wrong = Vec::new();
    for (f, measured) in signal.frequencies.iter().zip(response) {
        let ratio = measured / model.transfer(*f);
        let (db, degrees) = (20.0 * ratio.norm().log10(), ratio.arg().to_degrees());
        if db.is_nan() || db.abs() > 0.1 || degrees.abs() > 1.0 {
            wrong.push(format!(
                "{name}, {:?}, {} Hz: {db:.4} dB and {degrees:.3}° off at {f} Hz",
                conditions.curves, conditions.rate
            ));
        }
    }
    wrong
}

/// At 384 kHz to 20 kHz, and at 8 × 8 kHz to 0.4 of the file's rate.
#[test]
fn small_signals_follow_the_transfer() {
    let mut wrong = Vec::new();
    for case in all() {
        let link = case.link();
        for model in case.stations(&link) {
            for (rate, top) in [(384e3, 20e3), (64e3, 3200.0)] {
                wrong.extend(departures(case.name, model, &quiet(rate), top, case.small));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// A straight run is linear: a signal far beyond every limit follows the same transfer.
#[test]
fn straight_runs_follow_the_transfer_at_any_size() {
    let mut wrong = Vec::new();
    for case in all() {
        let link = case.link();
        for model in case.stations(&link) {
            let straight = Conditions {
                curves: Curves::Straight,
                ..quiet(384e3)
            };
            wrong.extend(departures(
                case.name,
                model,
                &straight,
                20e3,
                1e4 * case.small,
            ));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// A held input ends where the curve says, through clipping, cut-off and used-up bias, to a millionth of the largest output.
#[test]
fn held_inputs_end_on_the_curve() {
    let mut wrong = Vec::new();
    for case in all().iter().filter(|c| c.hold == Hold::Settled) {
        let link = case.link();
        for model in case.stations(&link) {
            let inputs: Vec<f64> = (0..=20)
                .map(|k| case.span.0 + (case.span.1 - case.span.0) * f64::from(k) / 20.0)
                .collect();
            let curve: Vec<f64> = inputs.iter().map(|&x| model.curve(x)).collect();
            let scale = largest(&curve);
            let samples = (settling(model) * 384e3) as usize;
            for (x, expected) in inputs.iter().zip(curve) {
                let output = run(model, &quiet(384e3), &vec![*x; samples]);
                let end = output[samples - 1];
                if (end - expected).abs() > 1e-6 * scale || !end.is_finite() {
                    wrong.push(format!("{}: {x} gives {end}, not {expected}", case.name));
                }
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// The curve's slope at rest is the transfer in mid-band, where nothing lies in the band's way.
#[test]
fn curves_have_the_slope_of_the_transfer() {
    let mut wrong = Vec::new();
    for case in all().iter().filter(|c| c.hold == Hold::Settled) {
        let link = case.link();
        for model in case.stations(&link) {
            let h = case.small;
            let slope = (model.curve(h) - model.curve(-h)) / (2.0 * h);
            let transfer = model.transfer(1.0);
            if (slope / transfer.re - 1.0).abs() > 1e-3 {
                wrong.push(format!("{}: slope {slope}, transfer {transfer}", case.name));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}
