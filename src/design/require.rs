//! `[require]`: limits on figures.

use super::error::{DesignError, Place};
use super::node::Node;
use super::read::unread;
use super::suggest::did_you_mean;
use crate::quantity::{self, Dimension};

/// Which side of the limit is met.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Relation {
    /// The figure must be the value or more.
    AtLeast,
    /// The figure must be the value or less.
    AtMost,
}

/// One limit.
#[derive(Clone, Debug)]
pub struct Requirement {
    /// Which figure: a key of [`REQUIREMENTS`].
    pub key: String,
    /// Which side is met.
    pub relation: Relation,
    /// The limit in `unit`'s SI unit: a fraction for a share, dB for a level.
    pub value: f64,
    /// The dimension it was written in; distortion figures may be shares or levels.
    pub unit: Dimension,
    /// As written.
    pub text: String,
    /// Where it stands.
    pub place: Place,
}

impl Requirement {
    /// Whether a figure in the requirement's own unit meets it. NaN meets nothing.
    pub fn met_by(&self, figure: f64) -> bool {
        match self.relation {
            Relation::AtLeast => figure >= self.value,
            Relation::AtMost => figure <= self.value,
        }
    }
}

/// One row of [`REQUIREMENTS`].
#[derive(Clone, Copy, Debug)]
pub struct Limit {
    /// The key in the file.
    pub name: &'static str,
    /// The dimensions it may be written in, the first for a bare number.
    pub units: &'static [Dimension],
    /// A limit as it would be written.
    pub example: &'static str,
    /// What it limits.
    pub meaning: &'static str,
}

const fn limit(
    name: &'static str,
    units: &'static [Dimension],
    example: &'static str,
    meaning: &'static str,
) -> Limit {
    Limit {
        name,
        units,
        example,
        meaning,
    }
}

const LEVEL: &[Dimension] = &[Dimension::Decibel];
const RATIO: &[Dimension] = &[Dimension::Share, Dimension::Decibel];

/// The figures that may be limited.
pub const REQUIREMENTS: [Limit; 17] = [
    limit("snr", LEVEL, ">= 45 dB", "signal over noise, flat"),
    limit("snr_a", LEVEL, ">= 48 dB", "signal over noise, A-weighted"),
    limit("thd", RATIO, "<= 1 %", "total harmonic distortion"),
    limit(
        "thd_n",
        RATIO,
        "<= 2 %",
        "total harmonic distortion and noise",
    ),
    limit(
        "sinad",
        LEVEL,
        ">= 40 dB",
        "signal over noise and distortion",
    ),
    limit("gain", LEVEL, ">= -3 dB", "output over source"),
    limit("hum", RATIO, "<= -50 dB", "mains multiples over the tone"),
    limit(
        "headroom",
        LEVEL,
        ">= 6 dB",
        "from the tone's level to the first limit",
    ),
    limit(
        "band_low",
        &[Dimension::Hertz],
        "<= 50 Hz",
        "lower −3 dB edge",
    ),
    limit(
        "band_high",
        &[Dimension::Hertz],
        ">= 15 kHz",
        "upper −3 dB edge",
    ),
    limit(
        "sti",
        &[Dimension::Number],
        ">= 0.6",
        "speech transmission index",
    ),
    limit("imd_smpte", RATIO, "<= 2 %", "SMPTE intermodulation"),
    limit(
        "imd_twin_tone",
        RATIO,
        "<= 1 %",
        "twin-tone intermodulation",
    ),
    limit(
        "loudness",
        &[Dimension::Loudness],
        ">= -30 LUFS",
        "programme loudness",
    ),
    limit(
        "signal",
        &[Dimension::Volt],
        ">= 200 mV",
        "tone at the output, rms",
    ),
    limit(
        "noise",
        &[Dimension::Volt],
        "<= 1 mV",
        "noise at the output, rms",
    ),
    limit(
        "clipped",
        &[Dimension::Count],
        "<= 0",
        "samples at or beyond full scale",
    ),
];

/// Reads the section.
pub(super) fn read(node: &Node) -> Result<Vec<Requirement>, DesignError> {
    if !matches!(node.tree, super::node::Tree::Table(_)) {
        return Err(DesignError::new(
            Some(&node.place),
            "require is a section",
            "write [require] and its limits below it",
        ));
    }
    node.fields()
        .iter()
        .map(|field| one(&field.name, &field.name_place, &field.node))
        .collect()
}

fn one(name: &str, name_place: &Place, node: &Node) -> Result<Requirement, DesignError> {
    let Some(limit) = REQUIREMENTS.iter().find(|limit| limit.name == name) else {
        let help = did_you_mean(name, REQUIREMENTS.iter().map(|limit| limit.name));
        return Err(DesignError::new(
            Some(name_place),
            format!("no figure `{name}` can be required"),
            help,
        ));
    };
    let example = || format!("write for example: {name} = \"{}\"", limit.example);
    let Some(text) = node.text() else {
        return Err(DesignError::new(
            Some(&node.place),
            format!("require.{name} is a text, found {}", node.words()),
            example(),
        ));
    };
    let trimmed = text.trim();
    let relations = [
        (">=", Relation::AtLeast),
        ("≥", Relation::AtLeast),
        ("<=", Relation::AtMost),
        ("≤", Relation::AtMost),
    ];
    let Some((rest, relation)) = relations
        .iter()
        .find_map(|(sign, relation)| Some((trimmed.strip_prefix(sign)?, *relation)))
    else {
        let message = format!("require.{name}: `{text}` does not begin with >= or <=");
        return Err(DesignError::new(Some(&node.place), message, example()));
    };
    let mut first_error = None;
    for &unit in limit.units {
        match quantity::parse(rest, unit) {
            Ok(value) if value.is_finite() && !(unit == Dimension::Share && value < 0.0) => {
                let (key, text) = (name.to_string(), text.to_string());
                return Ok(Requirement {
                    key,
                    relation,
                    value,
                    unit,
                    text,
                    place: node.place.clone(),
                });
            }
            Ok(_) => {}
            Err(error) => _ = first_error.get_or_insert(error),
        }
    }
    Err(match first_error {
        Some(error) => DesignError::new(
            Some(&node.place),
            unread(&error, &node.place, &format!("require.{name}")).to_string(),
            example(),
        ),
        None => DesignError::new(
            Some(&node.place),
            format!("require.{name}: `{text}` is no limit"),
            example(),
        ),
    })
}
