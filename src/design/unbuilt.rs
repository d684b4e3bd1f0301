//! What the design file may say and no station can run yet. Each row disappears with the station that answers it.

use super::error::DesignError;
use super::section::Section;

/// Kinds, by the section's path without numbers or names.
const KINDS: [(&str, &str); 16] = [
    ("transmitter.driver", "transistor"),
    ("path", "fibre"),
    ("path", "diffuse"),
    ("ambient", "tube-magnetic"),
    ("ambient", "tube-electronic"),
    ("ambient", "pwm-lamp"),
    ("receiver.detector", "phototransistor"),
    ("receiver.detector", "photocell"),
    ("transmitter.stage", "transistor"),
    ("transmitter.stage", "filter"),
    ("transmitter.stage", "power"),
    ("receiver.stage", "transistor"),
    ("receiver.stage", "filter"),
    ("receiver.stage", "power"),
    ("output", "loudspeaker"),
    ("output", "headphone"),
];

/// Keys.
const KEYS: [(&str, &str); 4] = [
    ("path", "turbulence"),
    ("path", "wind"),
    ("path", "sway"),
    ("path", "sway_bandwidth"),
];

/// Refuses a section that asks for what is not built. A number of 0 asks for nothing.
pub(super) fn refuse(section: &Section, spec_path: &str) -> Result<(), DesignError> {
    let kind = section.kind.as_deref().unwrap_or_default();
    if KINDS.contains(&(spec_path, kind)) {
        let message = format!("{}: kind {kind} is not built yet", section.path);
        return Err(section.fault(Some("kind"), message, "another kind can be run"));
    }
    for (path, key) in KEYS {
        if path == spec_path && section.given(key) && section.optional(key) != Some(0.0) {
            let message = format!("{}.{key} is not built yet", section.path);
            return Err(section.fault(Some(key), message, "leave it out"));
        }
    }
    Ok(())
}
