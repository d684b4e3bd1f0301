//! The edges of the pass band of a frequency response.

use thiserror::Error;

/// Half the power, dB: 10 lg 2.
const DROP_DB: f64 = 3.010_299_956_639_812;
/// Where edges are looked for, Hz.
const LOWEST: f64 = 0.1;
const HIGHEST: f64 = 100e6;
/// Steps a decade of the search: features narrower than 0.4 % of their frequency may be missed.
const STEPS: f64 = 600.0;

/// Why there is no edge.
#[derive(Debug, Clone, Copy, PartialEq, Error)]
#[non_exhaustive]
pub enum NoEdge {
    /// The response holds down to the lowest frequency looked at.
    #[error("the response is within 3.01 dB of its maximum down to 0.1 Hz")]
    Below,
    /// The response holds up to the highest frequency looked at.
    #[error("the response is within 3.01 dB of its maximum up to 100 MHz")]
    Above,
    /// The response is zero, or no number, all over the band.
    #[error("nothing passes inside the band")]
    Nothing,
}

/// The half-power edges of a response.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct BandEdges {
    /// Frequency of the largest value inside the band, Hz, and that value.
    pub peak_hz: f64,
    pub peak: f64,
    /// Lower edge, Hz.
    pub low: Result<f64, NoEdge>,
    /// Upper edge, Hz.
    pub high: Result<f64, NoEdge>,
}

/// Finds where `magnitude` (an amplitude ratio as a function of Hz) first falls 3.0103 dB below its largest value inside `band` (Hz, low and high), going out
/// from that largest value to either side as far as 0.1 Hz and 100 MHz. The edges may lie outside the band; a notch inside it is an edge.
pub fn band_edges(magnitude: impl Fn(f64) -> f64, band: (f64, f64)) -> BandEdges {
    let (peak_hz, peak) = largest(&magnitude, band);
    if !(peak > 0.0 && peak.is_finite()) {
        let nothing = Err(NoEdge::Nothing);
        return BandEdges {
            peak_hz,
            peak,
            low: nothing,
            high: nothing,
        };
    }
    let level = peak * 10f64.powf(-DROP_DB / 20.0);
    BandEdges {
        peak_hz,
        peak,
        low: crossing(&magnitude, peak_hz, LOWEST, level).ok_or(NoEdge::Below),
        high: crossing(&magnitude, peak_hz, HIGHEST, level).ok_or(NoEdge::Above),
    }
}

/// Points from `from` to `to`, both included, evenly spaced in logarithm.
fn points(from: f64, to: f64) -> impl Iterator<Item = f64> {
    let decades = (to / from).log10();
    let steps = (decades.abs() * STEPS).ceil().max(1.0);
    (0..=steps as u32).map(move |n| match f64::from(n) {
        n if n == steps => to,
        n => from * 10f64.powf(decades * n / steps),
    })
}

fn largest(magnitude: &impl Fn(f64) -> f64, (low, high): (f64, f64)) -> (f64, f64) {
    let low = low.max(LOWEST);
    let (mut best, mut at) = (f64::NEG_INFINITY, low);
    for f in points(low, high) {
        let value = magnitude(f);
        if value > best {
            (best, at) = (value, f);
        }
    }
    // Golden-section search between the neighbours, in logarithm.
    let step = 10f64.powf(1.0 / STEPS);
    let (mut a, mut b) = ((at / step).max(low).ln(), (at * step).min(high).ln());
    let golden = (5f64.sqrt() - 1.0) / 2.0;
    while b - a > 1e-9 {
        let (c, d) = (b - golden * (b - a), a + golden * (b - a));
        if magnitude(c.exp()) >= magnitude(d.exp()) {
            b = d;
        } else {
            a = c;
        }
    }
    let refined = ((a + b) / 2.0).exp();
    match magnitude(refined) {
        value if value > best => (refined, value),
        _ => (at, best),
    }
}

fn crossing(magnitude: &impl Fn(f64) -> f64, from: f64, to: f64, level: f64) -> Option<f64> {
    let mut inside = from;
    for f in points(from, to) {
        if magnitude(f) >= level {
            inside = f;
            continue;
        }
        let (mut inside, mut outside) = (inside.ln(), f.ln());
        while (outside - inside).abs() > 1e-13 * outside.abs().max(1.0) {
            let middle = 0.5 * (inside + outside);
            if magnitude(middle.exp()) >= level {
                inside = middle;
            } else {
                outside = middle;
            }
        }
        return Some((0.5 * (inside + outside)).exp());
    }
    None
}
