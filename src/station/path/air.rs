//! The path through air: spreading, pointing, weather, windows, and the fades of turbulence and sway.

use super::LightPath;
use super::scintillation::Scintillation;
use super::sway::{Capture, Sway};
use crate::design::Section;
use crate::physics::air as law;
use crate::physics::led::lambertian_order;
use crate::physics::pointing::BeamCapture;
use crate::quantity::Dimension;
use crate::station::optics::Optics;

/// Sets `path` to what `[path]` of kind air says.
pub fn lay(path: &mut LightPath, section: &Section, emitter: &Section, optics: &Optics) {
    path.title = "air";
    let distance = section.number("distance");
    let (off_axis, tilt) = (section.number("off_axis"), section.number("tilt"));
    let wavelength = emitter.number("wavelength");
    let area = optics.area * optics.concentrator;
    let sways = section.number("sway") > 0.0;
    let (captured, capture) = if let Some(half_angle) = emitter.optional("half_angle") {
        let order = lambertian_order(half_angle);
        let capture = sways.then_some(Capture::Lambertian {
            order,
            area,
            distance,
            tilt,
        });
        (
            law::lambertian_capture(order, area, distance, off_axis, tilt),
            capture,
        )
    } else {
        let divergence = emitter.number("divergence");
        let radius = law::beam_radius(emitter.number("source_diameter"), divergence, distance);
        let aperture = (area / std::f64::consts::PI).sqrt();
        let facing = tilt.cos().max(0.0);
        let capture = sways.then(|| Capture::Beam {
            radius,
            aperture,
            distance,
            facing,
            share: BeamCapture::new(radius, aperture),
        });
        (
            law::gaussian_capture(radius, aperture, distance * off_axis.tan()) * facing,
            capture,
        )
    };
    path.gain = captured;
    if tilt > optics.field_of_view {
        path.gain = 0.0;
        path.warnings.push(format!(
            "{}: the receiver is tilted by {}, outside its field of view of {}: no light arrives",
            section.path,
            Dimension::Angle.show(tilt),
            Dimension::Angle.show(optics.field_of_view)
        ));
    }
    path.gain *= section.numbers("windows").iter().product::<f64>();
    let mut extinction = 0.0;
    if let Some(visibility) = section.optional("visibility") {
        extinction += law::haze_extinction(visibility, wavelength);
    }
    if let Some(rain) = section.optional("rain") {
        extinction += rain / (10.0 * std::f64::consts::LOG10_E);
    }
    path.gain *= (-extinction * distance).exp();

    path.fades.scintillation = Scintillation::new(section, optics.area, wavelength);
    path.fades.sway = capture.and_then(|capture| Sway::new(section, capture));
    if let Some(scintillation) = &path.fades.scintillation {
        path.readings.extend(scintillation.readings());
        path.warnings.extend(scintillation.warnings());
    }
    if let Some(sway) = &path.fades.sway {
        path.readings.extend(sway.readings());
        path.warnings.extend(sway.warnings());
    }
}
