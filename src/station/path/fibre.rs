//! The path through a fibre of large core: launch, ends, attenuation, connectors, and the detector at its end.
//!
//! No bend loss, and no dispersion: a hundred metres of plastic fibre pass 10 MHz and more. Light from outside does not enter the fibre; an ambient
//! light of the design falls on the detector as it is stated, whatever the path, since a connector may be open.

use super::LightPath;
use crate::design::Section;
use crate::physics::fibre as law;
use crate::physics::led::lambertian_order;
use crate::quantity::Dimension;
use crate::station::optics::Optics;

/// Sets `path` to what `[path]` of kind fibre says.
pub fn lay(path: &mut LightPath, section: &Section, emitter: &Section, optics: &Optics) {
    path.title = "fibre";
    let (core, aperture) = (section.number("core"), section.number("aperture"));
    let launch = match emitter.optional("half_angle") {
        Some(half_angle) => law::lambertian_launch(lambertian_order(half_angle), aperture),
        None => law::gaussian_launch(emitter.number("divergence"), aperture),
    } * law::area_overlap(core, emitter.number("source_diameter"));
    let faces = (1.0 - law::fresnel_reflection(law::CORE_INDEX)).powi(2);
    let decibels = section.number("attenuation") * section.number("length")
        + section.number("connectors") * section.number("connector_loss");
    let way = 10f64.powf(-decibels / 10.0);

    // All modes filled: the far end is a disc of even radiance inside the acceptance angle, close to what collects it.
    let end = std::f64::consts::PI / 4.0 * core * core;
    let covered = (optics.area / end).min(1.0);
    let seen = (optics.field_of_view.sin() / aperture).powi(2).min(1.0);
    path.gain = launch * faces * way * covered * seen;

    // The sum with 0 shows no loss as 0, not as −0.
    let loss = |share: f64| 0.0 - 10.0 * share.log10();
    path.add_reading("launch loss", loss(launch), Dimension::Decibel);
    path.add_reading("loss at both faces", loss(faces), Dimension::Decibel);
    path.add_reading("attenuation and connectors", decibels, Dimension::Decibel);
    path.add_reading(
        "loss at the detector",
        loss(covered * seen),
        Dimension::Decibel,
    );
}
