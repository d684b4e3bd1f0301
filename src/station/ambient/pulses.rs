//! A pulsed light in time, without aliases.

use crate::signal::edge::{Corner, REACH};

/// Samples of the longest edge that is one corner of its own; a longer one is two bends.
const SHORT: f64 = 4.0;
/// Shortest period, samples: no corner then meets itself within its correction's reach.
const SHORTEST: f64 = 2.0 * (REACH as f64 + SHORT) + 8.0;

/// Trapezoid pulses, away from their mean: straight pieces with every corner made band-limited (`signal::edge`). Nothing folds below 0.39 of the
/// sample rate.
pub struct PulseTrain {
    /// In turns of 2⁻⁶⁴, so that edges neither drift nor jitter.
    phase: u64,
    step: u64,
    /// Samples.
    period: f64,
    /// By their place in the period.
    corners: Vec<Bend>,
    shape: Corner,
}

/// Where a straight piece of the waveform begins.
#[derive(Debug, Clone, Copy)]
struct Bend {
    /// Samples from the period's start.
    place: f64,
    /// Jump, or change of slope a sample, that the band-limited corner stands for.
    weight: f64,
    /// Value and slope of the straight piece that begins here.
    value: f64,
    slope: f64,
}

impl PulseTrain {
    /// `frequency` in periods a sample (> 0), `duty` in 0…1 without its ends, `edge` in samples (≥ 0), the first rising edge's middle at `rise` periods;
    /// the mean light is `mean`. None where a period has too few samples for corners: its few lines do better then.
    pub fn new(frequency: f64, duty: f64, edge: f64, rise: f64, mean: f64) -> Option<Self> {
        // A lamp that takes ages over a period stands still, and its period stays a number.
        let frequency = frequency.max(1e-30);
        let period = 1.0 / frequency;
        if period < SHORTEST {
            return None;
        }
        let top = mean / duty;
        let (up, down) = (rise * period, (rise + duty) * period);
        let short = edge <= SHORT;
        let ends = if short {
            vec![(up, top), (down, -top)]
        } else {
            let (half, slope) = (edge / 2.0, top / edge);
            vec![
                (up - half, slope),
                (up + half, -slope),
                (down - half, -slope),
                (down + half, slope),
            ]
        };
        let mut corners: Vec<Bend> = ends
            .into_iter()
            .map(|(place, weight)| Bend {
                place: place.rem_euclid(period),
                weight,
                value: 0.0,
                slope: 0.0,
            })
            .collect();
        corners.sort_by(|a, b| a.place.total_cmp(&b.place));
        straighten(&mut corners, period, short);
        Some(Self {
            phase: 0,
            step: (frequency * 2f64.powi(64)).round() as u64,
            period,
            corners,
            shape: if short {
                Corner::step(edge)
            } else {
                Corner::bend()
            },
        })
    }

    /// The next sample.
    #[inline]
    pub fn step(&mut self) -> f64 {
        let at = self.phase as f64 * (2f64.powi(-64) * self.period);
        self.phase = self.phase.wrapping_add(self.step);
        let Some(last) = self.corners.last() else {
            return 0.0;
        };
        // Before the first corner runs the piece that began at the last one a period ago.
        let mut plain = last.value + last.slope * (at + self.period - last.place);
        let mut lacks = 0.0;
        for corner in &self.corners {
            let mut after = at - corner.place;
            if after >= 0.0 {
                plain = corner.value + corner.slope * after;
            }
            if after > self.period / 2.0 {
                after -= self.period;
            } else if after < -self.period / 2.0 {
                after += self.period;
            }
            lacks += corner.weight * self.shape.correction(after);
        }
        plain + lacks
    }
}

/// Fills in the pieces' values and slopes, of mean 0 over the period.
fn straighten(corners: &mut [Bend], period: f64, jumps: bool) {
    let lengths: Vec<f64> = (0..corners.len())
        .map(|k| match corners.get(k + 1) {
            Some(next) => next.place - corners[k].place,
            None => corners[0].place + period - corners[k].place,
        })
        .collect();
    if !jumps {
        // The slopes' sum over the period must be nought, since the waveform closes.
        let mut slope = 0.0;
        let mut rise = 0.0;
        for (corner, length) in corners.iter_mut().zip(&lengths) {
            slope += corner.weight;
            corner.slope = slope;
            rise += slope * length;
        }
        corners.iter_mut().for_each(|c| c.slope -= rise / period);
    }
    let (mut value, mut area) = (0.0, 0.0);
    for (corner, length) in corners.iter_mut().zip(&lengths) {
        if jumps {
            value += corner.weight;
        }
        corner.value = value;
        area += length * (value + corner.slope * length / 2.0);
        value += corner.slope * length;
    }
    corners.iter_mut().for_each(|c| c.value -= area / period);
}
