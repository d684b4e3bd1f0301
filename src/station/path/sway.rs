//! Sway of the emitter's axis.

use std::sync::Arc;

use super::fades::Ease;
use crate::design::Section;
use crate::physics::air::lambertian_capture;
use crate::physics::pointing::{BeamCapture, lambertian_mean, swayed_radius};
use crate::quantity::Dimension;
use crate::signal::noise::Gaussian;
use crate::signal::wander::{Glide, Wander, knot_rate};
use crate::station::{Conditions, Reading};

/// Two equal poles: the angle's power density falls as (1 + (f/f_p)²)^(−2), by 3 dB at the sway's bandwidth, which is f_p·√(√2 − 1).
const ORDER: f64 = 2.0;
const POLE: f64 = 0.643_594_252_905_582_6;
/// Mean loss that is warned of, dB.
const TOLD: f64 = 1.0;

/// What the receiver catches of the emitter's light, by the angle between the emitter's axis and the line of sight.
#[derive(Debug, Clone)]
pub enum Capture {
    /// A Lambertian pattern of an order.
    Lambertian {
        order: f64,
        area: f64,
        distance: f64,
        tilt: f64,
    },
    /// A Gaussian beam of 1/e² radius `radius` onto an aperture of radius `aperture`, m.
    Beam {
        radius: f64,
        aperture: f64,
        distance: f64,
        facing: f64,
        share: BeamCapture,
    },
}

impl Capture {
    /// Share of the flux under the cosine of that angle.
    fn at(&self, cosine: f64) -> f64 {
        match self {
            Self::Lambertian {
                order,
                area,
                distance,
                tilt,
            } => lambertian_capture(*order, *area, *distance, cosine.min(1.0).acos(), *tilt),
            Self::Beam {
                distance,
                facing,
                share,
                ..
            } => {
                if cosine <= 0.0 {
                    return 0.0;
                }
                let tangent = (1.0 / (cosine * cosine) - 1.0).max(0.0).sqrt();
                share.at(distance * tangent) * facing
            }
        }
    }

    /// Its mean over a sway of `deviation` (rad rms an axis) about `off_axis`, over its value without sway.
    fn mean_loss(&self, off_axis: f64, deviation: f64) -> f64 {
        match self {
            Self::Lambertian { order, .. } => lambertian_mean(*order, off_axis, deviation),
            Self::Beam {
                radius,
                aperture,
                distance,
                facing,
                share,
            } => {
                let wide = swayed_radius(*radius, distance * deviation);
                let offset = distance * off_axis.tan();
                let mean = crate::physics::air::gaussian_capture(wide, *aperture, offset);
                if *facing > 0.0 {
                    mean / share.at(offset)
                } else {
                    1.0
                }
            }
        }
    }
}

/// Sway on paper.
#[derive(Debug, Clone)]
pub struct Sway {
    path: String,
    /// rad rms an axis.
    deviation: f64,
    /// Hz
    bandwidth: f64,
    off_axis: f64,
    capture: Arc<Capture>,
    /// Share caught without sway.
    still: f64,
}

impl Sway {
    /// From `[path]`, `None` where nothing sways or nothing is caught.
    pub fn new(section: &Section, capture: Capture) -> Option<Self> {
        let deviation = section.number("sway");
        let off_axis = section.number("off_axis");
        let still = capture.at(off_axis.cos());
        (deviation > 0.0 && still > 0.0).then(|| Self {
            path: section.path.clone(),
            deviation,
            bandwidth: section.number("sway_bandwidth"),
            off_axis,
            capture: Arc::new(capture),
            still,
        })
    }

    /// dB, positive for a loss.
    fn mean_loss(&self) -> f64 {
        -10.0
            * self
                .capture
                .mean_loss(self.off_axis, self.deviation)
                .log10()
    }

    /// What it does to the light.
    pub fn readings(&self) -> Vec<Reading> {
        vec![Reading {
            name: "mean loss by sway",
            value: self.mean_loss(),
            dimension: Dimension::Decibel,
        }]
    }

    /// What an engineer ought to know.
    pub fn warnings(&self) -> Vec<String> {
        let loss = self.mean_loss();
        if loss.abs() < TOLD {
            return Vec::new();
        }
        vec![format!(
            "{}: sway of {} rms an axis changes the light by {} on the average; the operating point and the test figures are those of the emitter at rest",
            self.path,
            Dimension::Angle.show(self.deviation),
            Dimension::Decibel.show(-loss)
        )]
    }

    /// The sway in time: the same for every channel and every run of a seed, whatever the run's rate.
    pub fn in_time(&self, conditions: &Conditions) -> Swaying {
        let pole = self.bandwidth / POLE;
        let rate = knot_rate(pole, conditions.rate);
        let wander = |cause| {
            let source = Gaussian::new(conditions.seed, 0, &self.path, cause);
            Wander::new(ORDER, pole, rate, source)
        };
        let mut axes = Axes {
            sway: self.clone(),
            along: wander("sway along the offset"),
            across: wander("sway across the offset"),
        };
        Swaying {
            glide: Glide::new(rate, conditions.rate, || axes.next()),
            axes,
            ease: Ease::new(self.bandwidth, conditions.rate),
        }
    }
}

struct Axes {
    sway: Sway,
    along: Wander,
    across: Wander,
}

impl Axes {
    /// The share caught, over the one without sway, at the next knot.
    fn next(&mut self) -> f64 {
        let Sway {
            deviation,
            off_axis,
            still,
            ..
        } = self.sway;
        let along = off_axis + deviation * self.along.draw();
        let across = deviation * self.across.draw();
        // The axis turned in two planes: its cosine to the line of sight is the product.
        let cosine = along.cos() * across.cos();
        let ahead =
            along.abs() < std::f64::consts::FRAC_PI_2 && across.abs() < std::f64::consts::FRAC_PI_2;
        if ahead {
            self.sway.capture.at(cosine) / still
        } else {
            0.0
        }
    }
}

/// Sway that runs.
pub struct Swaying {
    axes: Axes,
    glide: Glide,
    ease: Ease,
}

impl Swaying {
    /// The light over what it is without sway at the next sample.
    #[inline]
    pub fn step(&mut self) -> f64 {
        let axes = &mut self.axes;
        let share = self.glide.step(|| axes.next()).max(0.0);
        1.0 + self.ease.step() * (share - 1.0)
    }
}
