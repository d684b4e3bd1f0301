//! What changes the light on its way from moment to moment: cuts of the beam, scintillation, sway.
//!
//! They are part of the link, not noise: they act alike in the full, the noiseless and the straight run of a seed, on every channel.

use super::interruption::{Cut, Interruption};
use super::scintillation::{Scintillating, Scintillation};
use super::sway::{Sway, Swaying};
use crate::station::Conditions;

/// The fades of a path on paper.
#[derive(Debug, Clone, Default)]
pub struct Fades {
    pub interruptions: Vec<Interruption>,
    pub scintillation: Option<Scintillation>,
    pub sway: Option<Sway>,
}

impl Fades {
    /// The fades in time, `None` where nothing moves in this run.
    pub fn in_time(&self, conditions: &Conditions) -> Option<Fading> {
        let moves =
            !self.interruptions.is_empty() || self.scintillation.is_some() || self.sway.is_some();
        (conditions.fades && moves).then(|| Fading {
            cuts: self
                .interruptions
                .iter()
                .map(|i| Cut::new(i, conditions.seed))
                .collect(),
            scintillation: self.scintillation.as_ref().map(|s| s.in_time(conditions)),
            sway: self.sway.as_ref().map(|s| s.in_time(conditions)),
            rate: conditions.rate,
            start: conditions.start,
            sample: 0,
            begun: 0,
        })
    }
}

/// Fades that run.
pub struct Fading {
    cuts: Vec<Cut>,
    scintillation: Option<Scintillating>,
    sway: Option<Swaying>,
    rate: f64,
    start: f64,
    sample: u64,
    begun: u64,
}

impl Fading {
    /// Fills `shares` with the light at the next samples, over the light of the steady path.
    pub fn fill(&mut self, shares: &mut [f64]) {
        shares.fill(1.0);
        if let Some(scintillation) = &mut self.scintillation {
            shares.iter_mut().for_each(|s| *s *= scintillation.step());
        }
        if let Some(sway) = &mut self.sway {
            shares.iter_mut().for_each(|s| *s *= sway.step());
        }
        for cut in &mut self.cuts {
            for (share, sample) in shares.iter_mut().zip(self.sample..) {
                let (open, begins) = cut.passes(self.start + sample as f64 / self.rate);
                *share *= open;
                self.begun += u64::from(begins);
            }
        }
        self.sample += shares.len() as u64;
    }

    /// Cuts that have begun so far.
    pub fn interruptions(&self) -> u64 {
        self.begun
    }
}

/// Grows from 0 to 1 over the first moments of a run, so that light that moves at random starts from the rest the link has settled at,
/// without a step.
pub struct Ease {
    samples: f64,
    done: f64,
}

/// Longest easing, s.
const LONGEST: f64 = 0.25;

impl Ease {
    /// Over a period of `corner` (Hz), a quarter of a second at most, at `rate` (Hz).
    pub fn new(corner: f64, rate: f64) -> Self {
        Self {
            samples: rate * (1.0 / corner).min(LONGEST),
            done: 0.0,
        }
    }

    #[inline]
    pub fn step(&mut self) -> f64 {
        if self.done >= self.samples {
            return 1.0;
        }
        let share = self.done / self.samples;
        self.done += 1.0;
        0.5 - 0.5 * (std::f64::consts::PI * share).cos()
    }
}
