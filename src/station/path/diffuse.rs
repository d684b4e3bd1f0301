//! The path by the scatter of a room's surfaces, without a line of sight: where emitter and receiver stand and look does not matter.

use super::LightPath;
use crate::design::{DesignError, Section};
use crate::physics::room as law;
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;
use crate::station::optics::Optics;

/// Share of the scattered light that a receiver may take before the room law, which leaves the receiver out, is in doubt.
const LARGE: f64 = 0.01;

/// Sets `path` to what `[path]` of kind diffuse says.
///
/// # Errors
/// A volume that the surface cannot enclose.
pub fn lay(path: &mut LightPath, section: &Section, optics: &Optics) -> Result<(), DesignError> {
    path.title = "diffuse room";
    let surface = section.number("surface");
    let reflectance = section.number("reflectance");
    let volume = section.number("volume");
    let largest = law::largest_volume(surface);
    if volume > largest * (1.0 + 1e-9) {
        return Err(section.fault(
            Some("volume"),
            format!(
                "{}: a surface of {} encloses at most {}",
                section.path,
                Dimension::SquareMetre.show(surface),
                Dimension::CubicMetre.show(largest)
            ),
            "give the room's whole inner surface, floor and ceiling included",
        ));
    }
    // The light comes evenly from all the half space; inside the field of view lies sin²Ψ of it.
    let field = optics.field_of_view.sin().powi(2);
    let area = optics.area * optics.concentrator * field;
    let share = area * law::irradiance(surface, reflectance);
    path.gain = share.min(1.0);
    if area > LARGE * surface * (1.0 - reflectance) {
        path.warnings.push(format!(
            "{}: the receiver takes {} of the light in the room; the law holds while that is little",
            section.path,
            Dimension::Share.show(path.gain)
        ));
    }
    let time = law::decay_time(surface, reflectance, volume);
    path.pole = FirstOrderLaw::low_pass(1.0 / time);
    path.add_reading("decay time of the light", time, Dimension::Second);
    Ok(())
}
