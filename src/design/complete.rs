//! Whether a section says all it must, and nothing twice.

use super::error::DesignError;
use super::keys::{Absent, Choice, Key};
use super::section::Section;

/// Checks that nothing required is missing and that keys which stand for one another are not given together.
pub(super) fn complete(
    section: &Section,
    choices: &[Choice],
    class: Option<&str>,
) -> Result<(), DesignError> {
    let part = match class {
        Some(class) if !section.given("part") => {
            format!(", or name a part of class {class}: part = \"…\"")
        }
        _ => String::new(),
    };
    let missing = |key: &Key| {
        let message = format!("{} has no `{}`", section.path, key.name);
        section.fault(
            None,
            message,
            format!("add for example: {} ({}){part}", key.line(), key.meaning),
        )
    };
    for choice in choices {
        let taken: Vec<&&[&str]> = choice
            .ways
            .iter()
            .filter(|way| way.iter().any(|key| section.given(key)))
            .collect();
        match taken[..] {
            [] if choice.needed => {
                let firsts: Vec<&str> = choice.ways.iter().map(|way| way[0]).collect();
                let lines: Vec<String> = firsts
                    .iter()
                    .filter_map(|name| section.key(name))
                    .map(Key::line)
                    .collect();
                let message = format!("{} has none of {}", section.path, firsts.join(", "));
                return Err(section.fault(
                    None,
                    message,
                    format!("add one of: {}{part}", lines.join("; ")),
                ));
            }
            [] => {}
            [way] => {
                for name in *way {
                    if let Some(key) = section.key(name)
                        && !section.given(name)
                        && key.absent == Absent::Required
                    {
                        return Err(missing(key));
                    }
                }
            }
            [one, other, ..] => {
                let given = |way: &[&'static str]| {
                    way.iter()
                        .copied()
                        .find(|key| section.given(key))
                        .unwrap_or_default()
                };
                let (one, other) = (given(one), given(other));
                let message = format!("{}: `{one}` and `{other}` exclude each other", section.path);
                return Err(section.fault(Some(other), message, "give one of the two"));
            }
        }
    }
    let chosen = |name: &str| {
        choices
            .iter()
            .flat_map(|choice| choice.ways)
            .any(|way| way.contains(&name))
    };
    match section
        .keys
        .iter()
        .find(|key| key.absent == Absent::Required && !section.given(key.name) && !chosen(key.name))
    {
        Some(key) => Err(missing(key)),
        None => Ok(()),
    }
}
