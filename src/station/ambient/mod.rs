//! Lights that are not ours, as photocurrent on the detector: its mean and its flicker.

mod lines;
mod pulses;
mod table;

use std::f64::consts::{FRAC_PI_2, TAU};

use super::optics::Optics;
use super::{Conditions, Reading};
use crate::design::{DesignError, Section};
use crate::physics::fluorescent::{self, Series};
use crate::physics::{pulse_light, sunlight};
use crate::quantity::Dimension;
use lines::Rotation;
use pulses::PulseTrain;
use table::PeriodTable;

/// One lamp, or the sky.
pub struct Lamp {
    path: String,
    kind: String,
    /// Mean photocurrent, A.
    mean: f64,
    /// Hz; none where the lamp's flicker does not follow the mains.
    mains: Option<f64>,
    /// What flickers on it, over the mean.
    lines: Vec<Line>,
    /// How many of the lines, the first ones, are whole multiples of one frequency (Hz).
    periodic: Option<(usize, f64)>,
    pulses: Option<Pulses>,
}

/// One line of a flicker: depth·cos(2π·frequency·t + phase), over the lamp's mean.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Line {
    /// Hz
    frequency: f64,
    depth: f64,
    /// rad
    phase: f64,
}

/// A pulsed light.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Pulses {
    /// Hz
    frequency: f64,
    duty: f64,
    /// s
    edge: f64,
    /// When the middle of the first rising edge is, periods.
    rise: f64,
}

/// Harmonics of a pulsed light that are listed on paper: all below this frequency (Hz), but no more than this number.
const HIGHEST_HARMONIC: f64 = 1e6;
const MOST_HARMONICS: f64 = 20_000.0;

impl Lamp {
    /// From `[[ambient]]`; `responsivity` in A/W, `wavelength` of the emitter in m.
    ///
    /// The detector's responsivity at the emitter's wavelength serves for the lamp's light too, as it passes the same filter;
    /// without a filter a broad spectrum is overstated by up to a factor of two.
    ///
    /// # Errors
    /// A daylight with neither a value of its own nor a filter to take it from, or a filter outside the table of sunlight.
    pub fn new(section: &Section, optics: &Optics, responsivity: f64) -> Result<Self, DesignError> {
        let kind = section.kind.clone().unwrap_or_default();
        let transmission = optics.filter.map_or(1.0, |f| f.transmission);
        let per_irradiance = optics.area * optics.concentrator * transmission * responsivity;
        let mean = if let Some(photocurrent) = section.optional("photocurrent") {
            photocurrent
        } else if let Some(irradiance) = section.optional("irradiance") {
            irradiance * per_irradiance
        } else {
            let Some(filter) = optics.filter else {
                return Err(section.fault(
                    section
                        .given("spectral_irradiance")
                        .then_some("spectral_irradiance"),
                    "a light known by its spectrum needs the width of an optical filter",
                    "give `irradiance` or `photocurrent` here, or `filter` under [receiver.optics]",
                ));
            };
            let density = match section.optional("spectral_irradiance") {
                Some(density) => density,
                None => sunlight::spectral_irradiance(filter.centre, section.optional_word("sun") == Some("in"))
                    .ok_or_else(|| {
                        section.fault(
                            None,
                            "sunlight is known here from 400 nm to 1100 nm only, and the filter lies outside",
                            "give `spectral_irradiance` or `irradiance`",
                        )
                    })?,
            };
            density * filter.width * per_irradiance
        };
        let mut lamp = Self {
            path: section.path.clone(),
            kind,
            mean,
            mains: None,
            lines: Vec::new(),
            periodic: None,
            pulses: None,
        };
        match lamp.kind.as_str() {
            "incandescent" => lamp.glow(section),
            "tube-magnetic" => lamp.light_tube(section, None),
            "tube-electronic" => lamp.light_tube(section, Some(section.number("frequency"))),
            "pwm-lamp" => lamp.pulse(section),
            _ => {}
        }
        Ok(lamp)
    }

    /// A filament, which follows the power: that beats at twice the mains.
    fn glow(&mut self, section: &Section) {
        let mains = section.number("mains");
        self.mains = Some(mains);
        // It starts in the middle of its swing, so that a settled run sees no step.
        self.lines.push(Line {
            frequency: 2.0 * mains,
            depth: section.number("ripple"),
            phase: 2.0 * section.number("phase") - FRAC_PI_2,
        });
    }

    /// A fluorescent tube by its published series, the part that follows the mains and, on an electronic ballast of switching frequency
    /// `ballast` (Hz), the part that follows the ballast.
    ///
    /// One factor scales all lines, so that the whole light has the modulation depth `ripple` and keeps its shape; the two parts drift through each
    /// other, so that their extremes add. Unscaled the depth is 12.8 % on a magnetic ballast and 73 % on an electronic one. At `phase` 0 each
    /// part starts where it rises through its mean; the mains' phase moves the first part as a whole, the ballast runs free.
    fn light_tube(&mut self, section: &Section, ballast: Option<f64>) {
        let mains = section.number("mains");
        let low = fluorescent::low();
        let high = ballast.map(|frequency| (fluorescent::high(), frequency));
        let both =
            |extreme: fn(&Series) -> f64| extreme(low) + high.map_or(0.0, |(s, _)| extreme(s));
        let scale = fluorescent::scale_to_depth(
            both(|s| s.highest),
            both(|s| s.lowest),
            section.number("ripple"),
        );
        let mut add = |series: &Series, frequency: f64, turn: f64| {
            self.lines.extend(series.lines.iter().map(|line| {
                let multiple = f64::from(line.multiple);
                Line {
                    frequency: multiple * frequency,
                    depth: scale * line.amplitude,
                    phase: line.phase + multiple * (TAU * series.crossing + turn),
                }
            }));
        };
        add(low, mains, section.number("phase"));
        if let Some((series, frequency)) = high {
            add(series, frequency, 0.0);
        }
        self.mains = Some(mains);
        self.periodic = Some((low.lines.len(), mains));
    }

    /// A lamp dimmed by pulses. At `phase` 0, which here is of the pulses, it starts where it rises through its mean.
    fn pulse(&mut self, section: &Section) {
        let (frequency, duty) = (section.number("frequency"), section.number("duty"));
        if duty >= 1.0 {
            return;
        }
        let edge = section.number("edge");
        let share = edge * frequency;
        let rise = (0.5 - duty) * share.min(1.0) - section.number("phase") / TAU;
        let most = (HIGHEST_HARMONIC / frequency).clamp(1.0, MOST_HARMONICS) as u32;
        let middle = rise + duty / 2.0;
        self.lines = (1..=most)
            .map(|n| Line {
                frequency: f64::from(n) * frequency,
                depth: pulse_light::harmonic(n, duty, share),
                phase: -TAU * f64::from(n) * middle,
            })
            .collect();
        self.pulses = Some(Pulses {
            frequency,
            duty,
            edge,
            rise,
        });
    }

    /// Mean photocurrent, A.
    pub fn mean(&self) -> f64 {
        self.mean
    }

    /// Mains frequency that its flicker follows, Hz; none where it does not flicker or follows a clock of its own.
    pub fn mains(&self) -> Option<f64> {
        self.mains
    }

    /// Its place in the design.
    pub fn path(&self) -> &str {
        &self.path
    }

    /// Its kind.
    pub fn kind(&self) -> &str {
        &self.kind
    }

    /// Name of its flicker among the noise contributors.
    pub fn hum_name(&self) -> String {
        let cause = if self.pulses.is_some() {
            "pulses"
        } else {
            "hum"
        };
        format!("{}.{cause}", self.path)
    }

    /// What it lays on the detector.
    pub fn operating_point(&self) -> Vec<Reading> {
        vec![Reading {
            name: "photocurrent",
            value: self.mean,
            dimension: Dimension::Ampere,
        }]
    }

    /// Whether it flickers with the mains.
    pub fn hums(&self) -> bool {
        self.mains().is_some() && self.lines().next().is_some()
    }

    /// The lines of its flicker: frequency, Hz, and amplitude, A peak.
    pub fn lines(&self) -> impl Iterator<Item = (f64, f64)> + '_ {
        self.lines
            .iter()
            .map(|l| (l.frequency, self.mean * l.depth.abs()))
            .filter(|(_, amplitude)| *amplitude != 0.0)
    }

    /// The lamp in time: photocurrent away from its mean; none where it stands still or is silent.
    ///
    /// Lines at and above half the run's rate are left out: the rate cannot carry them, and nothing may fold.
    pub fn flicker(&self, conditions: &Conditions) -> Option<Flicker> {
        let sounds = conditions.lamps && conditions.sounds(&self.hum_name());
        if !sounds || self.mean == 0.0 {
            return None;
        }
        let rate = conditions.rate;
        let mut flicker = Flicker {
            pulses: None,
            table: None,
            rotations: Vec::new(),
        };
        if let Some(p) = &self.pulses {
            flicker.pulses =
                PulseTrain::new(p.frequency / rate, p.duty, p.edge * rate, p.rise, self.mean);
        }
        if flicker.pulses.is_none() {
            let kept = |lines: &[Line]| -> Vec<Line> {
                let heard = lines
                    .iter()
                    .filter(|l| l.depth != 0.0 && l.frequency < rate / 2.0);
                heard.copied().collect()
            };
            let (together, alone) = self.lines.split_at(self.periodic.map_or(0, |p| p.0));
            if let Some((_, frequency)) = self.periodic {
                flicker.table = PeriodTable::new(&kept(together), frequency, rate, self.mean);
            }
            flicker.rotations = kept(alone)
                .iter()
                .map(|l| Rotation::new(l.frequency / rate, self.mean * l.depth, l.phase))
                .collect();
        }
        flicker.moves().then_some(flicker)
    }
}

/// A lamp's flicker that runs.
pub struct Flicker {
    pulses: Option<PulseTrain>,
    table: Option<PeriodTable>,
    rotations: Vec<Rotation>,
}

impl Flicker {
    fn moves(&self) -> bool {
        self.pulses.is_some() || self.table.is_some() || !self.rotations.is_empty()
    }

    /// Adds the next samples, A, to `block`.
    pub fn add_to(&mut self, block: &mut [f64]) {
        if let Some(pulses) = &mut self.pulses {
            block.iter_mut().for_each(|x| *x += pulses.step());
        }
        if let Some(table) = &mut self.table {
            block.iter_mut().for_each(|x| *x += table.step());
        }
        for line in &mut self.rotations {
            block.iter_mut().for_each(|x| *x += line.step());
        }
    }
}
