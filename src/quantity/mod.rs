//! Engineering quantities: text to SI value and back, one dimension a key.
//!
//! `parse("47 kΩ", Dimension::Ohm)` gives 47000.0, and `format(47000.0, Dimension::Ohm)` gives "47 kΩ". What [`format`] prints,
//! [`parse`] reads back to the same bits: both only shift the decimal point of the shortest digits, no multiplication rounds.
//! Resistances and capacitances may be written in the letter forms of IEC 60062 ("4k7", "3n3").

mod dimension;
mod error;
mod letter_code;
mod parse;
mod print;
mod show;

pub use dimension::Dimension;
pub use error::QuantityError;
pub use parse::{bare, parse};
pub use print::format;

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn read(text: &str, dimension: Dimension) -> f64 {
        parse(text, dimension).unwrap_or_else(|e| panic!("{text}: {e}"))
    }

    #[test]
    fn units_are_read_as_engineers_write_them() {
        use Dimension::*;
        for (text, dimension, value) in [
            ("47 kΩ", Ohm, 47e3),
            ("47kohm", Ohm, 47e3),
            ("47 KOhm", Ohm, 47e3),
            ("1 TΩ", Ohm, 1e12),
            ("4k7", Ohm, 4.7e3),
            ("4k7 Ω", Ohm, 4.7e3),
            ("4.7k", Ohm, 4.7e3),
            ("100 nF", Farad, 100e-9),
            ("100nF", Farad, 100e-9),
            ("10 mF", Farad, 10e-3),
            ("33p2", Farad, 33.2e-12),
            ("20 mA", Ampere, 20e-3),
            ("-6 dB", Decibel, -6.0),
            ("−6 dB", Decibel, -6.0),
            ("-6", Decibel, -6.0),
            ("2 %", Share, 0.02),
            ("0.02", Share, 0.02),
            ("60°", Angle, 60.0 * (std::f64::consts::PI / 180.0)),
            ("60 deg", Angle, 60.0 * (std::f64::consts::PI / 180.0)),
            ("1 mrad", Angle, 1e-3),
            ("940 nm", Metre, 940e-9),
            ("12 m", Metre, 12.0),
            ("12 cm", Metre, 0.12),
            ("7 mm²", SquareMetre, 7e-6),
            ("1 cm^2", SquareMetre, 1e-4),
            ("0.5 V/µs", SlewRate, 0.5e6),
            ("0.5 V/us", SlewRate, 0.5e6),
            ("0.5 V/μs", SlewRate, 0.5e6),
            ("1e12 V/s", SlewRate, 1e12),
            ("12 nV/√Hz", VoltNoise, 12e-9),
            ("12 nV/rtHz", VoltNoise, 12e-9),
            ("12 nV/sqrt(Hz)", VoltNoise, 12e-9),
            ("1 MHz", Hertz, 1e6),
            ("20 °C", Kelvin, 293.15),
            ("1 mW/cm²", Irradiance, 10.0),
            ("0.1 W/m²/nm", SpectralIrradiance, 1e8),
            ("-0.5 %/K", PerKelvin, -0.005),
            ("6 dB/km", DecibelPerMetre, 6e-3),
            ("6", DecibelPerKilometre, 6e-3),
            ("1e-14 m^-2/3", Cn2, 1e-14),
            ("inf", Hertz, f64::INFINITY),
            ("3", Count, 3.0),
        ] {
            assert_eq!(read(text, dimension), value, "{text}");
        }
    }

    #[test]
    fn wrong_units_name_what_was_found() {
        let error = parse("5 m", Dimension::Ampere).unwrap_err();
        assert_eq!(
            error.to_string(),
            "`5 m`: found a length in m, expected a current (A)"
        );
        assert!(error.help().contains("m alone is metre"));
        for (text, dimension) in [
            ("60", Dimension::Angle),
            ("nan", Dimension::Volt),
            ("", Dimension::Volt),
            ("1,5 V", Dimension::Volt),
            ("V", Dimension::Volt),
            ("5 parsec", Dimension::Metre),
            ("1.5", Dimension::Count),
            ("1e999 V", Dimension::Volt),
            ("1 KHz", Dimension::Hertz),
            ("2 %", Dimension::Volt),
            ("0.1", Dimension::SpectralIrradiance),
        ] {
            let error = parse(text, dimension).expect_err(text);
            assert!(!error.help().is_empty());
        }
    }

    proptest! {
        #[test]
        fn what_is_printed_reads_back_to_the_same_bits(bits in any::<u64>(), index in 0..Dimension::ALL.len()) {
            let (value, dimension) = (f64::from_bits(bits), Dimension::ALL[index]);
            prop_assume!(value.is_finite());
            let value = if dimension == Dimension::Count { value.abs().min(1e15).trunc() } else { value };
            let text = format(value, dimension);
            prop_assert_eq!(parse(&text, dimension).map(f64::to_bits), Ok(value.to_bits()), "{}", &text);
        }

        #[test]
        fn everyday_values_read_back_too(mantissa in 1..10_000i32, power in -18..13i32, index in 0..Dimension::ALL.len()) {
            let dimension = Dimension::ALL[index];
            prop_assume!(dimension != Dimension::Count);
            let value: f64 = std::format!("{mantissa}e{power}").parse().unwrap();
            let text = format(value, dimension);
            prop_assert_eq!(parse(&text, dimension).map(f64::to_bits), Ok(value.to_bits()), "{}", &text);
        }
    }
}
