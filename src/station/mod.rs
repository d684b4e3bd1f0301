//! The stations of the light's way and the electrical stages. Each has two faces over the same laws of `physics`: a [`Model`]
//! on paper and a [`Runner`] in time. Signals between stations are deviations from rest, in volts or watts.

pub mod ambient;
pub mod coupling;
pub mod filter;
pub mod noise;
pub mod opamp;
pub mod optics;
pub mod output;
pub mod path;
pub mod power;
pub mod receive_head;
pub mod source;
pub mod transistor;
pub mod transmit_head;
pub mod trim;
pub mod wiring;

use num_complex::Complex64;

use crate::quantity::Dimension;
use crate::signal::noise::Gaussian;

/// Which of its curves a run keeps: all of them, or their tangents at rest.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Curves {
    /// Every curve, clip and slew as the parts have them.
    Bent,
    /// Every curve its tangent at the operating point; nothing clips.
    Straight,
}

/// What a run is made under.
#[derive(Debug, Clone)]
pub struct Conditions {
    /// Rate of the samples that the stations see, Hz.
    pub rate: f64,
    pub curves: Curves,
    /// Whether random noises sound.
    pub noise: bool,
    /// Whether lamps flicker; else they stand at their mean.
    pub lamps: bool,
    pub seed: u64,
    pub channel: usize,
    /// Whether the light fades on its way: interruptions, scintillation, sway.
    pub fades: bool,
    /// Time of the first sample, s: below 0 where a run leads in before its programme.
    pub start: f64,
    /// Whether the run starts with discharged capacitors and a cold emitter.
    pub cold: bool,
    /// Names of noise contributors that stay silent.
    pub silence: Vec<String>,
}

impl Conditions {
    /// The stream of the contributor `name`, or none where this run leaves it out.
    ///
    /// `unit` tells apart the equal parts of one station; each has a stream of its own.
    pub fn stream(&self, name: &str, unit: usize) -> Option<Gaussian> {
        (self.noise && self.sounds(name))
            .then(|| Gaussian::new(self.seed, self.channel, name, &unit.to_string()))
    }

    /// Whether the design lets the contributor `name` sound.
    pub fn sounds(&self, name: &str) -> bool {
        !self.silence.iter().any(|s| s == name)
    }
}

/// A quantity at the operating point.
#[derive(Debug, Clone, PartialEq)]
pub struct Reading {
    pub name: &'static str,
    pub value: f64,
    pub dimension: Dimension,
}

/// One contributor's share of a station's output noise.
#[derive(Debug, Clone, PartialEq)]
pub struct Share {
    /// Full name, the station's path and the physical cause: `receiver.detector.shot`.
    pub name: String,
    /// Squared density at the station's output, unit²/Hz, one-sided.
    pub density: f64,
}

/// Where a station stops following, at its output and counted from rest.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Limit {
    /// A level, in the output's unit.
    Level { cause: &'static str, at: f64 },
    /// A slope, in the output's unit per second.
    Slope { cause: &'static str, at: f64 },
}

/// What happened to a station's signal in a run, in samples at the run's rate.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Events {
    /// Samples held at a limit of level: a rail, a current limit, a used-up bias, a supply's compliance.
    pub clipped: u64,
    /// Samples held at the slew limit.
    pub slewing: u64,
    /// Samples in which an emitter was as good as dark.
    pub cut_off: u64,
    /// Times that the path was cut.
    pub interruptions: u64,
    /// Largest value of the station's own watched quantity (an emitter's current, A), where it has one.
    pub peak: Option<f64>,
}

impl Events {
    /// Counts `other` in, as of equal parts in one place.
    pub fn add(&mut self, other: &Self) {
        self.clipped += other.clipped;
        self.slewing += other.slewing;
        self.cut_off += other.cut_off;
        self.interruptions += other.interruptions;
        self.peak = self.peak.into_iter().chain(other.peak).reduce(f64::max);
    }
}

/// A station on paper: cheap, pure, without state.
pub trait Model: Send + Sync {
    /// Place in the design: `receiver.stage.preamp`.
    fn path(&self) -> &str;
    /// What it is, in a few words.
    fn title(&self) -> String;
    /// Quiescent quantities.
    fn operating_point(&self) -> Vec<Reading>;
    /// The quasi-static law in mid-band: output deviation for an input deviation (DC blocking and slow memory left out).
    fn curve(&self, x: f64) -> f64;
    /// Small-signal transfer at `frequency` (Hz, > 0).
    fn transfer(&self, frequency: f64) -> Complex64;
    /// Shares of the noise at its output at `frequency` (Hz, > 0).
    fn noise(&self, frequency: f64) -> Vec<Share>;
    /// Where it clips or slews; nowhere, unless it says so.
    fn limits(&self) -> Vec<Limit> {
        Vec::new()
    }
    /// What an engineer ought to know about its operating point.
    fn warnings(&self) -> Vec<String> {
        Vec::new()
    }
    /// Its longest time constant that a signal excites, s (0: none).
    fn slowest_time(&self) -> f64 {
        0.0
    }
    /// The station in time.
    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner>;
}

/// A station in time: state kept between blocks, started at rest unless the conditions say cold.
pub trait Runner: Send {
    /// Takes a block of the station's input and leaves its output in its place. `ambient` is the other light on the
    /// detector, in amperes of photocurrent away from its mean, one value a sample; empty where there is none.
    fn run(&mut self, block: &mut [f64], ambient: &[f64]);
    /// What has happened so far.
    fn events(&self) -> Events {
        Events::default()
    }
}
