//! Noise of an idle channel.

use super::weighting::a_weighting;
use super::{Conditions, Unmeasurable, check_finite};
use crate::signal::spectrum::Analyser;

/// Shape of the window: sidelobes 59 dB down and falling, which keeps a strong line outside the band out of it.
const BETA: f64 = 8.0;
/// Length of one piece, s: bins 1 Hz apart.
const PIECE: f64 = 1.0;
/// Shortest piece in periods of the band's low edge: its own leakage then spreads over less than the edge's frequency.
const PERIODS: f64 = 4.0;

/// What an idle channel puts out inside the band.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct IdleNoise {
    /// Rms value, flat, in the record's unit.
    pub rms: f64,
    /// Rms value under the A weighting of IEC 61672-1.
    pub rms_a: f64,
    /// Standard deviation of the flat value's level that a record of this length leaves if the noise is white, dB.
    pub scatter_db: f64,
}

/// Noise inside the band of a settled record with the input idle: random noise and hum. The mean is left out; the tone of the conditions is not used.
///
/// The record should last 1 s or more: it is cut into overlapping pieces of 1 s. A shorter one is taken whole, down to four periods of the
/// band's low edge.
pub fn idle_noise(record: &[f64], conditions: &Conditions) -> Result<IdleNoise, Unmeasurable> {
    conditions.check()?;
    check_finite(record)?;
    let (low, high) = conditions.band;
    let needed = if low > 0.0 {
        (PERIODS * conditions.rate / low).ceil() as usize
    } else {
        (PIECE * conditions.rate) as usize
    };
    if record.len() < needed {
        return Err(Unmeasurable::TooShort {
            got: record.len(),
            needed,
            spacing: low,
        });
    }
    let piece = record
        .len()
        .min((PIECE * conditions.rate) as usize)
        .max(needed);
    let analyser = Analyser::new(conditions.rate, piece, BETA);
    let spectrum = analyser.average(record);
    let flat = spectrum.band_power(low, high);
    let weighted = spectrum.weighted_power(low, high, |f| a_weighting(f).powi(2));
    // A level's deviation is 10/ln 10 times that of the power, relative.
    let scatter_db = 10.0 / 10f64.ln() * analyser.scatter(record.len(), high - low);
    Ok(IdleNoise {
        rms: flat.sqrt(),
        rms_a: weighted.sqrt(),
        scatter_db,
    })
}

/// Signal over noise, dB, both rms; `None` where either is 0 and the ratio says nothing.
pub fn snr_db(signal: f64, noise: f64) -> Option<f64> {
    (signal > 0.0 && noise > 0.0).then(|| super::decibels(signal / noise))
}
