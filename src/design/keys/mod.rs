//! The one table of every section, kind and key of a design file. Parsing, checks, `--set`, suggestions and the printed
//! reference all read it.

mod ambient;
mod electronics;
mod parts;
mod path;
mod receiver;
mod stages;
mod top;
mod transmitter;

use crate::quantity::Dimension;

pub use parts::{CLASSES, Class};

/// Which numbers a key takes, in its SI unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Range {
    /// Smallest value.
    pub low: f64,
    /// Whether `low` itself is allowed.
    pub with_low: bool,
    /// Largest finite value.
    pub high: f64,
    /// Whether `high` itself is allowed.
    pub with_high: bool,
    /// Whether "inf" is allowed.
    pub infinite: bool,
}

impl Range {
    const fn new(low: f64, with_low: bool, high: f64, with_high: bool) -> Range {
        Range {
            low,
            with_low,
            high,
            with_high,
            infinite: false,
        }
    }

    const fn or_infinite(self) -> Range {
        Range {
            infinite: true,
            ..self
        }
    }

    /// Whether the value may stand.
    pub fn holds(&self, value: f64) -> bool {
        if value.is_infinite() {
            return self.infinite && value > 0.0;
        }
        let above = if self.with_low {
            value >= self.low
        } else {
            value > self.low
        };
        let below = if self.with_high {
            value <= self.high
        } else {
            value < self.high
        };
        above && below
    }

    /// The range in words: "more than 0, or inf".
    pub fn words(&self, dimension: Dimension) -> String {
        let value = |v: f64| crate::quantity::format(v, dimension);
        let mut words = match (self.low > f64::MIN, self.high < f64::MAX) {
            (false, false) => "any finite value".to_string(),
            (true, false) if self.low == 0.0 && self.with_low => "0 or more".to_string(),
            (true, false) if self.low == 0.0 => "more than 0".to_string(),
            (true, false) => format!("{} or more", value(self.low)),
            (false, true) => format!("{} or less", value(self.high)),
            (true, true) => {
                let low = if self.low == 0.0 {
                    "0".to_string()
                } else {
                    value(self.low)
                };
                let low = if self.with_low {
                    format!("from {low}")
                } else {
                    format!("more than {low}")
                };
                let high = if self.with_high {
                    "up to"
                } else {
                    "to less than"
                };
                format!("{low} {high} {}", value(self.high))
            }
        };
        if self.infinite {
            words.push_str(", or inf");
        }
        words
    }
}

const DEGREE: f64 = std::f64::consts::PI / 180.0;
const ANY: Range = Range::new(f64::MIN, true, f64::MAX, true);
const POSITIVE: Range = Range::new(0.0, false, f64::MAX, true);
const POSITIVE_INF: Range = POSITIVE.or_infinite();
const NON_NEGATIVE: Range = Range::new(0.0, true, f64::MAX, true);
const SHARE: Range = Range::new(0.0, true, 1.0, true);
const POSITIVE_SHARE: Range = Range::new(0.0, false, 1.0, true);
/// 0 to below a right angle.
const ACUTE: Range = Range::new(0.0, true, 90.0 * DEGREE, false);
const POSITIVE_ACUTE: Range = Range::new(0.0, false, 90.0 * DEGREE, false);
const HALF_SPACE: Range = Range::new(0.0, false, 90.0 * DEGREE, true);
const FROM_ONE: Range = Range::new(1.0, true, f64::MAX, true);
/// How many of a kind one may build in.
const PIECES: Range = Range::new(1.0, true, 10_000.0, true);

/// What stands behind a key.
#[derive(Clone, Copy, Debug)]
pub enum What {
    /// One number.
    Number(Dimension, Range),
    /// One number or several, between `fewest` and `most` of them.
    Numbers {
        dimension: Dimension,
        range: Range,
        fewest: usize,
        most: usize,
    },
    /// A supply: one positive voltage, or two rails; kept in the order low, high.
    Supply,
    /// Pairs of numbers, at least two, each column of its own dimension and range, the first column rising.
    Pairs([(Dimension, Range); 2]),
    /// One of a few words.
    Word(&'static [&'static str]),
    /// Free text.
    Text,
    /// A table of keys of its own.
    Table(&'static [Key]),
}

/// What holds when the key is absent.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Absent {
    /// It must be there (or come from the part, or another key of its rule must be there).
    Required,
    /// Nothing holds: `optional` gives none.
    Nothing,
    /// This number holds.
    Value(f64),
    /// No limit: `number` gives infinity, `optional` gives none.
    Infinite,
    /// These numbers hold.
    Values(&'static [f64]),
    /// This word holds.
    Word(&'static str),
}

/// One key of a section.
#[derive(Clone, Copy, Debug)]
pub struct Key {
    /// Its name in the file.
    pub name: &'static str,
    /// What it takes.
    pub what: What,
    /// What holds when it is absent.
    pub absent: Absent,
    /// A value as it would be written, in TOML.
    pub example: &'static str,
    /// Its meaning in a line.
    pub meaning: &'static str,
}

const fn number(
    name: &'static str,
    dimension: Dimension,
    range: Range,
    example: &'static str,
    meaning: &'static str,
) -> Key {
    Key {
        name,
        what: What::Number(dimension, range),
        absent: Absent::Required,
        example,
        meaning,
    }
}

const fn word(
    name: &'static str,
    words: &'static [&'static str],
    example: &'static str,
    meaning: &'static str,
) -> Key {
    Key {
        name,
        what: What::Word(words),
        absent: Absent::Required,
        example,
        meaning,
    }
}

const fn text(name: &'static str, example: &'static str, meaning: &'static str) -> Key {
    Key {
        name,
        what: What::Text,
        absent: Absent::Nothing,
        example,
        meaning,
    }
}

const fn table(
    name: &'static str,
    keys: &'static [Key],
    example: &'static str,
    meaning: &'static str,
) -> Key {
    Key {
        name,
        what: What::Table(keys),
        absent: Absent::Nothing,
        example,
        meaning,
    }
}

impl Key {
    const fn or(self, value: f64) -> Key {
        Key {
            absent: Absent::Value(value),
            ..self
        }
    }

    const fn or_word(self, value: &'static str) -> Key {
        Key {
            absent: Absent::Word(value),
            ..self
        }
    }

    const fn optional(self) -> Key {
        Key {
            absent: Absent::Nothing,
            ..self
        }
    }

    const fn or_infinite(self) -> Key {
        Key {
            absent: Absent::Infinite,
            ..self
        }
    }

    /// The dimension of its numbers, where it has one.
    pub fn dimension(&self) -> Option<Dimension> {
        match self.what {
            What::Number(dimension, _) | What::Numbers { dimension, .. } => Some(dimension),
            What::Supply => Some(Dimension::Volt),
            _ => None,
        }
    }

    /// The line one would write: `distance = "6 m"`.
    pub fn line(&self) -> String {
        format!("{} = {}", self.name, self.example)
    }
}

/// Keys that stand for one another.
#[derive(Clone, Copy, Debug)]
pub struct Choice {
    /// The ways; each is a set of keys that belong together.
    pub ways: &'static [&'static [&'static str]],
    /// Whether one way must be taken.
    pub needed: bool,
}

/// One kind of a section, or the section itself where it has no kinds.
#[derive(Clone, Copy, Debug)]
pub struct Kind {
    /// The word after `kind =`; empty where the section has no kinds.
    pub name: &'static str,
    /// What it is, in a line.
    pub meaning: &'static str,
    /// Its own keys.
    pub keys: &'static [Key],
    /// Keys that stand for one another.
    pub choices: &'static [Choice],
    /// The class of part that may fill its keys.
    pub class: Option<&'static Class>,
}

/// One section of the file.
#[derive(Debug)]
pub struct Spec {
    /// Its dotted path without numbers: "receiver.stage".
    pub path: &'static str,
    /// What it describes, in a line.
    pub meaning: &'static str,
    /// Whether it is a list of sections (`[[…]]`).
    pub many: bool,
    /// Whether it must be there.
    pub required: bool,
    /// Keys every kind has (`kind` itself is understood).
    pub common: &'static [Key],
    /// The kinds; exactly one with an empty name where there are none.
    pub kinds: &'static [Kind],
}

impl Spec {
    /// Whether `kind = …` is to be given.
    pub fn has_kinds(&self) -> bool {
        self.kinds.first().is_some_and(|kind| !kind.name.is_empty())
    }

    /// The kind of this name.
    pub fn kind(&self, name: &str) -> Option<&'static Kind> {
        self.kinds.iter().find(|kind| kind.name == name)
    }

    /// Every key of one kind: its own, the common ones, its part's.
    pub fn keys_of(&self, kind: &'static Kind) -> impl Iterator<Item = &'static Key> + use<> {
        let parts = kind.class.map_or(&[][..], |class| class.keys);
        self.common.iter().chain(kind.keys).chain(parts)
    }

    /// A key by name, of one kind.
    pub fn key_of(&self, kind: &'static Kind, name: &str) -> Option<&'static Key> {
        self.keys_of(kind).find(|key| key.name == name)
    }

    /// Every key any kind has.
    pub fn all_keys(&self) -> impl Iterator<Item = &'static Key> {
        self.kinds.iter().flat_map(|kind| self.keys_of(kind))
    }
}

/// The sections in the order of the file.
pub static SECTIONS: [&Spec; 14] = [
    &top::SOURCE,
    &stages::TRANSMITTER_STAGE,
    &transmitter::DRIVER,
    &transmitter::EMITTER,
    &path::PATH,
    &path::INTERRUPTION,
    &ambient::AMBIENT,
    &receiver::OPTICS,
    &receiver::DETECTOR,
    &receiver::FRONT_END,
    &stages::RECEIVER_STAGE,
    &top::OUTPUT,
    &top::MEASURE,
    &top::TOP,
];

/// The section of a dotted path without numbers ("receiver.stage"; "" is the top level).
pub fn section(path: &str) -> Option<&'static Spec> {
    SECTIONS.into_iter().find(|spec| spec.path == path)
}
