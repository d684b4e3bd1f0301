//! SI value to text.

use super::Dimension;
use super::parse::degrees;

const PREFIXED: [(&str, i32); 9] = [
    ("f", -15),
    ("p", -12),
    ("n", -9),
    ("µ", -6),
    ("m", -3),
    ("", 0),
    ("k", 3),
    ("M", 6),
    ("G", 9),
];

/// The value as an engineer writes it: the shortest digits that read back to the same bits, with a prefix where one fits.
///
/// `value` is in the dimension's SI unit; infinity prints as "inf". An angle whose degrees would not read back exactly is printed
/// in radians.
pub fn format(value: f64, dimension: Dimension) -> String {
    if value.is_infinite() {
        return if value > 0.0 {
            "inf".into()
        } else {
            "-inf".into()
        };
    }
    if value.is_nan() {
        return "NaN".into();
    }
    if dimension == Dimension::Angle {
        return angle(value);
    }
    let (digits, leading) = shortest(value);
    let (unit, shift) = chosen_unit(dimension, leading, value == 0.0);
    let leading = if value == 0.0 { 0 } else { leading - shift };
    let number = placed(value.is_sign_negative(), &digits, leading);
    if unit.is_empty() {
        number
    } else {
        format!("{number} {unit}")
    }
}

/// The shortest digits of |value| and the power of ten of the first.
fn shortest(value: f64) -> (String, i32) {
    let text = format!("{:e}", value.abs());
    let (mantissa, exponent) = text.split_once('e').unwrap_or((&text, "0"));
    (mantissa.replace('.', ""), exponent.parse().unwrap_or(0))
}

/// The decimal point set so that the first digit has the power of ten `leading`; far from 1 with an exponent.
fn placed(negative: bool, digits: &str, leading: i32) -> String {
    let sign = if negative { "-" } else { "" };
    if !(-4..=8).contains(&leading) {
        let fraction = if digits.len() > 1 {
            format!(".{}", &digits[1..])
        } else {
            String::new()
        };
        return format!("{sign}{}{fraction}e{leading}", &digits[..1]);
    }
    if leading < 0 {
        return format!("{sign}0.{}{digits}", "0".repeat((-leading - 1) as usize));
    }
    let point = leading as usize + 1;
    if digits.len() <= point {
        format!("{sign}{digits}{}", "0".repeat(point - digits.len()))
    } else {
        format!("{sign}{}.{}", &digits[..point], &digits[point..])
    }
}

/// The unit to print and its power of ten, for a value whose first digit has the power `leading`.
fn chosen_unit(dimension: Dimension, leading: i32, zero: bool) -> (String, i32) {
    let fixed = |unit: &str, shift: i32| (unit.to_string(), shift);
    match dimension {
        Dimension::Kelvin
        | Dimension::Decibel
        | Dimension::DecibelPerHertz
        | Dimension::DecibelPerMetre => fixed(dimension.unit(), 0),
        Dimension::KelvinPerWatt | Dimension::Speed | Dimension::Loudness | Dimension::Cn2 => {
            fixed(dimension.unit(), 0)
        }
        Dimension::Number | Dimension::Count | Dimension::Angle => fixed("", 0),
        Dimension::DecibelPerKilometre => fixed("dB/km", -3),
        Dimension::Share => fixed("%", -2),
        Dimension::PerKelvin => fixed("%/K", -2),
        Dimension::SpectralIrradiance => fixed("W/m²/nm", 9),
        Dimension::SlewRate if leading >= 4 => fixed("V/µs", 6),
        Dimension::SquareMetre if !zero => powered("m²", 2, leading),
        Dimension::CubicMetre if !zero => powered("m³", 3, leading),
        _ if zero => fixed(dimension.unit(), 0),
        _ => powered(dimension.unit(), 1, leading),
    }
}

/// The largest prefix, raised to `power`, that leaves a digit before the point; the bare unit beyond the prefixes.
fn powered(unit: &str, power: i32, leading: i32) -> (String, i32) {
    let fits = |(_, exponent): &&(&str, i32)| exponent * power <= leading;
    match PREFIXED
        .iter()
        .rev()
        .filter(|(_, exponent)| power == 1 || *exponent <= 0)
        .find(fits)
    {
        Some((prefix, exponent)) if leading < 18 => (format!("{prefix}{unit}"), exponent * power),
        _ => (unit.to_string(), 0),
    }
}

/// Degrees with as few digits as read back to the same radians; radians where none do.
fn angle(value: f64) -> String {
    let turned = value * (180.0 / std::f64::consts::PI);
    for decimals in 0..=16 {
        let text = format!("{turned:.decimals$}");
        if degrees(&text).to_bits() == value.to_bits() {
            return format!("{text}°");
        }
    }
    let (digits, leading) = shortest(value);
    format!("{} rad", placed(value.is_sign_negative(), &digits, leading))
}
