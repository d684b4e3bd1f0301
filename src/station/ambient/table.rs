//! A flicker whose lines are multiples of one frequency: one period in a table.

use super::Line;
use super::lines::Rotation;

/// Points of a period; 2^SHIFT of them. The fortieth multiple has 205 points, and a cubic errs by 2e-8 of it.
const SHIFT: u32 = 13;
const POINTS: usize = 1 << SHIFT;

/// One period, read by a phase of 64 bits that neither drifts nor loses precision.
pub struct PeriodTable {
    /// With one point before the period and two after it.
    points: Vec<f64>,
    phase: u64,
    step: u64,
}

impl PeriodTable {
    /// Of `lines`, multiples of `frequency` (Hz), at `rate` (Hz), times `scale`; none without lines.
    pub fn new(lines: &[Line], frequency: f64, rate: f64, scale: f64) -> Option<Self> {
        if lines.is_empty() {
            return None;
        }
        let mut period = vec![0.0; POINTS];
        for line in lines {
            let turns = (line.frequency / frequency).round() / POINTS as f64;
            let mut rotation = Rotation::new(turns, scale * line.depth, line.phase);
            period.iter_mut().for_each(|x| *x += rotation.step());
        }
        let around = (0..POINTS + 3).map(|k| period[(k + POINTS - 1) % POINTS]);
        Some(Self {
            points: around.collect(),
            phase: 0,
            step: (frequency / rate * 2f64.powi(64)).round() as u64,
        })
    }

    /// The next sample.
    #[inline]
    pub fn step(&mut self) -> f64 {
        let k = (self.phase >> (64 - SHIFT)) as usize;
        let t = (self.phase << SHIFT) as f64 * 2f64.powi(-64);
        self.phase = self.phase.wrapping_add(self.step);
        let [a, b, c, d] = [
            self.points[k],
            self.points[k + 1],
            self.points[k + 2],
            self.points[k + 3],
        ];
        // Lagrange's cubic through the four points around.
        let (even, odd) = ((a + c) / 2.0 - b, (c - a) / 2.0);
        let third = (d - a + 3.0 * (b - c)) / 6.0;
        b + t * (odd - third + t * (even + t * third))
    }
}
