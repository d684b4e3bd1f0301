//! The design file: its key table, its checks, the catalogue of parts, dotted paths and `--set`.
//!
//! [`Design::load`] gives a design whose every value is in SI units, present where it is required, and in range; stations read it
//! through [`Section::number`] and its kin.

mod address;
mod catalogue;
mod checks;
mod complete;
mod error;
pub mod keys;
mod load;
mod node;
mod read;
mod require;
mod section;
mod set;
mod suggest;
mod tolerance;

use std::path::Path;

use address::Address;
use keys::{Absent, Key, Spec, What};

pub use catalogue::{Catalogue, Part};
pub use error::{DesignError, Place, SourceText};
pub use require::{Limit, REQUIREMENTS, Relation, Requirement};
pub use section::{Entry, Origin, Section, Value};
pub use tolerance::{GROUPS as TOLERANCE_GROUPS, Tolerance};

/// A link on paper, read and checked.
#[derive(Clone, Debug)]
pub struct Design {
    /// What it is called; the file's name when the file gives none.
    pub title: String,
    /// Anything worth keeping.
    pub note: Option<String>,
    /// Seed of the noise.
    pub seed: Option<u64>,
    /// Temperature of everything, K.
    pub temperature: f64,
    /// Noise contributors left out, by their names in the noise budget.
    pub silence: Vec<String>,
    /// `[source]`.
    pub source: Section,
    /// `[[transmitter.stage]]`, in order.
    pub transmitter_stages: Vec<Section>,
    /// `[transmitter.driver]`.
    pub driver: Section,
    /// `[transmitter.emitter]`.
    pub emitter: Section,
    /// `[path]`.
    pub path: Section,
    /// `[[path.interruption]]`.
    pub interruptions: Vec<Section>,
    /// `[[ambient]]`.
    pub ambient: Vec<Section>,
    /// `[receiver.optics]`; answers with defaults when absent.
    pub optics: Section,
    /// `[receiver.detector]`.
    pub detector: Section,
    /// `[receiver.front_end]`.
    pub front_end: Section,
    /// `[[receiver.stage]]`, in order.
    pub receiver_stages: Vec<Section>,
    /// `[output]`.
    pub output: Section,
    /// `[measure]`; answers with defaults when absent.
    pub measure: Section,
    /// `[require]`.
    pub require: Vec<Requirement>,
    /// `[tolerance]`, in the file's order.
    pub tolerance: Vec<(String, Tolerance)>,
    /// The design file's name as given.
    pub file: String,
    /// SHA-256 of the file's bytes, in hexadecimal (`--set` does not change it).
    pub sha256: String,
    top: Section,
}

/// A value found by its dotted path.
#[derive(Clone, Copy, Debug)]
pub struct Found<'a> {
    /// The section, or the table inside a section, that holds it.
    pub section: &'a Section,
    /// Its row of the key table.
    pub key: &'static Key,
}

impl Found<'_> {
    /// Its number, SI; infinity where absence means no limit; `None` when it is absent or no single number.
    pub fn number(&self) -> Option<f64> {
        match (self.key.what, self.key.absent) {
            (What::Number(..), Absent::Infinite) => Some(self.section.number(self.key.name)),
            (What::Number(..), _) => self.section.optional(self.key.name),
            _ => None,
        }
    }
}

impl Found<'_> {
    /// The value as it would be written: with its unit, or the word; `None` when it is absent without a default, a list or a table.
    pub fn text(&self) -> Option<String> {
        match (self.number(), self.key.dimension()) {
            (Some(value), Some(dimension)) => Some(crate::quantity::format(value, dimension)),
            _ => self
                .section
                .optional_word(self.key.name)
                .map(str::to_string),
        }
    }
}

impl Design {
    /// Reads a design file, with `--set` edits ("path.distance=12 m") applied before the checks.
    ///
    /// # Errors
    /// The first fault, its line underlined.
    pub fn load(path: &Path, sets: &[String]) -> Result<Design, DesignError> {
        load::file(path, sets)
    }

    /// Reads a design from its text. `file_name` stands in messages; `folder` is where `parts = "…"` is looked for.
    ///
    /// # Errors
    /// As [`Design::load`].
    pub fn from_text(
        file_name: &str,
        text: &str,
        folder: &Path,
        sets: &[String],
    ) -> Result<Design, DesignError> {
        load::text_of(file_name, text, folder, sets)
    }

    /// Finds a value by its dotted path; stages by number from 1 or by name.
    ///
    /// # Errors
    /// A path that names nothing in this design; the help names the nearest.
    pub fn value_at(&self, path: &str) -> Result<Found<'_>, DesignError> {
        let address = Address::parse(path)?;
        let fail = |message: String, help: String| DesignError::new(None, message, help);
        let of_spec: Vec<&Section> = self
            .sections()
            .into_iter()
            .filter(|(_, spec)| spec.path == address.spec.path)
            .map(|(section, _)| section)
            .collect();
        let section = match &address.which {
            None => of_spec.first().copied(),
            Some(which) => match which.parse::<usize>() {
                Ok(number) => number
                    .checked_sub(1)
                    .and_then(|index| of_spec.get(index).copied()),
                Err(_) => of_spec
                    .iter()
                    .copied()
                    .find(|section| section.optional_word("name") == Some(which)),
            },
        };
        let Some(section) = section else {
            let names: Vec<&str> = of_spec
                .iter()
                .map(|section| section.path.as_str())
                .collect();
            let which = address.which.as_deref().unwrap_or_default();
            let message = format!("the design has no {}.{which}", address.spec.path);
            let help = if names.is_empty() {
                "there are none".into()
            } else {
                format!("there are {}", names.join(", "))
            };
            return Err(fail(message, help));
        };
        let Some(key) = section.key(&address.key) else {
            let kind = section.kind.as_deref().unwrap_or_default();
            let message = format!(
                "{} of kind {kind} has no value `{}`",
                section.path, address.key
            );
            return Err(fail(
                message,
                suggest::did_you_mean(&address.key, section.keys().iter().map(|key| key.name)),
            ));
        };
        let Some(inner) = &address.inner else {
            return Ok(Found { section, key });
        };
        match section
            .table(key.name)
            .and_then(|table| Some((table, table.key(inner)?)))
        {
            Some((section, key)) => Ok(Found { section, key }),
            None => Err(fail(
                format!("{} has no {}", section.path, key.name),
                format!("add {}", key.line()),
            )),
        }
    }

    /// Every section with its row of the key table, in the order of the file; the top level last.
    pub fn sections(&self) -> Vec<(&Section, &'static Spec)> {
        let one = |section| std::slice::from_ref(section);
        let lists: [(&[Section], &str); 14] = [
            (one(&self.source), "source"),
            (&self.transmitter_stages, "transmitter.stage"),
            (one(&self.driver), "transmitter.driver"),
            (one(&self.emitter), "transmitter.emitter"),
            (one(&self.path), "path"),
            (&self.interruptions, "path.interruption"),
            (&self.ambient, "ambient"),
            (one(&self.optics), "receiver.optics"),
            (one(&self.detector), "receiver.detector"),
            (one(&self.front_end), "receiver.front_end"),
            (&self.receiver_stages, "receiver.stage"),
            (one(&self.output), "output"),
            (one(&self.measure), "measure"),
            (one(&self.top), ""),
        ];
        let mut sections = Vec::new();
        for (list, path) in lists {
            if let Some(spec) = keys::section(path) {
                sections.extend(list.iter().map(|section| (section, spec)));
            }
        }
        sections
    }
}
