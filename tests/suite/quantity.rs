//! Quantities against the letter and digit codes of IEC 60062:2016 (its cases from memory, in tests/data/rkm.csv).

use harklight::quantity::{Dimension, QuantityError, parse};

/// The rows that are refused on purpose: a bare digit code could be a plain number, and a design's value carries no tolerance.
#[test]
fn every_row_of_the_letter_code_table_is_read_or_refused_as_documented() {
    let table = include_str!("../data/rkm.csv");
    let mut rows = 0;
    for row in table.lines().skip(2) {
        let (text, value, note) = match row.rsplitn(3, ',').collect::<Vec<_>>()[..] {
            [note, value, text] => (text, value, note),
            _ => panic!("{row}"),
        };
        rows += 1;
        let capacitor = note.starts_with('F') || note.contains("capacitor");
        let dimension = if capacitor {
            Dimension::Farad
        } else {
            Dimension::Ohm
        };
        let read = parse(text, dimension);
        if note.contains("-digit") {
            assert!(
                matches!(read, Err(QuantityError::DigitCode { .. })),
                "{text}: {read:?}"
            );
            let Err(QuantityError::DigitCode { coded, .. }) = read else {
                unreachable!()
            };
            if value.parse::<f64>().is_ok() {
                assert_eq!(
                    parse(&coded, dimension).unwrap(),
                    value.parse::<f64>().unwrap(),
                    "{text}: its coded reading"
                );
            }
        } else if note.contains("+-") || value == "ambiguous" {
            assert!(
                matches!(read, Err(QuantityError::ToleranceLetter { .. })),
                "{text}: {read:?}"
            );
            if let (Err(QuantityError::ToleranceLetter { value: plain, .. }), Ok(value)) =
                (read, value.parse::<f64>())
            {
                assert_eq!(
                    parse(&plain, dimension).unwrap(),
                    value,
                    "{text}: its value without tolerance"
                );
            }
        } else if value == "error" {
            assert!(read.is_err(), "{text}: {read:?}");
        } else {
            assert_eq!(
                read.as_ref().ok(),
                value.parse::<f64>().ok().as_ref(),
                "{text}: {read:?}"
            );
        }
    }
    assert_eq!(rows, 45);
}

#[test]
fn micro_is_read_in_all_its_spellings() {
    for text in ["3u3", "3µ3", "3μ3", "3.3 µF", "3.3uF", "3.3 μF"] {
        assert_eq!(parse(text, Dimension::Farad), Ok(3.3e-6), "{text}");
    }
}

#[test]
fn m_after_a_number_is_metre_for_a_length_and_milli_inside_a_capacitor_code() {
    assert_eq!(parse("5m", Dimension::Metre), Ok(5.0));
    assert_eq!(parse("2m2", Dimension::Farad), Ok(2.2e-3));
    assert!(matches!(
        parse("5 m", Dimension::Volt),
        Err(QuantityError::WrongUnit {
            found: Some(Dimension::Metre),
            ..
        })
    ));
}

#[test]
fn other_spellings_of_a_kind() {
    for (text, dimension, value) in [
        ("60 degrees", Dimension::Angle, 60f64.to_radians()),
        ("0.5 pA/√Hz", Dimension::AmpereNoise, 0.5e-12),
        ("-150 dB/Hz", Dimension::DecibelPerHertz, -150.0),
        ("7mm2", Dimension::SquareMetre, 7e-6),
        ("16 mA/V", Dimension::Transconductance, 16e-3),
        ("16 mS", Dimension::Transconductance, 16e-3),
        ("300 °C/W", Dimension::KelvinPerWatt, 300.0),
        ("0.2 dB/m", Dimension::DecibelPerMetre, 0.2),
        ("1 kilo", Dimension::Ohm, f64::NAN),
    ] {
        match parse(text, dimension) {
            Ok(read) => assert!(
                (read - value).abs() <= 1e-15 * value.abs(),
                "{text}: {read}"
            ),
            Err(_) => assert!(value.is_nan(), "{text}"),
        }
    }
}
