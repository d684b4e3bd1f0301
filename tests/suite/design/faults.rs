//! Every refusal, its place and its help.

use super::{LINK, read};

/// One fault: what is changed, what must be underlined (empty: nothing), words of the message and of the help.
struct Fault {
    from: &'static str,
    to: &'static str,
    underlined: &'static str,
    message: &'static str,
    help: &'static str,
}

const fn fault(
    from: &'static str,
    to: &'static str,
    underlined: &'static str,
    message: &'static str,
    help: &'static str,
) -> Fault {
    Fault {
        from,
        to,
        underlined,
        message,
        help,
    }
}

#[rustfmt::skip]
const FAULTS: &[Fault] = &[
    // Values.
    fault("distance = \"4 m\"", "distance = \"4 V\"", "\"4 V\"", "found a voltage in V, expected a length (m)", "6 m"),
    fault("distance = \"4 m\"", "distance = \"4 furlong\"", "\"4 furlong\"", "the unknown unit furlong", "6 m"),
    fault("distance = \"4 m\"", "distance = \"0 m\"", "\"0 m\"", "out of range: it takes more than 0", "distance"),
    fault("distance = \"4 m\"", "distance = -4", "-4", "out of range", "distance"),
    fault("distance = \"4 m\"", "distance = nan", "nan", "not a number", "6 m"),
    fault("distance = \"4 m\"", "distance = \"inf\"", "\"inf\"", "out of range", "distance"),
    fault("distance = \"4 m\"", "distance = true", "true", "found true or false", "distance"),
    fault("off_axis = \"3°\"", "off_axis = 3", "3", "no unit", "60°"),
    fault("off_axis = \"3°\"", "off_axis = \"95°\"", "\"95°\"", "from 0 to less than 90°", "off_axis"),
    fault("windows = [0.9, \"92 %\"]", "windows = [0.9, \"120 %\"]", "\"120 %\"", "more than 0 up to 100 %", "windows"),
    fault("\"47 kΩ\"", "\"472\"", "\"472\"", "472 Ω or, as a digit code, 4.7 kΩ", "write \"472 Ω\" or \"4.7 kΩ\""),
    fault("\"47 kΩ\"", "\"4k7J\"", "\"4k7J\"", "tolerance letter J", "4.7 kΩ"),
    fault("\"2 mW/m²/nm\"", "0.002", "0.002", "no unit", "W/m²/nm or W/m³"),
    fault("[\"5 V\", \"-5 V\"]", "[\"5 V\", \"5 V\"]", "[\"5 V\", \"5 V\"]", "no room between the rails", "-5 V"),
    fault("[\"5 V\", \"-5 V\"]", "\"-5 V\"", "\"-5 V\"", "no room", "9 V"),
    fault("temperature = \"300 K\"", "temperature = \"-3 °C\"", "", "", ""),
    fault("temperature = \"300 K\"", "temperature = \"-300 °C\"", "\"-300 °C\"", "out of range", "293.15 K"),
    fault("count = 2", "count = 0", "0", "1 or more", "count"),
    fault("count = 2", "count = 1.5", "1.5", "not a whole number", "2"),
    fault("format = 1", "format = 2", "2", "out of range", "format"),
    fault("format = 1", "format = 1\nseed = -3", "-3", "not a whole number", "write"),
    fault("format = 1", "format = 1\nseed = 18446744073709551616", "seed = 18446744073709551616", "is no seed", "18446744073709551615"),
    // Names.
    fault("distance = \"4 m\"", "distanse = \"4 m\"", "distanse", "no key `distanse`", "did you mean `distance`?"),
    fault("kind = \"air\"", "kind = \"vacuum\"", "\"vacuum\"", "no kind `vacuum`", "air, fibre, diffuse"),
    fault("kind = \"air\"\n", "", "[path]", "has no `kind`", "air, fibre, diffuse"),
    fault("kind = \"air\"", "kind = 3", "3", "is a word", "air, fibre"),
    fault("[path]", "[pathh]", "pathh", "no section `pathh`", "did you mean `path`?"),
    fault("[receiver.front_end]", "[receiver.frontend]", "frontend", "no section `frontend`", "did you mean `front_end`?"),
    fault("title =", "titel =", "titel", "no key `titel`", "did you mean `title`?"),
    fault("feedback = \"220k\"", "load = \"220k\"", "load", "it belongs to load", "feedback"),
    fault("connection = \"non-inverting\"\nfeedback = \"47 kΩ\"", "connection = \"noninverting\"", "\"noninverting\"", "cannot be `noninverting`", "non-inverting, inverting"),
    fault("width = \"60 nm\"", "widht = \"60 nm\"", "widht", "no key `widht`", "did you mean `width`?"),
    fault("width = \"60 nm\", ", "", "{ centre = \"940 nm\", transmission = 0.8 }", "filter has no `width`", "width = \"50 nm\""),
    fault("name = \"drive\"", "name = \"2\"", "name = \"2\"", "cannot be named `2`", "begins with a letter"),
    fault("name = \"drive\"", "name = 2", "2", "a text in double quotes", "preamp"),
    fault("capacitor = \"1u0\"", "capacitor = \"1u0\"\nname = \"drive\"", "name = \"drive\"", "two stages are named `drive`", "name of its own"),
    fault("\"receiver.detector.shot\"", "\"shot\"", "\"shot\"", "no name of a noise contributor", "receiver.detector.shot"),
    fault("\"receiver.detector.shot\"", "7", "7", "takes texts", "receiver.detector.shot"),
    // Missing.
    fault("distance = \"4 m\"\n", "", "[path]", "path has no `distance`", "distance = \"6 m\""),
    fault("[output]\nkind = \"line\"\nfull_scale = \"1 V\"\n", "", "", "no section [output]", "kind = \"line\" (or loudspeaker"),
    fault("part = \"pin-7mm2\"\n", "", "[receiver.detector]", "none of responsivity, quantum_efficiency", "part = "),
    fault("lasts = \"150 ms\"\n", "", "[[path.interruption]]", "has no `lasts`", "lasts = "),
    fault("at = \"2 s\"\n", "", "[[path.interruption]]", "none of at, rate", "rate"),
    fault("spectral_irradiance = \"2 mW/m²/nm\"\n", "", "[[ambient]]", "none of irradiance, spectral_irradiance, photocurrent", "µA"),
    // Together.
    fault("at = \"2 s\"", "at = \"2 s\"\nrate = \"1 Hz\"", "rate = \"1 Hz\"", "exclude each other", "one of the two"),
    fault("aperture = \"20 mm\"", "aperture = \"20 mm\"\narea = \"3 cm²\"", "area = \"3 cm²\"", "exclude each other", "one"),
    fault("filter = { centre = \"940 nm\", width = \"60 nm\", transmission = 0.8 }\n", "", "spectral_irradiance = \"2 mW/m²/nm\"", "needs the width of an optical filter", "irradiance"),
    fault("bias = \"2 V\"", "bias = \"2 V\"\nreference = \"7 V\"", "reference = \"7 V\"", "outside the rails", "-5 V and 5 V"),
    fault("gbw = \"6 MHz\"", "swing_low = \"9 V\"", "swing_low = \"9 V\"", "cannot move", "supply"),
    fault("connection = \"non-inverting\"\nfeedback = \"10 kΩ\"", "connection = \"inverting\"\nfeedback = \"10 kΩ\"", "ground = \"inf\"", "cannot be infinite when inverting", "10 kΩ"),
    // Parts.
    fault("part = \"ir-led-narrow\"", "part = \"ir-led-narow\"", "part = \"ir-led-narow\"", "no part `ir-led-narow`", "did you mean `ir-led-narrow`?"),
    fault("part = \"pin-7mm2\"", "part = \"jfet-input\"", "part = \"jfet-input\"", "is an op-amp, not a photodiode", "pin-1mm2"),
    fault("format = 1", "format = 1\nparts = \"absent.toml\"", "parts = \"absent.toml\"", "cannot read the catalogue", ""),
    // Shapes.
    fault("[[receiver.stage]]\nkind = \"coupling\"\ncapacitor = \"220 nF\"\n\n[[receiver.stage]]", "[receiver.stage]", "[receiver.stage]", "is a list", "[[receiver.stage]]"),
    fault("[source]", "[[source]]", "[[source]]", "there is one source", "[source]"),
    fault("format = 1", "receiver = 3", "", "not a TOML file", ""),
    fault("format = 1", "format = = 1", "=", "not a TOML file", "key = value"),
    // Limits.
    fault("snr = \">= 45 dB\"", "snr = \"45 dB\"", "\"45 dB\"", "does not begin with >= or <=", ">= 45 dB"),
    fault("snr = \">= 45 dB\"", "snr = \">= 45 V\"", "\">= 45 V\"", "found a voltage", ">= 45 dB"),
    fault("snr = \">= 45 dB\"", "sbr = \">= 45 dB\"", "sbr", "no figure `sbr`", "did you mean `snr`?"),
    fault("snr = \">= 45 dB\"", "snr = 45", "45", "is a text, found a number", ">= 45 dB"),
    fault("thd = \"<= 1 %\"", "thd = \"<= 1 Hz\"", "\"<= 1 Hz\"", "require.thd", "<= 1 %"),
    // Tolerances.
    fault("resistors = \"1 %\"", "resistor = \"1 %\"", "resistor", "no group `resistor`", "resistors"),
    fault("resistors = \"1 %\"", "resistors = \"120 %\"", "\"120 %\"", "out of range", "5 %"),
    fault("path.distance = \"5 %\"", "path.distanse = \"5 %\"", "distanse", "names nothing", "distance"),
    fault("\"0.65 A/W\"]", "\"0.65 A\"]", "\"0.65 A\"", "found a current", "A/W"),
    fault("\"0.65 A/W\"]", "\"0.45 A/W\"]", "[\"0.5 A/W\", \"0.45 A/W\"]", "down to", "smaller value first"),
    // Not built.
    fault("sense = \"10 Ω\"", "sense = \"10 Ω\"\nservo = { bandwidth = \"10 kHz\", gain = 10 }", "servo = { bandwidth = \"10 kHz\", gain = 10 }", "transmitter.driver.servo is not built yet", ""),
    fault("off_axis = \"3°\"", "turbulence = \"1e-14 m^-2/3\"\nwind = \"2 m/s\"", "turbulence = \"1e-14 m^-2/3\"", "path.turbulence is not built yet", ""),
    fault("kind = \"incandescent\"", "kind = \"tube-magnetic\"", "kind = \"tube-magnetic\"", "kind tube-magnetic is not built yet", ""),
];

#[test]
fn every_fault_is_told_with_its_place_and_what_would_be_accepted() {
    for fault in FAULTS {
        assert!(
            LINK.contains(fault.from),
            "the case changes nothing: {}",
            fault.from
        );
        let text = LINK.replacen(fault.from, fault.to, 1);
        let read = read(&text, &[]);
        if fault.message.is_empty() {
            assert!(read.is_ok(), "{}: {:?}", fault.to, read.err());
            continue;
        }
        let error = read
            .err()
            .unwrap_or_else(|| panic!("{} was accepted", fault.to));
        assert!(
            error.to_string().contains(fault.message),
            "{}: {error:?}",
            fault.to
        );
        assert!(
            error.help_text().contains(fault.help),
            "{}: {error:?}",
            fault.to
        );
        if !fault.underlined.is_empty() {
            assert_eq!(
                error.underlined(),
                Some(fault.underlined),
                "{}: {error:?}",
                fault.to
            );
        }
        if let Some(place) = error.place() {
            assert_eq!(place.source.name, "link.toml");
        }
    }
}

#[test]
fn the_terminal_shows_the_line_and_the_help() {
    let error = read(
        &LINK.replace("distance = \"4 m\"", "distance = \"4 V\""),
        &[],
    )
    .unwrap_err();
    let line = LINK
        .lines()
        .position(|line| line.starts_with("distance"))
        .unwrap()
        + 1;
    assert_eq!(error.line(), Some(line));
    let mut shown = String::new();
    miette::NarratableReportHandler::new()
        .render_report(&mut shown, &error)
        .unwrap();
    assert!(
        shown.contains("distance = \"4 V\"")
            && shown.contains("6 m")
            && shown.contains("link.toml"),
        "{shown}"
    );
}
