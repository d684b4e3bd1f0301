//! Filters: buffered ones by family and order, shelves, and a plain resistor with its capacitor.

mod rc;
mod shape;

pub use rc::RcFilter;

use num_complex::Complex64;

use super::wiring::{Drive, Load};
use super::{Conditions, Limit, Model, Reading, Runner, Share};
use crate::design::Section as DesignSection;
use crate::quantity::Dimension;
use crate::signal::pole_pair::{Section, SectionLaw};
use shape::Shape;

/// A buffered filter: ideal amplifiers around exact parts, stiff at its output, without noise, limits or input current.
///
/// `corner` is the −3.01 dB frequency of butterworth and bessel, the end of the ripple band of chebyshev, whose largest gain is 1 (an
/// even order is `ripple` below it at 0 Hz). Of a band-pass or notch, `corner` is the geometric middle of the two edges, `width` their
/// distance by the same convention, and `order` that of each edge. A band-pass and a high-pass block 0 Hz and rest at the
/// reference of what follows; the others pass the rest of what drives them as it is. The input has no resistance of its own.
pub struct ActiveFilter {
    path: String,
    title: String,
    shape: Shape,
    sections: Vec<SectionLaw>,
    readings: Vec<Reading>,
    /// Rest before it and behind it, V.
    input: f64,
    output: f64,
    /// Gain in the middle of what it passes.
    gain: f64,
    warnings: Vec<String>,
}

impl ActiveFilter {
    /// Whether the section describes one (else it is an [`RcFilter`]).
    pub fn describes(section: &DesignSection) -> bool {
        section.optional_word("family") != Some("rc")
    }

    /// What it shows to the stage before it: nothing, but for where that would rest without a source of its own, the reference of `next`.
    pub fn input_load(next: &Load) -> Load {
        Load {
            return_voltage: next.return_voltage,
            ..Load::OPEN
        }
    }

    /// From its section, between `before` and `next`.
    pub fn new(section: &DesignSection, before: &Drive, next: &Load) -> Self {
        let shape = Shape::of(section);
        let sections = shape::sections(section, shape);
        let output = if shape.passes_rest() {
            before.rest
        } else {
            next.return_voltage
        };
        let mut readings = vec![Reading {
            name: "output",
            value: output,
            dimension: Dimension::Volt,
        }];
        if let Some(corner) = section.optional("corner") {
            match section.optional("width") {
                Some(width) => {
                    let upper = width / 2.0 + corner.hypot(width / 2.0);
                    for (name, value) in [
                        ("lower edge", corner * corner / upper),
                        ("upper edge", upper),
                    ] {
                        readings.push(Reading {
                            name,
                            value,
                            dimension: Dimension::Hertz,
                        });
                    }
                }
                None => readings.push(Reading {
                    name: "corner",
                    value: corner,
                    dimension: Dimension::Hertz,
                }),
            }
        }
        let at = |f: f64| sections.iter().map(|s| s.at(f)).product::<Complex64>();
        let gain = match shape {
            Shape::HighPass => 1.0,
            Shape::BandPass => at(section.number("corner")).norm(),
            _ => at(0.0).re,
        };
        let warnings = before.blocked.map(|c| {
            format!(
                "{}: the {} before it works into an open input, which gives it no corner and no DC path",
                section.path,
                Dimension::Farad.show(c)
            )
        });
        let title = match (section.optional_word("family"), section.optional("order")) {
            (Some(family), Some(order)) => {
                format!("{}, {family} of order {order}", section.word("shape"))
            }
            _ => section.word("shape").to_owned(),
        };
        Self {
            path: section.path.clone(),
            title,
            shape,
            sections,
            readings,
            input: before.rest,
            output,
            gain,
            warnings: warnings.into_iter().collect(),
        }
    }

    /// What it offers: a stiff node.
    pub fn drive(&self) -> Drive {
        Drive::stiff(self.output)
    }
}

impl Model for ActiveFilter {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        self.title.clone()
    }

    fn operating_point(&self) -> Vec<Reading> {
        self.readings.clone()
    }

    fn curve(&self, x: f64) -> f64 {
        self.gain * x
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        self.sections.iter().map(|s| s.at(frequency)).product()
    }

    fn noise(&self, _: f64) -> Vec<Share> {
        Vec::new()
    }

    fn limits(&self) -> Vec<Limit> {
        Vec::new()
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }

    fn slowest_time(&self) -> f64 {
        self.sections
            .iter()
            .map(SectionLaw::slowest_time)
            .fold(0.0, f64::max)
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        let mut sections: Vec<Section> = self
            .sections
            .iter()
            .map(|law| law.section(conditions.rate))
            .collect();
        if conditions.cold {
            // Every capacitor discharged: as a steady 0 V at the input has left it. Where rest passes, that is 0 V at the output too.
            let start = if self.shape.passes_rest() {
                -self.output / self.gain
            } else {
                -self.input
            };
            settle(&mut sections, start);
        }
        Box::new(FilterRunner { sections })
    }
}

/// Puts a row of sections where a constant `input` has brought it.
fn settle(sections: &mut [Section], input: f64) {
    sections
        .iter_mut()
        .fold(input, |x, section| section.settle(x));
}

struct FilterRunner {
    sections: Vec<Section>,
}

impl Runner for FilterRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        self.sections.iter_mut().for_each(|s| s.run(block));
    }
}
