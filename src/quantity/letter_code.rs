//! The letter codes of resistors and capacitors (IEC 60062:2016, "RKM" code; its cases from memory).
//!
//! The letter is the multiplier and stands at the decimal point: 4k7 is 4.7 kΩ, R47 is 0.47 Ω, 3n3 is 3.3 nF.

use super::parse::{plain_unit, shifted};
use super::{Dimension, QuantityError, format};

const OHM_LETTERS: [(char, i32); 7] = [
    ('L', -3),
    ('R', 0),
    ('k', 3),
    ('K', 3),
    ('M', 6),
    ('G', 9),
    ('T', 12),
];
const FARAD_LETTERS: [(char, i32); 5] = [('p', -12), ('n', -9), ('u', -6), ('µ', -6), ('m', -3)];
/// Tolerance letters of the standard.
const TOLERANCES: &str = "ABCDEFGHJKLMNPQSTUVWXYZ";

/// Reads a letter code of a resistance or a capacitance; `None` when the text is something else (a number with a unit).
pub(super) fn read(text: &str, dimension: Dimension) -> Option<Result<f64, QuantityError>> {
    let letters: &[(char, i32)] = match dimension {
        Dimension::Ohm => &OHM_LETTERS,
        Dimension::Farad => &FARAD_LETTERS,
        _ => return None,
    };
    if let Some(refused) = digit_code(text, dimension) {
        return Some(Err(refused));
    }
    let signed = text.starts_with(['+', '-']);
    let body = text.trim_start_matches(['+', '-']);
    // A code may be followed by its own unit ("4k7 Ω"); "4n7F" without a space is the tolerance letter F.
    let unit_at = body.find([' ', 'Ω', 'o', 'O']).unwrap_or(body.len());
    let (code, unit) = body.split_at(unit_at);
    if !unit.is_empty()
        && !matches!(
            (dimension, plain_unit(unit).as_str()),
            (Dimension::Ohm, "Ω") | (Dimension::Farad, "F")
        )
    {
        return None;
    }
    let (at, letter) = code
        .char_indices()
        .find(|(_, c)| !c.is_ascii_digit() && *c != '.')?;
    let &(_, power) = letters.iter().find(|(known, _)| *known == letter)?;
    let (before, after) = (&code[..at], &code[at + letter.len_utf8()..]);
    if !unit.is_empty() && after.is_empty() {
        return None; // "47 kΩ" is a number with a unit
    }
    let fraction: &str = &after[..after.bytes().take_while(u8::is_ascii_digit).count()];
    let tail = &after[fraction.len()..];
    if before.is_empty() && fraction.is_empty() {
        return Some(Err(QuantityError::NoNumber {
            text: text.to_string(),
            expected: dimension,
        }));
    }
    let pointed = before.contains('.');
    if pointed && !fraction.is_empty() || before.matches('.').count() > 1 || before == "." {
        return None;
    }
    let digits = if pointed {
        before.to_string()
    } else {
        format!("{before}.{fraction}")
    };
    let value = shifted(&digits, power);
    let mut tail_letters = tail.chars();
    match (tail_letters.next(), tail_letters.next()) {
        (None, _) if signed => Some(Err(QuantityError::SignedCode {
            text: text.to_string(),
            expected: dimension,
        })),
        (None, _) => Some(Ok(value)),
        // "100nF" and "10 mF" carry the unit, not a tolerance.
        (Some('F'), None) if dimension == Dimension::Farad && fraction.is_empty() => None,
        (Some(last), None) if TOLERANCES.contains(last) => {
            Some(Err(QuantityError::ToleranceLetter {
                text: text.to_string(),
                letter: last,
                value: format(value, dimension),
            }))
        }
        (Some(last), None) if letters.iter().any(|(known, _)| *known == last) => {
            Some(Err(QuantityError::TwoMultipliers {
                text: text.to_string(),
                expected: dimension,
            }))
        }
        _ => None,
    }
}

/// Three or four digits and nothing else: a plain number and a digit code (the last digit counts the zeros) at once.
fn digit_code(text: &str, dimension: Dimension) -> Option<QuantityError> {
    if !matches!(text.len(), 3 | 4) || !text.bytes().all(|b| b.is_ascii_digit()) {
        return None;
    }
    let (figures, zeros) = text.split_at(text.len() - 1);
    let base = if dimension == Dimension::Farad {
        -12
    } else {
        0
    };
    let coded = shifted(figures, base + zeros.parse::<i32>().ok()?);
    let unit = dimension.unit();
    Some(QuantityError::DigitCode {
        text: text.to_string(),
        plain: format!("{} {unit}", text.trim_start_matches('0')),
        coded: format(coded, dimension),
    })
}
