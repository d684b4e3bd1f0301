//! What can be wrong with a quantity's text, and what would be accepted.

use super::Dimension;

/// Why a text is no quantity of the dimension asked for.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum QuantityError {
    /// Nothing was written.
    #[error("the value is empty; expected {expected}")]
    Empty { expected: Dimension },
    /// The text does not begin with a number.
    #[error("`{text}` does not begin with a number; expected {expected}")]
    NoNumber { text: String, expected: Dimension },
    /// A comma stands where the decimal point should.
    #[error("`{text}` has a comma; the decimal sign is a point")]
    Comma { text: String, expected: Dimension },
    /// A unit of another dimension, or none that is known.
    #[error("`{text}`: found {}, expected {expected}", found_words(.unit, .found))]
    WrongUnit {
        text: String,
        unit: String,
        found: Option<Dimension>,
        expected: Dimension,
    },
    /// A number alone where its unit cannot be guessed.
    #[error("`{text}` has no unit; expected {expected}")]
    NoUnit { text: String, expected: Dimension },
    /// Not a number at all.
    #[error("`{text}` is not a number; expected {expected}")]
    NotANumber { text: String, expected: Dimension },
    /// Beyond what a double can hold.
    #[error("`{text}` is too large")]
    TooLarge { text: String, expected: Dimension },
    /// A count with a fraction or a sign.
    #[error("`{text}` is not a whole number from 0")]
    NotWhole { text: String, expected: Dimension },
    /// Three or four digits that are a number and a component code at once.
    #[error("`{text}` could be read as {plain} or, as a digit code, {coded}")]
    DigitCode {
        text: String,
        plain: String,
        coded: String,
    },
    /// A letter code followed by its tolerance letter.
    #[error("`{text}` ends in the tolerance letter {letter}; a value carries no tolerance")]
    ToleranceLetter {
        text: String,
        letter: char,
        value: String,
    },
    /// Two multipliers in one letter code.
    #[error("`{text}` has more than one multiplier letter")]
    TwoMultipliers { text: String, expected: Dimension },
    /// A letter code with a sign before it.
    #[error("`{text}`: a letter code has no sign")]
    SignedCode { text: String, expected: Dimension },
}

fn found_words(unit: &str, found: &Option<Dimension>) -> String {
    match found {
        Some(dimension) => format!("{} in {unit}", dimension.name()),
        None => format!("the unknown unit {unit}"),
    }
}

impl QuantityError {
    /// What would be accepted, in one sentence.
    pub fn help(&self) -> String {
        match self {
            Self::DigitCode { plain, coded, .. } => format!("write \"{plain}\" or \"{coded}\""),
            Self::ToleranceLetter { value, .. } => {
                format!("write \"{value}\"; tolerances stand in [tolerance]")
            }
            Self::WrongUnit { unit, expected, .. } if unit == "m" => {
                format!(
                    "m alone is metre; write for example \"{}\"",
                    expected.example()
                )
            }
            Self::WrongUnit { unit, expected, .. } if unit.starts_with('K') && unit.len() > 1 => {
                format!(
                    "kilo is a small k; write for example \"{}\"",
                    expected.example()
                )
            }
            Self::WrongUnit { expected, .. } if expected.unit().is_empty() => {
                format!(
                    "write a number without a unit, for example {}",
                    expected.example()
                )
            }
            Self::NoUnit {
                expected: Dimension::SpectralIrradiance,
                ..
            } => "a bare number could be W/m²/nm or W/m³; write for example \"0.1 W/m²/nm\"".into(),
            Self::Empty { expected }
            | Self::NoNumber { expected, .. }
            | Self::Comma { expected, .. }
            | Self::WrongUnit { expected, .. }
            | Self::NoUnit { expected, .. }
            | Self::NotANumber { expected, .. }
            | Self::TooLarge { expected, .. }
            | Self::NotWhole { expected, .. }
            | Self::TwoMultipliers { expected, .. }
            | Self::SignedCode { expected, .. } => {
                format!("write for example \"{}\"", expected.example())
            }
        }
    }
}
