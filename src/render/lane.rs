//! One channel of a programme on its way: up to the link's rate, through the link once for each run, and down again.

use rayon::prelude::*;

use super::programme::{ChannelOutcome, Job};
use crate::figures::programme::{LevelMeter, ResidualMeter};
use crate::link::{Chain, Link};
use crate::signal::resample::{Downsampler, RatioError, Upsampler};
use crate::station::{Conditions, Curves};

/// Silent frames before the file and after it, so that what the converters ring beyond its ends is not cut off.
const LEAD: usize = 512;

/// One channel on its way: a link of its own for each run that is asked for.
pub(super) struct Lane {
    up: Upsampler,
    high: Vec<f64>,
    /// The full run; with stems also the noiseless and the straight one.
    pub runs: Vec<Run>,
    pub sent: LevelMeter,
    pub received: LevelMeter,
    pub noise: ResidualMeter,
    pub distortion: ResidualMeter,
    /// Frames that lead in before the file and out after it.
    lead: usize,
    led_in: bool,
    frames: u64,
}

pub(super) struct Run {
    chain: Chain,
    down: Downsampler,
    scale: f64,
    block: Vec<f64>,
    /// Frames of the lead that are still to be dropped.
    skip: usize,
    /// Frames given out so far.
    given: u64,
    /// Received frames that wait to be written.
    ready: Vec<f64>,
}

impl Run {
    /// Frames that wait.
    pub fn waiting(&self) -> usize {
        self.ready.len()
    }

    /// Takes out the next `frames` that wait.
    pub fn take(&mut self, frames: usize) -> Vec<f64> {
        self.given += frames as u64;
        self.ready.drain(..frames).collect()
    }
}

impl Lane {
    /// The channel numbered `channel` of `job`, for a file of `rate` and a link of `factor` times that.
    pub fn new(
        link: &Link,
        job: &Job,
        rate: u32,
        factor: u32,
        channel: usize,
    ) -> Result<Self, RatioError> {
        let rate_in_link = f64::from(rate) * f64::from(factor);
        // A cold link is switched on with the file's first sample.
        let lead = if job.cold || factor == 1 { 0 } else { LEAD };
        let full = Conditions {
            channel,
            cold: job.cold,
            start: -(lead as f64) / f64::from(rate),
            ..link.conditions(rate_in_link, job.seed)
        };
        let mut kinds = vec![full.clone()];
        if job.stems {
            let noiseless = Conditions {
                noise: false,
                lamps: false,
                ..full
            };
            let clean = Conditions {
                curves: Curves::Straight,
                ..noiseless.clone()
            };
            kinds.extend([noiseless, clean]);
        }
        let runs = kinds
            .iter()
            .map(|conditions| {
                Ok(Run {
                    chain: link.chain(conditions),
                    down: Downsampler::new(rate, factor)?,
                    scale: 1.0 / link.output_full_scale(),
                    block: Vec::new(),
                    skip: lead,
                    given: 0,
                    ready: Vec::new(),
                })
            })
            .collect::<Result<_, RatioError>>()?;
        Ok(Self {
            up: Upsampler::new(rate, factor)?,
            high: Vec::new(),
            runs,
            sent: LevelMeter::default(),
            received: LevelMeter::default(),
            noise: ResidualMeter::default(),
            distortion: ResidualMeter::default(),
            lead,
            led_in: false,
            frames: 0,
        })
    }

    /// Takes the next samples through every run; `last` lets what the converters hold run out.
    pub fn feed(&mut self, sent: &[f64], last: bool) {
        let silence = vec![0.0; self.lead];
        self.high.clear();
        if !std::mem::replace(&mut self.led_in, true) {
            self.up.process(&silence, &mut self.high);
        }
        self.up.process(sent, &mut self.high);
        self.frames += sent.len() as u64;
        if last {
            self.up.process(&silence, &mut self.high);
            self.up.finish(&mut self.high);
        }
        let (high, frames) = (&self.high, self.frames);
        self.runs.par_iter_mut().for_each(|run| {
            run.block.clear();
            run.block.extend_from_slice(high);
            run.chain.run(&mut run.block);
            run.block.iter_mut().for_each(|x| *x *= run.scale);
            run.down.process(&run.block, &mut run.ready);
            if last {
                run.down.finish(&mut run.ready);
            }
            let dropped = run.skip.min(run.ready.len());
            run.ready.drain(..dropped);
            run.skip -= dropped;
            // What follows the file's last frame is the lead out.
            run.ready.truncate((frames - run.given) as usize);
        });
    }

    /// What came of the channel.
    pub fn outcome(self) -> ChannelOutcome {
        let stems = self.runs.len() > 1;
        ChannelOutcome {
            sent: self.sent,
            received: self.received,
            noise: stems.then_some(self.noise),
            distortion: stems.then_some(self.distortion),
            events: self.runs[0].chain.events(),
        }
    }
}
