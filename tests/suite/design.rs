//! The design file: what is read, what is refused and where.

use std::path::Path;

use harklight::design::{Design, DesignError, Relation, Tolerance};
use harklight::quantity::Dimension;

const LINK: &str = r#"format = 1
title = "Workshop link"
temperature = "300 K"
silence = ["receiver.detector.shot"]

[source]
full_scale = "1 V"
resistance = "600 Ω"

[[transmitter.stage]]
kind = "coupling"
capacitor = "1u0"

[[transmitter.stage]]
kind = "opamp"
name = "drive"
connection = "non-inverting"
feedback = "10 kΩ"
ground = "inf"
bias_resistance = "100k"
part = "jfet-input"

[transmitter.driver]
kind = "current-sink"
supply = "9 V"
bias = "30 mA"
slope = "20 mA/V"
sense = "10 Ω"
saturation = "0.3 V"

[transmitter.emitter]
part = "ir-led-narrow"
count = 2

[path]
kind = "air"
distance = "4 m"
off_axis = "3°"
windows = [0.9, "92 %"]

[[path.interruption]]
at = "2 s"
lasts = "150 ms"

[[ambient]]
kind = "incandescent"
spectral_irradiance = "2 mW/m²/nm"
ripple = "12 %"

[receiver.optics]
aperture = "20 mm"
field_of_view = "15°"
filter = { centre = "940 nm", width = "60 nm", transmission = 0.8 }

[receiver.detector]
kind = "photodiode"
part = "pin-7mm2"

[receiver.front_end]
kind = "transimpedance"
supply = ["5 V", "-5 V"]
bias = "2 V"
feedback = "220k"
feedback_capacitor = "1p5"
part = "jfet-input"
gbw = "6 MHz"

[[receiver.stage]]
kind = "coupling"
capacitor = "220 nF"

[[receiver.stage]]
kind = "opamp"
connection = "non-inverting"
feedback = "47 kΩ"
ground = "4k7"
bias_resistance = "100 kΩ"
part = "low-noise-bipolar"

[output]
kind = "line"
full_scale = "1 V"

[require]
snr = ">= 45 dB"
thd = "<= 1 %"
hum = "<= -40 dB"

[tolerance]
resistors = "1 %"
"receiver.detector.responsivity" = ["0.5 A/W", "0.65 A/W"]
path.distance = "5 %"
"#;

fn read(text: &str, sets: &[&str]) -> Result<Design, DesignError> {
    let sets: Vec<String> = sets.iter().map(|set| (*set).to_string()).collect();
    Design::from_text("link.toml", text, Path::new("."), &sets)
}

fn link(sets: &[&str]) -> Design {
    read(LINK, sets).unwrap_or_else(|error| panic!("{error:?}"))
}

#[test]
fn a_whole_design_is_read_in_si_units() {
    let design = link(&[]);
    assert_eq!(
        (design.title.as_str(), design.temperature, design.seed),
        ("Workshop link", 300.0, None)
    );
    assert_eq!(design.silence, ["receiver.detector.shot"]);
    assert_eq!(design.source.number("noise"), 0.0);
    assert_eq!(design.transmitter_stages[0].path, "transmitter.stage.1");
    assert_eq!(design.transmitter_stages[0].number("capacitor"), 1e-6);
    let drive = &design.transmitter_stages[1];
    assert_eq!(drive.path, "transmitter.stage.drive");
    assert_eq!(drive.number("ground"), f64::INFINITY);
    assert_eq!(
        drive.numbers("supply"),
        [9.0],
        "the driver's supply is shared"
    );
    assert_eq!(drive.optional("reference"), None);
    assert_eq!(design.driver.kind.as_deref(), Some("current-sink"));
    assert_eq!(design.driver.optional("input_resistance"), None);
    assert_eq!(design.driver.number("input_resistance"), f64::INFINITY);
    assert_eq!(design.emitter.number("count"), 2.0);
    assert_eq!(design.emitter.number("wavelength"), 940e-9);
    assert_eq!(
        design.path.number("off_axis"),
        3.0 * (std::f64::consts::PI / 180.0)
    );
    assert_eq!(design.path.numbers("windows"), [0.9, 0.92]);
    assert_eq!(design.path.optional("visibility"), None);
    assert_eq!(design.interruptions[0].number("edge"), 1e-3);
    assert_eq!(design.ambient[0].number("spectral_irradiance"), 2e6);
    assert_eq!(design.ambient[0].number("mains"), 50.0);
    assert_eq!(
        design.optics.table("filter").unwrap().number("width"),
        60e-9
    );
    assert_eq!(design.front_end.numbers("supply"), [-5.0, 5.0]);
    assert_eq!(
        design.front_end.number("gbw"),
        6e6,
        "the section's own key wins over the part"
    );
    assert_eq!(
        design.front_end.number("slew"),
        13e6,
        "the part fills the rest"
    );
    assert_eq!(design.receiver_stages[1].numbers("supply"), [-5.0, 5.0]);
    assert_eq!(design.receiver_stages[1].number("stages"), 1.0);
    assert_eq!(design.output.number("impedance"), f64::INFINITY);
    assert_eq!(design.measure.numbers("band"), [20.0, 20e3]);
    assert_eq!(
        (
            design.measure.number("tone"),
            design.measure.number("level")
        ),
        (1e3, -6.0)
    );
    assert_eq!(design.sha256.len(), 64);
}

#[test]
fn limits_and_tolerances_keep_their_units() {
    let design = link(&[]);
    let limits: Vec<_> = design
        .require
        .iter()
        .map(|limit| (limit.key.as_str(), limit.relation, limit.value, limit.unit))
        .collect();
    assert_eq!(
        limits,
        [
            ("snr", Relation::AtLeast, 45.0, Dimension::Decibel),
            ("thd", Relation::AtMost, 0.01, Dimension::Share),
            ("hum", Relation::AtMost, -40.0, Dimension::Decibel),
        ]
    );
    assert_eq!(
        design.tolerance,
        [
            ("resistors".to_string(), Tolerance::Share(0.01)),
            (
                "receiver.detector.responsivity".to_string(),
                Tolerance::Span([0.5, 0.65])
            ),
            ("path.distance".to_string(), Tolerance::Share(0.05)),
        ]
    );
}

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
    fault("kind = \"incandescent\"", "kind = \"tube-magnetic\"", "[[ambient]]", "kind tube-magnetic is not built yet", ""),
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

#[test]
fn sets_edit_any_value_before_the_checks() {
    let design = link(&[
        "path.distance=12 m",
        "transmitter.stage.drive.feedback=100k",
        "receiver.stage.2.ground = 2k2",
        "receiver.optics.filter.width=40 nm",
        "measure.tone=400 Hz",
        "measure.band=[50 Hz, 15 kHz]",
        "seed=18446744073709551615",
        "temperature=20 °C",
        "title=Second try",
        "require.snr=>= 50 dB",
        "tolerance.receiver.front_end.feedback=5 %",
        "silence=[\"receiver.front_end.feedback\", 'source.resistance']",
        "receiver.front_end.supply=[-12, 12]",
        "transmitter.emitter.divergence=4°",
        "receiver.detector.quantum_efficiency=0.8",
        "path.windows=[]",
    ]);
    assert_eq!(design.path.number("distance"), 12.0);
    assert_eq!(design.transmitter_stages[1].number("feedback"), 100e3);
    assert_eq!(design.receiver_stages[1].number("ground"), 2200.0);
    assert_eq!(
        design.optics.table("filter").unwrap().number("width"),
        40e-9
    );
    assert_eq!(design.measure.number("tone"), 400.0);
    assert_eq!(design.measure.numbers("band"), [50.0, 15e3]);
    assert_eq!(design.seed, Some(u64::MAX));
    assert_eq!(
        (design.temperature, design.title.as_str()),
        (293.15, "Second try")
    );
    assert_eq!(
        design
            .require
            .iter()
            .find(|limit| limit.key == "snr")
            .unwrap()
            .value,
        50.0
    );
    assert_eq!(
        design.tolerance.last().unwrap().0,
        "receiver.front_end.feedback"
    );
    assert_eq!(
        design.silence,
        ["receiver.front_end.feedback", "source.resistance"]
    );
    assert_eq!(design.front_end.numbers("supply"), [-12.0, 12.0]);
    assert!(
        !design.emitter.given("half_angle"),
        "the part's other way of saying it gives way"
    );
    assert!(!design.detector.given("responsivity"));
    assert!(design.path.numbers("windows").is_empty());
}

#[test]
fn a_wrong_set_points_at_itself() {
    for (set, underlined, message, help) in [
        (
            "path.distance",
            "path.distance",
            "sets nothing",
            "PATH=VALUE",
        ),
        (
            "path.distanse=3 m",
            "path.distanse",
            "names nothing",
            "did you mean `distance`?",
        ),
        (
            "paht.distance=3 m",
            "paht.distance",
            "names nothing",
            "path",
        ),
        ("path.distance=3 V", "3 V", "found a voltage", "6 m"),
        ("path.distance=-3", "-3", "out of range", "distance"),
        ("path.distance.x=3", "path.distance.x", "no keys inside", ""),
        (
            "receiver.stage.3.feedback=1k",
            "receiver.stage.3.feedback",
            "no receiver.stage.3",
            "receiver.stage.2",
        ),
        (
            "receiver.stage.0.feedback=1k",
            "receiver.stage.0.feedback",
            "no receiver.stage.0",
            "receiver.stage.1",
        ),
        (
            "transmitter.stage.drve.feedback=1k",
            "transmitter.stage.drve.feedback",
            "named `drve`",
            "did you mean `drive`?",
        ),
        (
            "receiver.stage.feedback=1k",
            "receiver.stage.feedback",
            "is a section",
            "",
        ),
        (
            "receiver.front_end=load",
            "receiver.front_end",
            "is a section",
            "feedback",
        ),
        (
            "receiver.front_end.kind=loud",
            "loud",
            "no kind `loud`",
            "load",
        ),
        ("measure.band=[20 Hz", "[20 Hz", "not closed", "list"),
        (
            "source.resistance=\"472\"",
            "\"472\"",
            "could be read as",
            "4.7 kΩ",
        ),
        ("require.thd=1 %", "1 %", "does not begin with", "<="),
        ("seed=-1", "-1", "not a whole number", ""),
    ] {
        let error = read(LINK, &[set])
            .err()
            .unwrap_or_else(|| panic!("{set} was accepted"));
        assert!(error.to_string().contains(message), "{set}: {error:?}");
        assert!(error.help_text().contains(help), "{set}: {error:?}");
        assert_eq!(error.underlined(), Some(underlined), "{set}: {error:?}");
        assert_eq!(error.place().unwrap().source.name, "--set");
    }
}

#[test]
fn a_path_finds_any_value() {
    let design = link(&[]);
    for (path, value) in [
        ("path.distance", Some(4.0)),
        ("receiver.stage.2.feedback", Some(47e3)),
        ("transmitter.stage.drive.feedback", Some(10e3)),
        ("transmitter.stage.2.feedback", Some(10e3)),
        ("receiver.optics.filter.width", Some(60e-9)),
        ("receiver.detector.area", Some(7e-6)),
        ("output.impedance", Some(f64::INFINITY)),
        ("path.visibility", None),
        ("temperature", Some(300.0)),
        ("measure.level", Some(-6.0)),
        ("ambient.1.ripple", Some(0.12)),
    ] {
        assert_eq!(design.value_at(path).unwrap().number(), value, "{path}");
    }
    let error = design.value_at("receiver.stage.2.fedback").err().unwrap();
    assert!(error.help_text().contains("did you mean `feedback`?"));
}

#[test]
fn a_missing_file_and_a_file_that_is_no_text_are_told() {
    let error = Design::load(Path::new("no/such/design.toml"), &[]).unwrap_err();
    assert!(error.to_string().contains("no/such/design.toml"));
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("bytes.toml");
    std::fs::write(&path, b"title = \"\xff\"").unwrap();
    let error = Design::load(&path, &[]).unwrap_err();
    assert!(error.to_string().contains("byte 9"), "{error}");
}

#[test]
fn a_users_catalogue_stands_beside_the_built_in_one() {
    let folder = tempfile::tempdir().unwrap();
    let mine = "[my-diode]\nclass = \"photodiode\"\narea = \"4 mm²\"\nquantum_efficiency = 0.8\ndark_current = \"1 nA\"\n\
                capacitance = \"40 pF\"\nbuilt_in = \"0.6 V\"\ngrading = 0.5\nsaturation_current = \"20 pA\"\nideality = 1.1\n";
    std::fs::write(folder.path().join("mine.toml"), mine).unwrap();
    let text = LINK
        .replace("format = 1", "parts = \"mine.toml\"")
        .replace("pin-7mm2", "my-diode");
    let text = text.replace(
        "\"receiver.detector.responsivity\" = [\"0.5 A/W\", \"0.65 A/W\"]",
        "",
    );
    let design = Design::from_text("link.toml", &text, folder.path(), &[]).unwrap();
    assert_eq!(design.detector.number("quantum_efficiency"), 0.8);
    assert_eq!(design.detector.number("shunt_resistance"), f64::INFINITY);
    std::fs::write(
        folder.path().join("mine.toml"),
        mine.replace("4 mm²", "4 mm"),
    )
    .unwrap();
    let error = Design::from_text("link.toml", &text, folder.path(), &[]).unwrap_err();
    assert_eq!(error.underlined(), Some("\"4 mm\""));
    assert!(error.place().unwrap().source.name.ends_with("mine.toml"));
}
