//! Designs with transistors, and what measures them.

use std::f64::consts::TAU;
use std::path::Path;

use harklight::design::Design;
use harklight::link::Link;
use harklight::station::{Conditions, Model};
use num_complex::Complex64;

pub use crate::bench::{quiet, reading};

pub const RATE: f64 = 384_000.0;
/// kT/q at 293.15 K, V.
pub const V_T: f64 = 1.380_649e-23 * 293.15 / 1.602_176_634e-19;

/// A transistor without noise resistance, capacitance, Early effect or saturation voltage; gain 200, V_BE 0.65 V at 1 mA.
pub const IDEAL: &str = "gain = 200\ntransition_frequency = \"inf\"\ncollector_capacitance = 0\nbase_resistance = 0\n\
early_voltage = \"inf\"\nsaturation = 0\nsaturation_current = \"7 fA\"\n";

/// The part of the golden files.
pub const REAL: &str = "gain = 200\ntransition_frequency = \"50 MHz\"\ncollector_capacitance = \"4 pF\"\n\
base_resistance = \"200 Ω\"\nearly_voltage = \"80 V\"\nsaturation = \"0.2 V\"\nsaturation_current = \"7 fA\"\n";

pub fn stage(keys: &str, part: &str) -> String {
    format!("[[transmitter.stage]]\nname = \"amp\"\nkind = \"transistor\"\n{keys}{part}")
}

pub fn coupling(farads: &str) -> String {
    format!("[[transmitter.stage]]\nkind = \"coupling\"\ncapacitor = \"{farads}\"\n")
}

/// 9 V, 1 mA, 4.7 kΩ at the collector, 1 kΩ at the emitter of which `bypassed` is bypassed, divider of 47 kΩ.
pub fn usual(bypassed: f64) -> String {
    format!(
        "supply = \"9 V\"\nbias = \"1 mA\"\ncollector_resistor = \"4.7 kΩ\"\nemitter_resistor = \"1 kΩ\"\n\
         bypassed = {bypassed}\nbias_resistance = \"47 kΩ\"\n"
    )
}

pub const SINK: &str =
    "kind = \"current-sink\"\nbias = \"20 mA\"\nslope = \"1 mA/V\"\nsense = 0\nsaturation = 0\n";

/// A driver that shows 10 kΩ.
pub fn loaded_sink() -> String {
    format!("{SINK}input_resistance = \"10 kΩ\"\n")
}

/// A link with these transmitter stages behind `resistance` (Ω), a driver, and nothing of interest after it.
pub fn link(resistance: f64, stages: &str, driver: &str, edits: &[&str]) -> Link {
    let text = format!(
        "[source]\nfull_scale = \"1 V\"\nresistance = {resistance}\n{stages}[transmitter.driver]\nsupply = \"9 V\"\n{driver}\
         [transmitter.emitter]\npart = \"ir-led-narrow\"\nthermal_resistance = 0\n\
         [path]\nkind = \"air\"\ndistance = \"1 m\"\n[receiver.detector]\nkind = \"photodiode\"\npart = \"pin-7mm2\"\n\
         [receiver.front_end]\nkind = \"load\"\nsupply = \"9 V\"\nload = \"10 kΩ\"\ncapacitance = 0\n\
         [output]\nkind = \"line\"\nfull_scale = \"1 V\"\n"
    );
    let edits: Vec<String> = edits.iter().map(|e| (*e).to_string()).collect();
    let design = Design::from_text("draft.toml", &text, Path::new("."), &edits);
    let design = design.unwrap_or_else(|e| panic!("{:?}\n{text}", miette::Report::new(e)));
    Link::new(&design).unwrap_or_else(|e| panic!("{:?}", miette::Report::new(e)))
}

pub fn at<'a>(link: &'a Link, path: &str) -> &'a dyn Model {
    let found = link.stations().iter().find(|s| s.path() == path);
    found.unwrap_or_else(|| panic!("no {path}")).as_ref()
}

pub fn run(model: &dyn Model, conditions: &Conditions, input: &[f64]) -> Vec<f64> {
    let mut block = input.to_vec();
    model.runner(conditions).run(&mut block, &[]);
    block
}

pub fn tone(frequency: f64, peak: f64, samples: usize) -> Vec<f64> {
    (0..samples)
        .map(|n| peak * (TAU * (frequency * n as f64 / RATE).fract()).sin())
        .collect()
}

/// Complex amplitude of `frequency` in a record of whole periods.
pub fn phasor(record: &[f64], frequency: f64) -> Complex64 {
    let turn = |n: usize| Complex64::from_polar(1.0, -TAU * (frequency * n as f64 / RATE).fract());
    let sum: Complex64 = record.iter().enumerate().map(|(n, x)| x * turn(n)).sum();
    sum * 2.0 / record.len() as f64
}

/// Size of harmonics 1…`count` of a settled 1 kHz tone of `peak`, from the last of ten periods.
pub fn harmonics(model: &dyn Model, peak: f64, count: usize) -> Vec<f64> {
    let period = (RATE / 1e3) as usize;
    let output = run(model, &quiet(RATE), &tone(1e3, peak, 10 * period));
    let last = &output[9 * period..];
    (1..=count)
        .map(|n| phasor(last, 1e3 * n as f64).norm())
        .collect()
}

pub fn near(a: f64, b: f64, share: f64) {
    assert!((a / b - 1.0).abs() < share, "{a} against {b}");
}
