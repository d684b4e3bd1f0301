//! `harklight parts`: the catalogue, one part, or the reference of the design file's keys.

use std::io::Write;
use std::path::PathBuf;
use std::process::ExitCode;

use miette::miette;
use serde_json::{Value as Json, json};

use super::reference;
use crate::design::keys::{CLASSES, Class};
use crate::design::{Catalogue, DesignError, Part, Section, Value};
use crate::quantity::{Dimension, format};

/// List the catalogue, show one part, or print the keys of the design file
#[derive(Debug, clap::Args)]
pub struct Args {
    /// Part to show with all its values
    #[arg(conflicts_with = "keys")]
    name: Option<String>,
    /// Only parts of this class
    #[arg(long, conflicts_with = "keys")]
    class: Option<String>,
    /// Reference of the design file's keys: all sections, or those that begin with SECTION
    #[arg(long, value_name = "SECTION", num_args = 0..=1, default_missing_value = "")]
    keys: Option<String>,
    /// A catalogue of your own, beside the built-in one
    #[arg(long, value_name = "FILE")]
    catalogue: Option<PathBuf>,
    /// Print one JSON document
    #[arg(long)]
    json: bool,
}

/// Prints what was asked for.
///
/// # Errors
/// An unknown part, class or section; a catalogue that cannot be read.
pub fn run(args: &Args) -> Result<ExitCode, miette::Report> {
    if let Some(section) = &args.keys {
        return say(&reference::print(section, args.json)?);
    }
    let built_in = Catalogue::built_in();
    let catalogue = match &args.catalogue {
        None => built_in.clone(),
        Some(path) => {
            let text = std::fs::read_to_string(path).map_err(|error| {
                miette!(
                    help = "check the file's name and rights",
                    "cannot read {}: {error}",
                    path.display()
                )
            })?;
            built_in.with(Catalogue::from_text(&path.display().to_string(), &text)?)
        }
    };
    let class = args.class.as_deref().map(class_of).transpose()?;
    let parts: Vec<&Part> = match &args.name {
        Some(name) => vec![catalogue.part(name)?],
        None => catalogue.parts().collect(),
    };
    let parts: Vec<&Part> = parts
        .into_iter()
        .filter(|part| class.is_none_or(|class| part.class.name == class.name))
        .collect();
    if let (Some(name), Some(class), true) = (&args.name, class, parts.is_empty()) {
        return Err(miette!(
            help = "leave --class out",
            "part `{name}` is not of class {}",
            class.name
        ));
    }
    say(&match (args.json, &args.name) {
        (true, _) => as_json(&parts),
        (false, Some(_)) => parts.iter().map(|part| one(part)).collect(),
        (false, None) => list(&parts),
    })
}

fn class_of(word: &str) -> Result<&'static Class, DesignError> {
    CLASSES
        .into_iter()
        .find(|class| class.name == word)
        .ok_or_else(|| {
            let known: Vec<&str> = CLASSES.iter().map(|class| class.name).collect();
            DesignError::new(
                None,
                std::format!("there is no class `{word}`"),
                std::format!("the classes are {}", known.join(", ")),
            )
        })
}

/// Writes a whole answer to standard output. A reader that has gone away is no fault; any other failure is the machine's.
pub(super) fn say(text: &str) -> Result<ExitCode, miette::Report> {
    let mut out = std::io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() != std::io::ErrorKind::BrokenPipe => {
            eprintln!("cannot write to standard output: {error}");
            Ok(ExitCode::from(3))
        }
        _ => Ok(ExitCode::SUCCESS),
    }
}

fn list(parts: &[&Part]) -> String {
    let width = parts
        .iter()
        .map(|part| part.name.chars().count())
        .max()
        .unwrap_or(0);
    let mut text = String::new();
    for class in CLASSES {
        let members: Vec<&&Part> = parts
            .iter()
            .filter(|part| part.class.name == class.name)
            .collect();
        if members.is_empty() {
            continue;
        }
        text.push_str(&std::format!("{}\n", class.name));
        for part in members {
            text.push_str(&std::format!("  {:width$}  {}\n", part.name, part.about));
        }
    }
    text
}

fn one(part: &Part) -> String {
    let mut text = std::format!(
        "{}: {}\nclass {}\n\n",
        part.name,
        part.about,
        part.class.name
    );
    let rows: Vec<(&str, String, &str)> = values(&part.values)
        .map(|(key, _, shown)| {
            (
                key,
                shown,
                part.values.key(key).map_or("", |key| key.meaning),
            )
        })
        .collect();
    let name = rows
        .iter()
        .map(|row| row.0.chars().count())
        .max()
        .unwrap_or(0);
    let value = rows
        .iter()
        .map(|row| row.1.chars().count())
        .max()
        .unwrap_or(0);
    for (key, shown, meaning) in rows {
        text.push_str(&std::format!("  {key:name$}  {shown:value$}  {meaning}\n"));
    }
    if !part.basis.is_empty() {
        text.push_str(&std::format!("\nBasis: {}\n", part.basis.trim()));
    }
    text
}

/// The numbers of a part in the order of its class: key, dimension and SI value, and as printed.
fn values(section: &Section) -> impl Iterator<Item = (&'static str, (Dimension, f64), String)> {
    section.keys().iter().filter_map(|key| {
        let (Value::Numbers(numbers), dimension) =
            (&section.entry(key.name)?.value, key.dimension()?)
        else {
            return None;
        };
        let value = *numbers.first()?;
        Some((key.name, (dimension, value), format(value, dimension)))
    })
}

fn as_json(parts: &[&Part]) -> String {
    let parts: Vec<Json> = parts
        .iter()
        .map(|part| {
            let values: serde_json::Map<String, Json> = values(&part.values)
                .map(|(key, (dimension, value), shown)| {
                    (key.to_string(), json!({ "si": number(value), "text": shown, "takes": dimension.name() }))
                })
                .collect();
            json!({
                "name": part.name, "class": part.class.name, "about": part.about, "basis": part.basis.trim(), "values": values,
            })
        })
        .collect();
    document(json!({ "parts": parts }))
}

/// JSON has no infinity: it stands as the word the design file uses.
pub(super) fn number(value: f64) -> Json {
    if value.is_finite() {
        json!(value)
    } else {
        json!("inf")
    }
}

/// A whole answer with the program's name and version.
pub(super) fn document(body: Json) -> String {
    let mut whole = json!({ "tool": "harklight", "version": env!("CARGO_PKG_VERSION") });
    if let (Some(whole), Json::Object(body)) = (whole.as_object_mut(), body) {
        whole.extend(body);
    }
    std::format!("{whole:#}\n")
}

#[cfg(test)]
mod tests {
    use super::*;

    fn all() -> Vec<&'static Part> {
        Catalogue::built_in().parts().collect()
    }

    #[test]
    fn the_list_names_every_part_once_under_its_class() {
        let text = list(&all());
        for part in all() {
            let start = std::format!("  {} ", part.name);
            assert_eq!(
                text.lines().filter(|line| line.starts_with(&start)).count(),
                1,
                "{}",
                part.name
            );
        }
        for class in CLASSES {
            assert!(text.lines().any(|line| line == class.name));
        }
    }

    #[test]
    fn one_part_shows_every_value_with_its_unit_and_its_basis() {
        let text = one(Catalogue::built_in().part("ir-led-narrow").unwrap());
        assert!(
            text.contains("940 nm") && text.contains("-155 dB/Hz") && text.contains("Basis: "),
            "{text}"
        );
        for key in ["half_angle", "thermal_resistance", "source_diameter"] {
            assert!(text.contains(key));
        }
    }

    #[test]
    fn json_carries_si_values() {
        let parsed: Json = serde_json::from_str(&as_json(&all())).unwrap();
        let part = parsed["parts"]
            .as_array()
            .unwrap()
            .iter()
            .find(|part| part["name"] == "jfet-input")
            .unwrap();
        assert_eq!(part["values"]["gbw"]["si"], 4e6);
        assert_eq!(part["values"]["gbw"]["text"], "4 MHz");
        assert_eq!(parsed["tool"], "harklight");
    }

    #[test]
    fn an_unknown_class_lists_the_classes() {
        let error = class_of("led").unwrap_err();
        assert!(error.help_text().contains("emitter"));
    }
}
