//! What the design file may say and no station can run yet. Each row disappears with the station that answers it.

use super::error::DesignError;
use super::section::Section;

/// Kinds, by the section's path without numbers or names.
const KINDS: [(&str, &str); 0] = [];

/// Keys.
const KEYS: [(&str, &str); 3] = [
    ("transmitter.driver", "servo"),
    ("transmitter.emitter", "curve"),
    ("receiver.front_end", "ambient_servo"),
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
