//! One section of a design, its values read and checked.

use std::collections::BTreeMap;

use super::error::{DesignError, Place};
use super::keys::{Absent, Key};

/// A value in SI units.
#[derive(Clone, Debug)]
pub enum Value {
    /// One number or several.
    Numbers(Vec<f64>),
    /// Pairs of numbers.
    Pairs(Vec<[f64; 2]>),
    /// A word or a text.
    Word(String),
    /// A table of its own.
    Table(Section),
}

/// Where a value came from.
#[derive(Clone, Debug, PartialEq)]
pub enum Origin {
    /// The design file or a `--set`.
    Design,
    /// The catalogue part of this name.
    Part(String),
    /// The section of this path, as a supply.
    Shared(String),
}

/// A value with where it came from.
#[derive(Clone, Debug)]
pub struct Entry {
    /// The value.
    pub value: Value,
    /// Where it came from.
    pub origin: Origin,
    /// Where it stands.
    pub place: Place,
}

/// One section: its values by key, in SI units. Absent keys answer with their default from the key table.
#[derive(Clone, Debug, Default)]
pub struct Section {
    /// Dotted path: "receiver.stage.preamp" by name, else "receiver.stage.2", "ambient.1", "transmitter.driver".
    pub path: String,
    /// The word after `kind =`, where the section has kinds.
    pub kind: Option<String>,
    pub(super) entries: BTreeMap<&'static str, Entry>,
    pub(super) keys: Vec<&'static Key>,
    pub(super) place: Option<Place>,
    pub(super) kind_place: Option<Place>,
}

impl Section {
    /// The number of a key, SI: given, or the table's default (infinity where absence means no limit; the low rail of a split
    /// supply, see [`Section::numbers`]).
    ///
    /// # Panics
    /// On a key that is not of this section, takes no number, or is optional and absent: a fault of the calling code, since the
    /// checks guarantee every required key.
    pub fn number(&self, key: &str) -> f64 {
        if let Some(Value::Numbers(values)) = self.value(key)
            && let Some(value) = values.first()
        {
            return *value;
        }
        match self.absent(key) {
            Some(Absent::Value(value)) => value,
            Some(Absent::Infinite) => f64::INFINITY,
            _ => panic!("{} has no number `{key}`", self.path),
        }
    }

    /// The number of a key, SI; `None` when it is absent and the table has no finite default for it.
    pub fn optional(&self, key: &str) -> Option<f64> {
        match self.value(key) {
            Some(Value::Numbers(values)) => values.first().copied(),
            _ => match self.absent(key) {
                Some(Absent::Value(value)) => Some(value),
                _ => None,
            },
        }
    }

    /// The word of a key: given, or the table's default.
    ///
    /// # Panics
    /// As [`Section::number`].
    pub fn word(&self, key: &str) -> &str {
        self.optional_word(key)
            .unwrap_or_else(|| panic!("{} has no word `{key}`", self.path))
    }

    /// The word or text of a key: given, or the table's default; `None` without either.
    pub fn optional_word(&self, key: &str) -> Option<&str> {
        match self.value(key) {
            Some(Value::Word(word)) => Some(word),
            _ => match self.absent(key) {
                Some(Absent::Word(word)) => Some(word),
                _ => None,
            },
        }
    }

    /// The numbers of a list key, SI: given, or the table's default, or none. A supply gives one number (rails 0 and it) or two
    /// (low rail, high rail).
    pub fn numbers(&self, key: &str) -> &[f64] {
        match self.value(key) {
            Some(Value::Numbers(values)) => values,
            _ => match self.absent(key) {
                Some(Absent::Values(values)) => values,
                _ => &[],
            },
        }
    }

    /// The pairs of a key, SI; none when not given.
    pub fn pairs(&self, key: &str) -> &[[f64; 2]] {
        match self.value(key) {
            Some(Value::Pairs(pairs)) => pairs,
            _ => &[],
        }
    }

    /// The table behind a key; `None` when not given.
    pub fn table(&self, key: &str) -> Option<&Section> {
        match self.value(key) {
            Some(Value::Table(section)) => Some(section),
            _ => None,
        }
    }

    /// Whether the key has a value of its own: from the file, a `--set`, the part, or a shared supply; defaults do not count.
    pub fn given(&self, key: &str) -> bool {
        self.entries.contains_key(key)
    }

    /// The entry of a key, with its origin and place.
    pub fn entry(&self, key: &str) -> Option<&Entry> {
        self.entries.get(key)
    }

    /// Every given key with its entry, in the order of the names.
    pub fn entries(&self) -> impl Iterator<Item = (&'static str, &Entry)> {
        self.entries.iter().map(|(name, entry)| (*name, entry))
    }

    /// The key table's row of a key of this section.
    pub fn key(&self, name: &str) -> Option<&'static Key> {
        self.keys.iter().copied().find(|key| key.name == name)
    }

    /// Every key this section may have.
    pub fn keys(&self) -> &[&'static Key] {
        &self.keys
    }

    /// An error that underlines that key's line ("kind" too), or the section's header when the key is `None` or not given.
    pub fn fault(
        &self,
        key: Option<&str>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) -> DesignError {
        if let (Some("kind"), Some(place)) = (key, &self.kind_place) {
            return DesignError::new(Some(place), message, help);
        }
        let entry = key.and_then(|key| self.entries.get(key));
        DesignError::new(
            entry.map(|entry| &entry.place).or(self.place.as_ref()),
            message,
            help,
        )
    }

    fn value(&self, key: &str) -> Option<&Value> {
        self.entries.get(key).map(|entry| &entry.value)
    }

    fn absent(&self, key: &str) -> Option<Absent> {
        self.key(key).map(|key| key.absent)
    }
}
