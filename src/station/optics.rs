//! The receiver's optics: what collects light in front of the detector, and its filter.

use crate::design::Section;
use crate::physics::air as law;

/// The receiver's optics as they stand in front of the detector.
#[derive(Debug, Clone)]
pub struct Optics {
    /// Area that collects light, m²: the aperture, or the detector's own area where there is none.
    pub area: f64,
    /// Half angle of the field of view, rad.
    pub field_of_view: f64,
    /// Gain of a concentrator inside the field of view (1: none).
    pub concentrator: f64,
    /// The optical filter.
    pub filter: Option<Filter>,
}

/// An optical band-pass filter.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Filter {
    /// m
    pub centre: f64,
    /// Full width at half transmission, m.
    pub width: f64,
    /// Share of a line at the centre that passes.
    pub transmission: f64,
}

impl Filter {
    /// Share of an emitter's line at `wavelength` (m), full width at half power `linewidth` (m), that passes.
    ///
    /// A square passband and a Gaussian line; `transmission` is what a line at the centre keeps (as it was measured), a line off the centre
    /// keeps that times its overlap relative to the centred one. An approximation within the passband's edges.
    pub fn passes(&self, wavelength: f64, linewidth: f64) -> f64 {
        let half = self.width / 2.0;
        let off = (wavelength - self.centre).abs();
        if linewidth <= 0.0 {
            return if off <= half { self.transmission } else { 0.0 };
        }
        // Half width at half power of a Gaussian is σ·√(2 ln 2).
        let sigma = linewidth / (8.0 * std::f64::consts::LN_2).sqrt();
        let overlap = |off: f64| gaussian_share(off - half, off + half, sigma);
        self.transmission * overlap(off) / overlap(0.0)
    }
}

/// Share of a unit Gaussian of deviation `sigma` between two points, by Simpson's rule.
fn gaussian_share(from: f64, to: f64, sigma: f64) -> f64 {
    let (a, b) = (
        (from / sigma).clamp(-9.0, 9.0),
        (to / sigma).clamp(-9.0, 9.0),
    );
    let n = 200;
    let h = (b - a) / n as f64;
    let density = |x: f64| (-x * x / 2.0).exp();
    let inner: f64 = (1..n)
        .map(|k| density(a + h * k as f64) * if k % 2 == 1 { 4.0 } else { 2.0 })
        .sum();
    h / 3.0 * (density(a) + inner + density(b)) / std::f64::consts::TAU.sqrt()
}

impl Optics {
    /// From `[receiver.optics]`; `detector_area` in m².
    pub fn new(section: &Section, detector_area: f64) -> Self {
        let field_of_view = section
            .optional("field_of_view")
            .unwrap_or(std::f64::consts::FRAC_PI_2);
        let area = match (section.optional("aperture"), section.optional("area")) {
            (Some(diameter), _) => std::f64::consts::PI / 4.0 * diameter * diameter,
            (None, Some(area)) => area,
            (None, None) => detector_area,
        };
        Self {
            area,
            field_of_view,
            concentrator: section
                .given("concentrator_index")
                .then(|| section.number("concentrator_index"))
                .map_or(1.0, |index| law::concentrator_gain(index, field_of_view)),
            filter: section.table("filter").map(|f| Filter {
                centre: f.number("centre"),
                width: f.number("width"),
                transmission: f.number("transmission"),
            }),
        }
    }
}
