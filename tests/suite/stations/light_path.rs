//! Fibre and room: the steady share of the light against closed forms, and what fades share with every path.

use std::path::Path;

use harklight::design::Design;
use harklight::link::Link;
use harklight::station::{Conditions, Model};

/// A link with this `[path]` and with further sections; 60° of half angle, 1 cm² of detector, 10 mW of flux at 20 mA.
pub fn text(path: &str, further: &str) -> String {
    format!(
        r#"
[source]
full_scale = "1 V"
resistance = "600 Ω"

[transmitter.driver]
kind = "current-sink"
supply = "9 V"
bias = "20 mA"
slope = "10 mA/V"
sense = "10 Ω"
saturation = "0.3 V"

[transmitter.emitter]
part = "ir-led-wide"
wavelength = "850 nm"
half_angle = "60°"
flux = "10 mW"
at_current = "20 mA"
source_diameter = 0
thermal_resistance = 0

[path]
{path}

[receiver.detector]
kind = "photodiode"
part = "pin-7mm2"
area = "1 cm²"

[receiver.front_end]
kind = "transimpedance"
supply = "9 V"
reference = "2 V"
bias = "1 V"
feedback = "10 kΩ"
feedback_capacitor = "10 pF"
part = "jfet-input"

[output]
kind = "line"
full_scale = "1 V"

{further}
"#
    )
}

pub fn link(path: &str, further: &str, sets: &[&str]) -> Link {
    let sets: Vec<String> = sets.iter().map(|s| (*s).to_string()).collect();
    let design = Design::from_text("test.toml", &text(path, further), Path::new("."), &sets);
    Link::new(&design.unwrap_or_else(|e| panic!("{e:?}"))).unwrap_or_else(|e| panic!("{e:?}"))
}

pub fn path_of(link: &Link) -> &dyn Model {
    let found = link.stations().iter().find(|s| s.path() == "path");
    found.unwrap().as_ref()
}

pub fn reading(station: &dyn Model, name: &str) -> f64 {
    let found = station
        .operating_point()
        .into_iter()
        .find(|r| r.name == name);
    found.unwrap_or_else(|| panic!("no reading {name}")).value
}

/// The path's output over its light at rest, from `samples` of unmodulated light, in blocks of 512.
pub fn shares(link: &Link, conditions: &Conditions, samples: usize) -> Vec<f64> {
    let station = path_of(link);
    let rest = reading(station, "on the detector");
    let mut runner = station.runner(conditions);
    let mut all = vec![0.0; samples];
    all.chunks_mut(512).for_each(|b| runner.run(b, &[]));
    all.into_iter().map(|x| 1.0 + x / rest).collect()
}

pub const FIBRE: &str = r#"kind = "fibre"
length = "10 m"
attenuation = "0.18 dB/m"
core = "1 mm"
aperture = 0.5
connectors = 2
connector_loss = "1 dB"
"#;
pub const ROOM: &str = r#"kind = "diffuse"
surface = "110 m²"
reflectance = 0.6
volume = "75 m³"
"#;

fn gain(path: &str, sets: &[&str]) -> f64 {
    path_of(&link(path, "", sets)).curve(1.0)
}

#[test]
fn a_fibre_loses_what_its_closed_forms_say() {
    // Lambertian of order 1 into NA 0.5: 0.25; two faces of 0.172673 dB; 1.8 dB on the way (0.660693) and 2 dB in connectors.
    let whole = 0.25 * 10f64.powf(-0.0345346) * 0.660693 * 10f64.powf(-0.2);
    let close = |got: f64, expected: f64| {
        assert!((got / expected - 1.0).abs() < 1e-5, "{got} {expected}");
    };
    close(gain(FIBRE, &[]), whole);
    close(
        gain(FIBRE, &["path.length=50 m"]),
        whole * 0.125893 / 0.660693,
    );
    close(gain(FIBRE, &["path.aperture=0.3"]), whole * 0.09 / 0.25);
    // A source of twice the core's diameter covers it four times over.
    close(
        gain(FIBRE, &["transmitter.emitter.source_diameter=2 mm"]),
        whole / 4.0,
    );
    // Of a core of π mm² a detector of 1 mm² takes 1/π.
    let small = &["path.core=2 mm", "receiver.detector.area=1 mm²"];
    close(gain(FIBRE, small), whole / std::f64::consts::PI);
    // A field of view of 30° takes just NA 0.5; of arcsin 0.25, a quarter.
    close(gain(FIBRE, &["receiver.optics.field_of_view=30°"]), whole);
    close(
        gain(FIBRE, &["receiver.optics.field_of_view=14.4775122°"]),
        whole / 4.0,
    );
    // The filter stands between fibre and detector.
    let filter = &[
        "transmitter.emitter.linewidth=0",
        "receiver.optics.filter={ centre = \"850 nm\", width = \"50 nm\", transmission = 0.8 }",
    ];
    close(gain(FIBRE, filter), whole * 0.8);
}

#[test]
fn a_room_is_an_integrating_sphere_of_one_pole() {
    let link = link(ROOM, "", &[]);
    let room = path_of(&link);
    assert!((room.curve(1.0) / 1.36364e-6 - 1.0).abs() < 5e-6);
    // Mean time between reflections 9.09720 ns; −1/ln 0.6 of it is 17.8088 ns: a corner of 8.93691 MHz.
    assert!((room.slowest_time() / 17.8088e-9 - 1.0).abs() < 1e-5);
    let ratio = room.transfer(8.93691e6) / room.transfer(1.0);
    assert!(
        (ratio.norm() - 0.5f64.sqrt()).abs() < 1e-4
            && (ratio.arg() + std::f64::consts::FRAC_PI_4).abs() < 1e-4
    );
    // sin² of the field of view, as the light comes from everywhere; a concentrator of index n gains n² in all.
    let narrow = gain(ROOM, &["receiver.optics.field_of_view=30°"]);
    assert!((narrow / 1.36364e-6 / 0.25 - 1.0).abs() < 1e-5);
    let sets = &[
        "receiver.optics.field_of_view=30°",
        "receiver.optics.concentrator_index=1.5",
    ];
    assert!((gain(ROOM, sets) / 1.36364e-6 / 2.25 - 1.0).abs() < 1e-5);
}

#[test]
fn a_room_that_cannot_be_is_refused() {
    let text = text(ROOM, "").replace("75 m³", "110 m³");
    let design = Design::from_text("test.toml", &text, Path::new("."), &[]).unwrap();
    let error = Link::new(&design).err().unwrap();
    assert!(error.to_string().contains("encloses at most"), "{error}");
}

#[test]
fn in_time_every_path_is_its_transfer() {
    for path in [FIBRE, ROOM, "kind = \"air\"\ndistance = \"3 m\"\n"] {
        let link = link(path, "", &[]);
        let station = path_of(&link);
        let mut runner = station.runner(&link.conditions(384e3, 1));
        let turn = std::f64::consts::TAU * 20e3 / 384e3;
        let mut block: Vec<f64> = (0..9600).map(|n| (turn * n as f64).sin()).collect();
        runner.run(&mut block, &[]);
        let (mut re, mut im) = (0.0, 0.0);
        for (n, x) in block.iter().enumerate().skip(4800) {
            re += x * (turn * n as f64).sin() / 2400.0;
            im += x * (turn * n as f64).cos() / 2400.0;
        }
        let ratio = num_complex::Complex64::new(re, im) / station.transfer(20e3);
        assert!(
            20.0 * ratio.norm().log10().abs() < 0.01 && ratio.arg().abs() < 1e-3,
            "{ratio}"
        );
    }
}

#[test]
fn interruptions_cut_every_path() {
    let cut = "[[path.interruption]]\nat = \"20 ms\"\nlasts = \"30 ms\"\nedge = 0\n";
    for path in [FIBRE, ROOM, "kind = \"air\"\ndistance = \"3 m\"\n"] {
        let link = link(path, cut, &[]);
        let conditions = link.conditions(48e3, 1);
        let share = shares(&link, &conditions, 4800);
        assert!(share[..959].iter().all(|s| (s - 1.0).abs() < 1e-12));
        assert!(share[970..2390].iter().all(|s| s.abs() < 1e-9));
        assert!(share[2410..].iter().all(|s| (s - 1.0).abs() < 1e-9));
        let steady = Conditions {
            fades: false,
            ..conditions
        };
        assert!(shares(&link, &steady, 4800).iter().all(|s| *s == 1.0));
    }
}
