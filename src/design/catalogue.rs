//! Catalogue parts: typical values of classes of components, built in or the user's own.

use std::collections::BTreeMap;
use std::sync::{Arc, OnceLock};

use super::complete::complete;
use super::error::{DesignError, SourceText};
use super::keys::{CLASSES, Choice, Class};
use super::node::{self, Field, Tree};
use super::read;
use super::section::{Entry, Origin, Section};
use super::suggest::did_you_mean;

/// One part of the catalogue.
#[derive(Clone, Debug)]
pub struct Part {
    /// Its name in `part = "…"`.
    pub name: String,
    /// Its class.
    pub class: &'static Class,
    /// What it is.
    pub about: String,
    /// Where its values come from.
    pub basis: String,
    /// Its values.
    pub values: Section,
}

/// The parts by name.
#[derive(Clone, Debug, Default)]
pub struct Catalogue {
    parts: BTreeMap<String, Part>,
}

impl Catalogue {
    /// The catalogue that comes with the program (`configs/parts.toml`).
    pub fn built_in() -> &'static Catalogue {
        static BUILT_IN: OnceLock<Catalogue> = OnceLock::new();
        BUILT_IN.get_or_init(|| {
            let text = include_str!("../../configs/parts.toml");
            // A test reads the file, so that a fault in it cannot reach a user.
            Catalogue::from_text("parts.toml (built in)", text).unwrap_or_default()
        })
    }

    /// Reads a catalogue: one table a part, with `class`, `about`, `basis` and the keys of its class.
    ///
    /// # Errors
    /// Text that is not TOML, an unknown class or key, a wrong unit, a value out of range, a missing key.
    pub fn from_text(name: &str, text: &str) -> Result<Catalogue, DesignError> {
        let source = Arc::new(SourceText {
            name: name.to_string(),
            text: text.to_string(),
        });
        let root = node::document(&source)?;
        let mut parts = BTreeMap::new();
        for field in root.fields() {
            parts.insert(field.name.clone(), part(field)?);
        }
        Ok(Catalogue { parts })
    }

    /// This catalogue with another's parts added; the other's win where a name is in both.
    pub fn with(&self, other: Catalogue) -> Catalogue {
        let mut parts = self.parts.clone();
        parts.extend(other.parts);
        Catalogue { parts }
    }

    /// Every part, by name.
    pub fn parts(&self) -> impl Iterator<Item = &Part> {
        self.parts.values()
    }

    /// The part of this name.
    ///
    /// # Errors
    /// No such part; the help names the nearest.
    pub fn part(&self, name: &str) -> Result<&Part, DesignError> {
        self.parts.get(name).ok_or_else(|| {
            let known = self.parts.keys().map(String::as_str);
            DesignError::new(
                None,
                format!("the catalogue has no part `{name}`"),
                did_you_mean(name, known),
            )
        })
    }

    /// Fills what a section leaves open from the part it names. A key given in the section wins, and with it the other ways of
    /// saying the same.
    pub(super) fn fill(
        &self,
        section: &mut Section,
        class: &'static Class,
        choices: &[Choice],
    ) -> Result<(), DesignError> {
        let Some(name) = section.optional_word("part").map(str::to_string) else {
            return Ok(());
        };
        let of_class = || {
            self.parts
                .values()
                .filter(|part| part.class.name == class.name)
                .map(|part| part.name.as_str())
        };
        let Some(part) = self.parts.get(&name) else {
            let message = format!("{}: the catalogue has no part `{name}`", section.path);
            return Err(section.fault(Some("part"), message, did_you_mean(&name, of_class())));
        };
        if part.class.name != class.name {
            let message = format!(
                "{}: part `{name}` is {}, not {}",
                section.path, part.class.meaning, class.meaning
            );
            let list: Vec<&str> = of_class().collect();
            return Err(section.fault(
                Some("part"),
                message,
                format!("parts of class {}: {}", class.name, list.join(", ")),
            ));
        }
        let replaced: Vec<&str> = choices
            .iter()
            .filter(|choice| {
                choice
                    .ways
                    .iter()
                    .flat_map(|way| way.iter())
                    .any(|key| section.given(key))
            })
            .flat_map(|choice| {
                choice
                    .ways
                    .iter()
                    .filter(|way| !way.iter().any(|key| section.given(key)))
            })
            .flat_map(|way| way.iter().copied())
            .collect();
        for (key, entry) in part.values.entries() {
            if !replaced.contains(&key) {
                section.entries.entry(key).or_insert_with(|| entry.clone());
            }
        }
        Ok(())
    }
}

fn part(field: &Field) -> Result<Part, DesignError> {
    let (name, node) = (field.name.clone(), &field.node);
    let Tree::Table(fields) = &node.tree else {
        let message = format!("`{name}` is {}, not a part", node.words());
        return Err(DesignError::new(
            Some(&field.place()),
            message,
            "a part is a table: [name], class = \"…\", its keys",
        ));
    };
    let class_names = || CLASSES.iter().map(|class| class.name);
    let class_node = node.get("class");
    let Some(class) = class_node.and_then(|node| {
        CLASSES
            .into_iter()
            .find(|class| node.text() == Some(class.name))
    }) else {
        let word = class_node.and_then(|node| node.text()).unwrap_or_default();
        let place = class_node.map_or(&node.place, |node| &node.place);
        return Err(DesignError::new(
            Some(place),
            format!("part `{name}` has no known class"),
            did_you_mean(word, class_names()),
        ));
    };
    let keys = class.keys.iter().filter(|key| key.name != "part").collect();
    let mut values = Section {
        path: name.clone(),
        keys,
        place: Some(node.place.clone()),
        ..Section::default()
    };
    let mut about = String::new();
    let mut basis = String::new();
    for field in fields {
        match (field.name.as_str(), field.node.text()) {
            ("class", _) => {}
            ("about", Some(text)) => about = text.to_string(),
            ("basis", Some(text)) => basis = text.to_string(),
            (key, _) => {
                let Some(key) = values.key(key) else {
                    let known = values
                        .keys
                        .iter()
                        .map(|key| key.name)
                        .chain(["class", "about", "basis"]);
                    let message = format!("part `{name}` has no key `{key}`");
                    return Err(DesignError::new(
                        Some(&field.name_place),
                        message,
                        did_you_mean(key, known),
                    ));
                };
                let value = read::value(&field.node, key, &name)?;
                let origin = Origin::Part(name.clone());
                values.entries.insert(
                    key.name,
                    Entry {
                        value,
                        origin,
                        place: field.place(),
                    },
                );
            }
        }
    }
    complete(&values, class.choices, None)?;
    Ok(Part {
        name,
        class,
        about,
        basis,
        values,
    })
}
