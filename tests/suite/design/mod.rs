//! The design file: what is read, what is refused and where.

mod faults;
mod parts;
mod robust;
mod sets;

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
