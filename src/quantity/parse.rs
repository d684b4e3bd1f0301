//! Text to SI value.

use super::dimension::PREFIXES;
use super::{Dimension, QuantityError, letter_code};

/// The SI value of a quantity's text.
///
/// Reads "47 kΩ", "-6 dB", "2 %", "60°", "0.5 V/µs", "12 nV/rtHz", "1e12 V/s", "4k7" (Ω and F), "inf", and a number alone as SI.
/// Units may be in ASCII (ohm, u, deg, ^2, sqrt(Hz)).
///
/// # Errors
/// A wrong, unknown or missing unit, a comma, NaN, a code that could be read two ways, a tolerance letter. Ranges (sign, whether
/// infinity makes sense) are the caller's to check.
pub fn parse(text: &str, dimension: Dimension) -> Result<f64, QuantityError> {
    let written = text;
    let text = plain(text);
    let whole = || written.trim().to_string();
    if text.is_empty() {
        return Err(QuantityError::Empty {
            expected: dimension,
        });
    }
    match text.to_ascii_lowercase().as_str() {
        "inf" | "+inf" => return Ok(f64::INFINITY),
        "-inf" => return Ok(f64::NEG_INFINITY),
        "nan" | "+nan" | "-nan" => {
            return Err(QuantityError::NotANumber {
                text: whole(),
                expected: dimension,
            });
        }
        _ => {}
    }
    if text.contains(',') {
        return Err(QuantityError::Comma {
            text: whole(),
            expected: dimension,
        });
    }
    if let Some(coded) = letter_code::read(&text, dimension) {
        return coded;
    }
    let (number, rest) = split_number(&text);
    if number.is_empty() {
        return Err(QuantityError::NoNumber {
            text: whole(),
            expected: dimension,
        });
    }
    let unit = plain_unit(rest);
    let value = if unit.is_empty() {
        match dimension.bare_exponent() {
            Some(exponent) => shifted(number, exponent),
            None => {
                return Err(QuantityError::NoUnit {
                    text: whole(),
                    expected: dimension,
                });
            }
        }
    } else {
        match in_unit(number, &unit, dimension) {
            Some(value) => value,
            None => {
                let found = Dimension::ALL
                    .into_iter()
                    .find(|&other| in_unit(number, &unit, other).is_some());
                let unit = rest.trim().to_string();
                return Err(QuantityError::WrongUnit {
                    text: whole(),
                    unit,
                    found,
                    expected: dimension,
                });
            }
        }
    };
    finish(value, &whole(), dimension)
}

/// The SI value of a number written without a unit and without quotes.
///
/// # Errors
/// NaN, and dimensions whose unit cannot be guessed (angles, spectral irradiance). `text` is the number as written.
pub fn bare(text: &str, dimension: Dimension) -> Result<f64, QuantityError> {
    let plain: String = text.chars().filter(|c| *c != '_').collect();
    let Some(exponent) = dimension.bare_exponent() else {
        return Err(QuantityError::NoUnit {
            text: text.to_string(),
            expected: dimension,
        });
    };
    match plain.as_str() {
        "inf" | "+inf" => return Ok(f64::INFINITY),
        "-inf" => return Ok(f64::NEG_INFINITY),
        _ => {}
    }
    let (number, rest) = split_number(&plain);
    if number.is_empty() || !rest.is_empty() {
        return Err(QuantityError::NotANumber {
            text: text.to_string(),
            expected: dimension,
        });
    }
    finish(shifted(number, exponent), text, dimension)
}

fn finish(value: f64, text: &str, dimension: Dimension) -> Result<f64, QuantityError> {
    if !value.is_finite() {
        return Err(QuantityError::TooLarge {
            text: text.to_string(),
            expected: dimension,
        });
    }
    if dimension == Dimension::Count && (value < 0.0 || value.fract() != 0.0) {
        return Err(QuantityError::NotWhole {
            text: text.to_string(),
            expected: dimension,
        });
    }
    Ok(value)
}

/// One spelling for signs and spaces that look alike: minus, micro, ohm, no-break and thin spaces.
fn plain(text: &str) -> String {
    let swapped = text.chars().map(|c| match c {
        '\u{2212}' => '-',
        'μ' => 'µ',
        '\u{2126}' => 'Ω',
        '\u{a0}' | '\u{2009}' | '\u{202f}' => ' ',
        'º' => '°',
        c => c,
    });
    swapped.collect::<String>().trim().to_string()
}

/// The unit without spaces, dots and carets, its words as signs: "nV/sqrt(Hz)" and "nV/rtHz" become "nV/√Hz", "cm^2" becomes "cm2".
pub(super) fn plain_unit(text: &str) -> String {
    let mut unit: String = text
        .chars()
        .filter(|c| !c.is_whitespace() && !"^·*".contains(*c))
        .collect();
    for (from, to) in [
        ("²", "2"),
        ("³", "3"),
        ("⁻2ᐟ3", "-2/3"),
        ("sqrt(Hz)", "√Hz"),
        ("√(Hz)", "√Hz"),
        ("rt(Hz)", "√Hz"),
        ("sqrtHz", "√Hz"),
        ("rtHz", "√Hz"),
        ("Hz0.5", "√Hz"),
        ("degC", "°C"),
        ("degrees", "°"),
        ("degree", "°"),
        ("deg", "°"),
        ("percent", "%"),
        ("ohms", "Ω"),
        ("Ohms", "Ω"),
        ("ohm", "Ω"),
        ("Ohm", "Ω"),
        ("OHM", "Ω"),
    ] {
        if unit.contains(from) {
            unit = unit.replace(from, to);
        }
    }
    unit
}

/// Splits a leading decimal number (sign, digits, point, exponent) from what follows; the number is empty when there is none.
pub(super) fn split_number(text: &str) -> (&str, &str) {
    let bytes = text.as_bytes();
    let digits = |from: usize| {
        bytes[from..]
            .iter()
            .take_while(|b| b.is_ascii_digit())
            .count()
    };
    let mut end = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let whole = digits(end);
    end += whole;
    let mut fraction = 0;
    if bytes.get(end) == Some(&b'.') {
        fraction = digits(end + 1);
        end += 1 + fraction;
    }
    if whole + fraction == 0 {
        return ("", text);
    }
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let exponent = bytes
            .get(end + 1 + sign..)
            .map_or(0, |_| digits(end + 1 + sign));
        if exponent > 0 {
            end += 1 + sign + exponent;
        }
    }
    text.split_at(end)
}

/// The decimal number times a power of ten, rounded once.
pub(super) fn shifted(number: &str, exponent: i32) -> f64 {
    let (digits, own) = match number.find(['e', 'E']) {
        Some(at) => (
            &number[..at],
            number[at + 1..]
                .parse::<i64>()
                .unwrap_or(i64::from(i32::MAX)),
        ),
        None => (number, 0),
    };
    // The scan admits only decimal numbers, so this cannot fail; NaN would be refused by the caller.
    format!("{digits}e{}", own.saturating_add(i64::from(exponent)))
        .parse()
        .unwrap_or(f64::NAN)
}

fn in_unit(number: &str, unit: &str, dimension: Dimension) -> Option<f64> {
    match (dimension, unit) {
        (Dimension::Angle, "°") => return Some(degrees(number)),
        (Dimension::Kelvin, "°C") => return Some(shifted(number, 0) + 273.15),
        _ => {}
    }
    let metric = |text: &str| text.starts_with('m');
    for known in dimension.units() {
        if known.text == unit {
            return Some(shifted(number, known.exponent));
        }
        if known.prefix_power == 0 {
            continue;
        }
        let Some(prefix) = unit.strip_suffix(known.text) else {
            continue;
        };
        let kilo_ohm = dimension == Dimension::Ohm && prefix == "K";
        let tera = prefix == "T";
        for (name, power) in PREFIXES {
            if prefix == name && (power % 3 == 0 || metric(known.text)) {
                return Some(shifted(number, known.exponent + power * known.prefix_power));
            }
        }
        if kilo_ohm || tera {
            let power = if tera { 12 } else { 3 };
            return Some(shifted(number, known.exponent + power * known.prefix_power));
        }
    }
    None
}

pub(super) fn degrees(number: &str) -> f64 {
    shifted(number, 0) * (std::f64::consts::PI / 180.0)
}
