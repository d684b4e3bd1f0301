//! The path through air: what share of the emitted flux lands on the detector, and cuts of the beam.

use num_complex::Complex64;

use super::{Conditions, Events, Limit, Model, Reading, Runner, Share};
use crate::design::{DesignError, Section};
use crate::physics::air as law;
use crate::physics::led::lambertian_order;
use crate::quantity::Dimension;
use crate::signal::noise::Gaussian;

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

/// The path through air, as one gain and the times at which it is cut.
pub struct AirPath {
    path: String,
    gain: f64,
    /// Emitted flux at rest, W.
    flux: f64,
    interruptions: Vec<Interruption>,
    readings: Vec<Reading>,
    warnings: Vec<String>,
}

#[derive(Debug, Clone)]
struct Interruption {
    name: String,
    when: When,
    lasts: f64,
    edge: f64,
}

#[derive(Debug, Clone, Copy)]
enum When {
    At(f64),
    /// At random, so many a second on the average.
    Rate(f64),
}

impl AirPath {
    /// From `[path]`, its interruptions, `[transmitter.emitter]` and the optics; `flux` is the emitted flux at rest, W.
    ///
    /// # Errors
    /// Where a value and another contradict each other.
    pub fn new(
        section: &Section,
        interruptions: &[Section],
        emitter: &Section,
        optics: &Optics,
        flux: f64,
    ) -> Result<Self, DesignError> {
        let distance = section.number("distance");
        let (off_axis, tilt) = (section.number("off_axis"), section.number("tilt"));
        let wavelength = emitter.number("wavelength");
        let mut warnings = Vec::new();
        let capture = if let Some(half_angle) = emitter.optional("half_angle") {
            law::lambertian_capture(
                lambertian_order(half_angle),
                optics.area * optics.concentrator,
                distance,
                off_axis,
                tilt,
            )
        } else {
            let divergence = emitter.number("divergence");
            let radius = law::beam_radius(emitter.number("source_diameter"), divergence, distance);
            let aperture = (optics.area * optics.concentrator / std::f64::consts::PI).sqrt();
            law::gaussian_capture(radius, aperture, distance * off_axis.tan()) * tilt.cos().max(0.0)
        };
        let mut gain = capture;
        if tilt > optics.field_of_view {
            gain = 0.0;
            warnings.push(format!(
                "{}: the receiver is tilted by {}, outside its field of view of {}: no light arrives",
                section.path,
                Dimension::Angle.show(tilt),
                Dimension::Angle.show(optics.field_of_view)
            ));
        }
        if let Some(filter) = optics.filter {
            let passes = filter.passes(wavelength, emitter.number("linewidth"));
            if passes < 0.1 * filter.transmission {
                warnings.push(format!(
                    "receiver.optics.filter: centred at {}, it passes {} of the emitter's light at {}",
                    Dimension::Metre.show(filter.centre),
                    Dimension::Share.show(passes),
                    Dimension::Metre.show(wavelength)
                ));
            }
            gain *= passes;
        }
        gain *= section.numbers("windows").iter().product::<f64>();
        let mut extinction = 0.0;
        if let Some(visibility) = section.optional("visibility") {
            extinction += law::haze_extinction(visibility, wavelength);
        }
        if let Some(rain) = section.optional("rain") {
            extinction += rain / (10.0 * std::f64::consts::LOG10_E);
        }
        gain *= (-extinction * distance).exp();
        let readings = vec![
            Reading {
                name: "share of the flux",
                value: gain,
                dimension: Dimension::Share,
            },
            Reading {
                name: "on the detector",
                value: gain * flux,
                dimension: Dimension::Watt,
            },
        ];
        let interruptions = interruptions
            .iter()
            .map(|s| Interruption {
                name: s.path.clone(),
                when: s
                    .optional("at")
                    .map_or_else(|| When::Rate(s.number("rate")), When::At),
                lasts: s.number("lasts"),
                edge: s.number("edge"),
            })
            .collect();
        Ok(Self {
            path: section.path.clone(),
            gain,
            flux,
            interruptions,
            readings,
            warnings,
        })
    }

    /// Light on the detector at rest, W.
    pub fn received(&self) -> f64 {
        self.gain * self.flux
    }
}

impl Model for AirPath {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        "air".into()
    }

    fn operating_point(&self) -> Vec<Reading> {
        self.readings.clone()
    }

    fn curve(&self, x: f64) -> f64 {
        self.gain * x
    }

    fn transfer(&self, _: f64) -> Complex64 {
        self.gain.into()
    }

    fn noise(&self, _: f64) -> Vec<Share> {
        Vec::new()
    }

    fn limits(&self) -> Vec<Limit> {
        vec![Limit::Level {
            cause: "darkness",
            at: -self.received(),
        }]
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        let kept = if conditions.interruptions {
            self.interruptions.as_slice()
        } else {
            &[]
        };
        let cuts = kept
            .iter()
            .map(|i| Cut::new(i.clone(), conditions.seed))
            .collect();
        Box::new(AirRunner {
            gain: self.gain,
            flux: self.flux,
            rate: conditions.rate,
            sample: 0,
            cuts,
            count: 0,
        })
    }
}

struct AirRunner {
    gain: f64,
    flux: f64,
    rate: f64,
    sample: u64,
    cuts: Vec<Cut>,
    count: u64,
}

/// One cause of interruptions; the beam is the same for every channel and every run of a seed.
struct Cut {
    cause: Interruption,
    draws: Gaussian,
    /// When the current or next cut begins, s.
    begins: f64,
    begun: bool,
}

impl Cut {
    fn new(cause: Interruption, seed: u64) -> Self {
        let draws = Gaussian::new(seed, 0, &cause.name, "times");
        let mut cut = Self {
            cause,
            draws,
            begins: 0.0,
            begun: false,
        };
        cut.begins = match cut.cause.when {
            When::At(at) => at,
            When::Rate(rate) => cut.wait(rate),
        };
        cut
    }

    /// An exponential waiting time, s: half the sum of two squared normal draws has the unit exponential distribution.
    fn wait(&mut self, rate: f64) -> f64 {
        let (a, b) = (self.draws.draw(), self.draws.draw());
        (a * a + b * b) / (2.0 * rate)
    }

    /// Share of the beam that passes at `time` (s), and whether a cut begins with this call.
    fn passes(&mut self, time: f64) -> (f64, bool) {
        let Interruption {
            when, lasts, edge, ..
        } = self.cause;
        if let When::Rate(rate) = when {
            // The next one is awaited from the end of this one.
            while time >= self.begins + lasts + edge {
                self.begins += lasts + edge + self.wait(rate);
                self.begun = false;
            }
        }
        let since = time - self.begins;
        let begins = since >= 0.0 && !self.begun;
        self.begun |= begins;
        (
            1.0 - shade(since, edge) + shade(since - lasts, edge),
            begins,
        )
    }
}

/// How dark a cut is `since` seconds after its edge began: a raised cosine over `edge` seconds.
fn shade(since: f64, edge: f64) -> f64 {
    if since < 0.0 {
        0.0
    } else if since >= edge {
        1.0
    } else {
        0.5 - 0.5 * (std::f64::consts::PI * since / edge).cos()
    }
}

impl Runner for AirRunner {
    fn run(&mut self, block: &mut [f64], _: &[f64]) {
        if self.cuts.is_empty() {
            block.iter_mut().for_each(|x| *x *= self.gain);
            return;
        }
        let rest = self.gain * self.flux;
        for x in block {
            let time = self.sample as f64 / self.rate;
            let mut open = 1.0;
            for cut in &mut self.cuts {
                let (share, begins) = cut.passes(time);
                open *= share;
                self.count += u64::from(begins);
            }
            // The whole flux is cut, what stands at rest as well.
            *x = open * self.gain * (self.flux + *x) - rest;
            self.sample += 1;
        }
    }

    fn events(&self) -> Events {
        Events {
            interruptions: self.count,
            ..Events::default()
        }
    }
}
