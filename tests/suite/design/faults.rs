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
    fault("count = 2", "count = 0", "0", "from 1 up to 10000", "count"),
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
    // A curve that no emitter has.
    fault("count = 2", "curve = [[\"10 mA\", \"2 mW\"], [\"20 mA\", \"1 mW\"]]", "curve = [[\"10 mA\", \"2 mW\"], [\"20 mA\", \"1 mW\"]]", "falls from 2 mW at 10 mA", "one junction temperature"),
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

/// Whole sections of every kind of the file; `None` appends. A kind is either run or refused as not built, never misread.
#[rustfmt::skip]
const SCHEMA: &[(Option<(&str, &str)>, &str)] = &[
    (Some(("[transmitter.driver]", "[transmitter.emitter]")), "[transmitter.driver]\nkind = \"transistor\"\nsupply = \"9 V\"\nbias = \"20 mA\"\nemitter_resistor = \"33 Ω\"\nbias_resistance = \"10k\"\npart = \"small-signal-npn\"\n"),
    (Some(("[transmitter.driver]", "[transmitter.emitter]")), "[transmitter.driver]\nkind = \"series-resistor\"\nsupply = \"9 V\"\nresistor = \"330 Ω\"\ninput_resistance = \"50k\"\n"),
    (Some(("[transmitter.emitter]", "[path]")), "[transmitter.emitter]\npart = \"red-led\"\ncurve = [[0, 0], [\"20 mA\", \"6 mW\"], [\"50 mA\", \"12 mW\"]]\n"),
    (Some(("[path]", "[[path.interruption]]")), "[path]\nkind = \"fibre\"\nlength = \"20 m\"\nattenuation = \"0.2 dB/m\"\ncore = \"1 mm\"\naperture = 0.5\nconnectors = 2\nconnector_loss = \"1.5 dB\"\n"),
    (Some(("[path]", "[[path.interruption]]")), "[path]\nkind = \"diffuse\"\nsurface = \"90 m²\"\nreflectance = 0.6\nvolume = \"60 m^3\"\n"),
    (Some(("[path]", "[[path.interruption]]")), "[path]\nkind = \"air\"\ndistance = \"200 m\"\ntilt = \"1 deg\"\nvisibility = \"10 km\"\nrain = \"6 dB/km\"\nturbulence = \"1e-14 m^-2/3\"\nwind = \"3 m/s\"\nsway = \"0.1°\"\nsway_bandwidth = \"2 Hz\"\n"),
    (Some(("[receiver.detector]", "[receiver.front_end]")), "[receiver.detector]\nkind = \"photodiode\"\nquantum_efficiency = \"80 %\"\narea = \"7 mm²\"\ndark_current = \"2 nA\"\ncapacitance = \"70p\"\nbuilt_in = \"0.6 V\"\ngrading = 0.5\nsaturation_current = \"30 pA\"\nideality = 1.1\ncount = 4\n"),
    (Some(("[receiver.detector]", "[[receiver.stage]]")), "[receiver.detector]\nkind = \"phototransistor\"\npart = \"phototransistor-small\"\nbase_resistor = \"1M0\"\n[receiver.front_end]\nkind = \"load\"\nsupply = \"9 V\"\nload = \"4k7\"\ncapacitance = \"10 pF\"\nload_at = \"emitter\"\n"),
    (Some(("[receiver.detector]", "[[receiver.stage]]")), "[receiver.detector]\nkind = \"photocell\"\npart = \"cell-1cm2\"\n[receiver.front_end]\nkind = \"load\"\nsupply = \"9 V\"\nload = \"1k0\"\n"),
    (Some(("[receiver.detector]", "[[receiver.stage]]")), "[receiver.detector]\nkind = \"photodiode\"\npart = \"pin-1mm2\"\n[receiver.front_end]\nkind = \"load\"\nsupply = \"9 V\"\nload = \"10k\"\nload_at = \"cathode\"\n"),
    (None, "[[ambient]]\nkind = \"tube-magnetic\"\nirradiance = \"0.1 W/m²\"\nripple = \"30 %\"\nmains = \"60 Hz\"\nphase = \"90°\"\n"),
    (None, "[[ambient]]\nkind = \"tube-electronic\"\nphotocurrent = \"2 µA\"\nripple = 0.1\nfrequency = \"38 kHz\"\n"),
    (None, "[[ambient]]\nkind = \"pwm-lamp\"\nirradiance = \"0.1 mW/cm²\"\nfrequency = \"1 kHz\"\nduty = \"40 %\"\nedge = \"1 µs\"\n"),
    (None, "[[ambient]]\nkind = \"daylight\"\nspectral_irradiance = \"0.1 W/m²/nm\"\nsun = \"out\"\n"),
    (None, "[[ambient]]\nkind = \"steady\"\nphotocurrent = \"10 nA\"\n"),
    (None, "[[receiver.stage]]\nkind = \"trim\"\nresistance = \"10k\"\nwiper = 0.5\ntaper = \"audio\"\n"),
    (None, "[[receiver.stage]]\nkind = \"transistor\"\npart = \"high-gain-npn\"\nbias = \"1 mA\"\nsupply = \"9 V\"\ncollector_resistor = \"4k7\"\nemitter_resistor = \"1k\"\nbypassed = \"50 %\"\n"),
    (None, "[[receiver.stage]]\nkind = \"filter\"\nshape = \"low-pass\"\nfamily = \"chebyshev\"\norder = 5\ncorner = \"15 kHz\"\nripple = \"0.5 dB\"\n"),
    (None, "[[receiver.stage]]\nkind = \"filter\"\nshape = \"notch\"\nfamily = \"butterworth\"\norder = 2\ncorner = \"100 Hz\"\nwidth = \"10 Hz\"\n"),
    (None, "[[receiver.stage]]\nkind = \"filter\"\nshape = \"de-emphasis\"\ntime_constant = \"50 µs\"\nsecond_time_constant = \"5 µs\"\n"),
    (None, "[[receiver.stage]]\nkind = \"filter\"\nshape = \"high-pass\"\nfamily = \"rc\"\nresistor = \"4k7\"\ncapacitor = \"100n\"\n"),
    (None, "[[receiver.stage]]\nkind = \"power\"\ngain = \"26 dB\"\noutput_current = \"1 A\"\ndead_zone = \"10 mV\"\ngbw = \"3 MHz\"\nslew = \"8 V/us\"\nnoise_voltage = \"20 nV/sqrt(Hz)\"\n"),
    (Some(("[output]", "[require]")), "[output]\nkind = \"loudspeaker\"\nfull_scale = \"10 V\"\nimpedance = \"8R\"\nresonance = \"80 Hz\"\nquality = 0.7\nvoice_coil = \"5 kHz\"\nsensitivity = \"88 dB\"\ndistance = \"1 m\"\n"),
    (Some(("[output]", "[require]")), "[output]\nkind = \"headphone\"\nfull_scale = \"1 V\"\nimpedance = \"32 Ω\"\nsensitivity = \"100 dB\"\n"),
    (Some(("sense =", "saturation")), "sense = 0\nservo = { bandwidth = \"100 kHz\", gain = 20 }\n"),
    (Some(("bias = \"2 V\"", "feedback = \"220k\"")), "bias = 0\nambient_servo = \"30 Hz\"\n"),
];

fn with(place: Option<(&str, &str)>, section: &str) -> String {
    // Limits and tolerances of the base design do not fit every kind.
    let base = &LINK[..LINK.find("[tolerance]").unwrap()];
    match place {
        None => base.replacen("[require]", &format!("{section}\n[require]"), 1),
        Some((from, to)) => {
            let start = base.find(from).unwrap();
            let end = start + base[start..].find(to).unwrap();
            format!("{}{section}\n{}", &base[..start], &base[end..])
        }
    }
}

#[test]
fn every_kind_of_the_file_is_read() {
    for (place, section) in SCHEMA {
        if let Err(error) = read(&with(*place, section), &[]) {
            panic!(
                "{section}
{error:?}"
            );
        }
    }
}

#[test]
fn kinds_that_do_not_fit_are_refused() {
    for (place, section, message) in [
        (
            SCHEMA[7].0,
            SCHEMA[7].1.replace("\"emitter\"", "\"cathode\""),
            "a phototransistor has no cathode",
        ),
        (
            SCHEMA[9].0,
            SCHEMA[9].1.replace("\"cathode\"", "\"emitter\""),
            "a photodiode has no emitter",
        ),
        (
            SCHEMA[8].0,
            SCHEMA[8]
                .1
                .replace("load = \"1k0\"", "load = \"1k0\"\nload_at = \"anode\""),
            "has its load across it",
        ),
        (
            SCHEMA[5].0,
            SCHEMA[5].1.replace("wind = \"3 m/s\"\n", ""),
            "turbulence needs wind",
        ),
        (
            SCHEMA[17].0,
            SCHEMA[17].1.replace("ripple = \"0.5 dB\"", ""),
            "has no `ripple`",
        ),
        (
            SCHEMA[17].0,
            SCHEMA[17].1.replace("order = 5", "order = 9"),
            "out of range",
        ),
        (
            SCHEMA[18].0,
            SCHEMA[18].1.replace("butterworth", "rc"),
            "no rc notch",
        ),
        (
            SCHEMA[20].0,
            SCHEMA[20].1.replace("family", "order = 2\nfamily"),
            "`order` says nothing",
        ),
        (
            SCHEMA[2].0,
            SCHEMA[2].1.replace("\"50 mA\"", "\"10 mA\""),
            "must rise",
        ),
        (
            SCHEMA[2].0,
            SCHEMA[2].1.replace("curve", "flux = \"5 mW\"\ncurve"),
            "exclude each other",
        ),
    ] {
        let error = read(&with(place, &section), &[])
            .err()
            .unwrap_or_else(|| panic!("accepted: {section}"));
        assert!(error.to_string().contains(message), "{message}: {error:?}");
    }
    let text = LINK.replace(
        "kind = \"photodiode\"\npart = \"pin-7mm2\"",
        "kind = \"photocell\"\npart = \"cell-1cm2\"",
    );
    assert!(
        read(&text, &[])
            .unwrap_err()
            .to_string()
            .contains("works into a load")
    );
}
