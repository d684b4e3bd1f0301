//! Scintillation of the air in time.

use std::sync::Arc;

use super::fades::Ease;
use crate::design::Section;
use crate::physics::turbulence::{self as law, Irradiance};
use crate::quantity::Dimension;
use crate::signal::noise::Gaussian;
use crate::signal::wander::{Glide, Wander, knot_rate};
use crate::station::{Conditions, Reading};

/// Order of the fall above the corner: the power density of the logarithm of irradiance goes as (1 + (f/f₀)²)^(−4/3), level below the corner and as
/// f^(−8/3) above it, as Tatarskii (1961) found for frozen turbulence. Twenty corners up it ends.
const ORDER: f64 = 4.0 / 3.0;
/// Chance of a fade as deep as the one that is reported.
const RARE: f64 = 0.01;

/// Scintillation on paper: the law of the irradiance and how fast it moves.
#[derive(Debug, Clone)]
pub struct Scintillation {
    path: String,
    irradiance: Arc<Irradiance>,
    rytov: f64,
    index: f64,
    /// Hz
    corner: f64,
}

impl Scintillation {
    /// From `[path]` with its turbulence, `None` where there is none; `area` (m²) collects the light of `wavelength` (m).
    ///
    /// In strong turbulence the large cells really move slower and the small ones faster than the one corner both are given here.
    pub fn new(section: &Section, area: f64, wavelength: f64) -> Option<Self> {
        let structure = section.number("turbulence");
        let distance = section.number("distance");
        let rytov = law::rytov_variance(structure, wavelength, distance);
        if rytov <= 0.0 {
            return None;
        }
        let diameter = law::disc_diameter(area);
        let averaging = law::aperture_averaging(diameter, wavelength, distance);
        Some(Self {
            path: section.path.clone(),
            irradiance: Arc::new(Irradiance::new(rytov, averaging)),
            rytov,
            index: averaging * law::scintillation_index(rytov),
            corner: law::fade_rate(section.number("wind"), wavelength, distance),
        })
    }

    /// What it does to the light.
    pub fn readings(&self) -> Vec<Reading> {
        let reading = |name, value, dimension| Reading {
            name,
            value,
            dimension,
        };
        let deep = 10.0 * self.irradiance.quantile(RARE).log10();
        vec![
            reading("Rytov variance", self.rytov, Dimension::Number),
            reading("scintillation index", self.index, Dimension::Number),
            reading("scintillation corner", self.corner, Dimension::Hertz),
            reading("fades of 1 % of the time", deep, Dimension::Decibel),
        ]
    }

    /// What an engineer ought to know.
    pub fn warnings(&self) -> Vec<String> {
        let mut warnings = Vec::new();
        if self.rytov > law::RYTOV_RANGE {
            warnings.push(format!(
                "{}: the Rytov variance of {} is beyond {}, to which the law of strong scintillation has been held: the fades are an extrapolation",
                self.path,
                Dimension::Number.show(self.rytov),
                Dimension::Number.show(law::RYTOV_RANGE)
            ));
        }
        if self.corner == 0.0 {
            warnings.push(format!(
                "{}: without wind scintillation stands still: the light keeps one value drawn at random for the whole run",
                self.path
            ));
        }
        warnings
    }

    /// The scintillation in time: the same for every channel and every run of a seed, whatever the run's rate.
    pub fn in_time(&self, conditions: &Conditions) -> Scintillating {
        let rate = knot_rate(self.corner, conditions.rate);
        let wander = |cause| {
            let source = Gaussian::new(conditions.seed, 0, &self.path, cause);
            Wander::new(ORDER, self.corner, rate, source)
        };
        let mut cells = Cells {
            irradiance: Arc::clone(&self.irradiance),
            large: wander("scintillation"),
            small: wander("scintillation of small cells"),
        };
        Scintillating {
            glide: Glide::new(rate, conditions.rate, || cells.next()),
            cells,
            ease: Ease::new(self.corner, conditions.rate),
        }
    }
}

struct Cells {
    irradiance: Arc<Irradiance>,
    large: Wander,
    small: Wander,
}

impl Cells {
    fn next(&mut self) -> f64 {
        let large = self.large.draw();
        let small = match *self.irradiance {
            Irradiance::LogNormal { .. } => 0.0,
            Irradiance::GammaGamma { .. } => self.small.draw(),
        };
        self.irradiance.at_normal(large, small)
    }
}

/// Scintillation that runs.
pub struct Scintillating {
    cells: Cells,
    glide: Glide,
    ease: Ease,
}

impl Scintillating {
    /// The irradiance over its mean at the next sample.
    #[inline]
    pub fn step(&mut self) -> f64 {
        let cells = &mut self.cells;
        // The curve between two knots may dip under a deep fade.
        let share = self.glide.step(|| cells.next()).max(0.0);
        1.0 + self.ease.step() * (share - 1.0)
    }
}
