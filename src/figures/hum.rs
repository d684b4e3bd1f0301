//! Hum: what lamps on the mains leave in the output.

use super::distortion::{line_spectrum, samples_to_resolve};
use super::{Conditions, Unmeasurable, check_finite};

/// Root sum square of the multiples of `mains` Hz inside the band, in the record's unit, from a record with random noise off and the input idle.
///
/// The record must hold 18 periods of the mains or more (0.36 s at 50 Hz). Over the fundamental's rms value, in decibels, this is
/// the hum figure. The tone of the conditions is not used. The method's floor is about −200 dB of the largest line.
pub fn hum_rms(record: &[f64], conditions: &Conditions, mains: f64) -> Result<f64, Unmeasurable> {
    conditions.check()?;
    check_finite(record)?;
    let needed = samples_to_resolve(mains, conditions.rate);
    if record.len() < needed {
        return Err(Unmeasurable::TooShort {
            got: record.len(),
            needed,
            spacing: mains,
        });
    }
    let spectrum = line_spectrum(conditions.rate, record);
    let (low, high) = conditions.band;
    let top = (high * (1.0 + 1e-12)).min(spectrum.top() - spectrum.lobe());
    let power: f64 = (1..)
        .map(|n| f64::from(n) * mains)
        .take_while(|f| *f <= top)
        .filter(|f| *f >= low)
        .map(|f| spectrum.tone_power(f))
        .sum();
    Ok(power.sqrt())
}
