//! How far a tone may rise before the first station limits.

use std::f64::consts::TAU;

use super::TEST_RATE;
use super::test_signals::Bench;
use crate::link::Link;
use crate::signal::tone::Tone;
use crate::station::Conditions;

/// Range of the search around the level, dB.
const RANGE: (f64, f64) = (-100.0, 80.0);
/// Steps in which a level without limits is looked for, dB.
const STRIDE: f64 = 10.0;
/// The answer is this close, dB.
const RESOLUTION: f64 = 0.05;
/// Loss of gain that counts as a limit, dB.
const COMPRESSION: f64 = 1.0;
/// Periods that pass before a judgement, and that it looks at.
const PERIODS: (f64, f64) = (6.0, 6.0);

/// Decibels by which the tone may rise above its level until a station clips, slews, cuts off or the whole compresses by 1 dB.
///
/// By halving, on the link in time without noise: limits are taken to stay once they are reached. Good to 0.05 dB for limits
/// that a few periods show; a slow junction's warming is not waited for.
///
/// # Errors
/// In words: a station limits at any level, or none does.
pub fn headroom(link: &Link, bench: &Bench, conditions: &Conditions) -> Result<f64, String> {
    let straight = link.transfer(bench.tone).norm();
    let limits = |db: f64| limits(link, bench, conditions, straight, db);
    let (mut free, mut limited) = RANGE;
    // A class-B gap swallows what is small and yet lets louder tones pass.
    while limits(free)? {
        free += STRIDE;
        if free >= limited {
            return Err("a station limits at any level".into());
        }
    }
    if !limits(limited)? {
        return Err(format!(
            "no station limits up to {limited} dB above the level"
        ));
    }
    while limited - free > RESOLUTION {
        let middle = (free + limited) / 2.0;
        if limits(middle)? {
            limited = middle;
        } else {
            free = middle;
        }
    }
    Ok(free)
}

/// Whether anything limits with the tone `db` above its level.
fn limits(
    link: &Link,
    bench: &Bench,
    conditions: &Conditions,
    straight: f64,
    db: f64,
) -> Result<bool, String> {
    let peak = bench.peak() * 10f64.powf(db / 20.0);
    let period = TEST_RATE / bench.tone;
    let (before, during) = (
        (PERIODS.0 * period).ceil() as usize,
        (PERIODS.1 * period).round() as usize,
    );
    let onset = PERIODS.0 / 2.0 / bench.tone;
    let mut samples = vec![0.0; before + during];
    Tone::new(TEST_RATE, bench.tone, peak, onset)
        .map_err(|e| e.to_string())?
        .fill(&mut samples);
    let mut chain = link.chain(conditions);
    chain.run(&mut samples);
    let events = chain.events();
    if events
        .iter()
        .any(|e| e.events.clipped + e.events.slewing + e.events.cut_off > 0)
    {
        return Ok(true);
    }
    // The fundamental by correlation over whole periods.
    let (mut re, mut im) = (0.0, 0.0);
    for (n, x) in samples[before..].iter().enumerate() {
        let (s, c) = (TAU * n as f64 / period).sin_cos();
        re += x * c;
        im += x * s;
    }
    let fundamental = 2.0 / during as f64 * re.hypot(im);
    let gain = fundamental / (peak * link.source_full_scale());
    Ok(gain < straight * 10f64.powf(-COMPRESSION / 20.0))
}
