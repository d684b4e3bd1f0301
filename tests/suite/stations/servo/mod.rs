//! The monitor loop of the transmit head, its measured light–current curve, and the ambient servo of the transimpedance stage.

mod ambient;
mod curve;
mod golden;
mod monitor;

use std::f64::consts::TAU;
use std::path::Path;

use num_complex::Complex64;

pub use crate::bench::{quiet, reading};

use harklight::design::{Design, DesignError};
use harklight::link::Link;
use harklight::signal::spectrum::Analyser;
use harklight::station::{Conditions, Curves, Model};

pub const RATE: f64 = 384e3;
pub const HEAD: &str = "transmitter.emitter";
pub const FRONT: &str = "receiver.front_end";

const DESIGN: &str = r#"
[source]
full_scale = "1 V"
resistance = 0
[transmitter.driver]
kind = "current-sink"
supply = "9 V"
bias = "30 mA"
slope = "20 mA/V"
sense = "10 Ω"
saturation = "0.3 V"
[transmitter.emitter]
wavelength = "940 nm"
linewidth = "45 nm"
flux = "12 mW"
at_current = "50 mA"
low_current = 0
droop_current = "0.2 A"
saturation_current = "1 pA"
ideality = 1.8
series_resistance = "1 Ω"
half_angle = "20°"
bandwidth = "inf"
thermal_resistance = 0
thermal_time = "1 ms"
flux_temperature = "-0.5 %/K"
max_current = "200 mA"
source_diameter = "1 mm"
[path]
kind = "air"
distance = "2 m"
[receiver.optics]
area = "1 cm²"
[receiver.detector]
kind = "photodiode"
area = "7 mm²"
responsivity = "0.6 A/W"
dark_current = "2 nA"
capacitance = "70 pF"
built_in = "0.6 V"
grading = 0.45
saturation_current = "0.1 nA"
ideality = 1.2
shunt_resistance = "1 GΩ"
[receiver.front_end]
kind = "transimpedance"
supply = "9 V"
reference = "4 V"
bias = "1 V"
feedback = "100 kΩ"
feedback_capacitor = "3 pF"
gbw = "5 MHz"
slew = "8 V/µs"
noise_voltage = "8 nV/√Hz"
noise_voltage_corner = "100 Hz"
noise_current = "0.4 pA/√Hz"
noise_current_corner = 0
swing_low = "0.1 V"
swing_high = "0.5 V"
output_current = "20 mA"
offset = 0
bias_current = 0
input_capacitance = "10 pF"
[output]
kind = "line"
full_scale = "1 V"
"#;

pub fn read(text: &str, sets: &[&str]) -> Result<Design, DesignError> {
    let sets: Vec<String> = sets.iter().map(|s| (*s).to_owned()).collect();
    Design::from_text("bench.toml", text, Path::new("."), &sets)
}

pub fn link_of(text: &str, sets: &[&str]) -> Link {
    let design = read(text, sets).unwrap_or_else(|e| panic!("{e:?}"));
    Link::new(&design).unwrap_or_else(|e| panic!("{e:?}"))
}

/// The bench with settings.
pub fn link(sets: &[&str]) -> Link {
    link_of(DESIGN, sets)
}

pub fn station<'a>(link: &'a Link, path: &str) -> &'a dyn Model {
    let found = link.stations().iter().find(|s| s.path() == path);
    found.map(AsRef::as_ref).unwrap_or_else(|| panic!("{path}"))
}

pub fn straight(rate: f64) -> Conditions {
    Conditions {
        curves: Curves::Straight,
        ..quiet(rate)
    }
}

/// The station's answer, taken through in blocks.
pub fn run(model: &dyn Model, conditions: &Conditions, input: &[f64]) -> Vec<f64> {
    let mut samples = input.to_vec();
    let mut runner = model.runner(conditions);
    samples.chunks_mut(1000).for_each(|b| runner.run(b, &[]));
    samples
}

pub fn tone(rate: f64, frequency: f64, peak: f64, samples: usize) -> Vec<f64> {
    (0..samples)
        .map(|n| peak * (TAU * frequency * n as f64 / rate).sin())
        .collect()
}

/// Amplitude and phase of the component at `frequency`, which has whole periods in `record`.
pub fn phasor(record: &[f64], rate: f64, frequency: f64) -> Complex64 {
    let sum: Complex64 = record
        .iter()
        .enumerate()
        .map(|(n, x)| x * Complex64::from_polar(1.0, -TAU * frequency * n as f64 / rate))
        .sum();
    sum * 2.0 / record.len() as f64
}

/// Harmonic amplitudes 1 to `count` of a run's last twentieth of a second, after `settle` seconds, for a tone of a multiple of 20 Hz.
pub fn harmonics(
    model: &dyn Model,
    conditions: &Conditions,
    frequency: f64,
    peak: f64,
    settle: f64,
    count: u32,
) -> Vec<f64> {
    let rate = conditions.rate;
    let record = (0.05 * rate) as usize;
    let whole = record + (settle * rate) as usize;
    let output = run(model, conditions, &tone(rate, frequency, peak, whole));
    (1..=count)
        .map(|k| phasor(&output[whole - record..], rate, f64::from(k) * frequency).norm())
        .collect()
}

/// Holds the runner's response to a small multitone against the transfer: within 0.1 dB and 1° to 20 kHz (a twentieth of the rate).
pub fn follows_its_transfer(name: &str, model: &dyn Model, conditions: &Conditions, peak: f64) {
    let rate = conditions.rate;
    let step = rate / 19_200.0;
    let lines = [1.0, 3.0, 8.0, 21.0, 55.0, 144.0, 377.0, 610.0, 820.0, 960.0];
    let settle = ((25.0 * model.slowest_time()).clamp(0.05, 3.0) * rate) as usize;
    let input: Vec<f64> = (0..settle + 19_200)
        .map(|n| {
            let tones = lines.iter().enumerate();
            let sum: f64 = tones
                .map(|(k, m)| (TAU * step * m * n as f64 / rate + (k * k) as f64).sin())
                .sum();
            peak / lines.len() as f64 * sum
        })
        .collect();
    let output = run(model, conditions, &input);
    for m in lines {
        let f = step * m;
        let response = phasor(&output[settle..], rate, f) / phasor(&input[settle..], rate, f);
        let ratio = response / model.transfer(f);
        let (db, degrees) = (20.0 * ratio.norm().log10(), ratio.arg().to_degrees());
        assert!(
            db.abs() < 0.1 && degrees.abs() < 1.0,
            "{name}, {:?}, {rate}: {db} dB, {degrees}° at {f} Hz",
            conditions.curves
        );
    }
}

/// Holds the runner's noise against the promised density, band by band, within four standard deviations of the record.
pub fn sounds_as_promised(name: &str, model: &dyn Model, bands: &[(f64, f64)]) {
    const SAMPLES: usize = 1 << 20;
    let analyser = Analyser::new(RATE, 1 << 14, 8.0);
    let conditions = Conditions {
        noise: true,
        seed: 7,
        ..quiet(RATE)
    };
    let record = run(model, &conditions, &vec![0.0; SAMPLES + SAMPLES / 4]);
    let spectrum = analyser.average(&record[SAMPLES / 4..]);
    for &(low, high) in bands {
        let step = (high - low) / 200.0;
        let promised: f64 = (0..200)
            .map(|k| low + step * (f64::from(k) + 0.5))
            .flat_map(|f| model.noise(f))
            .map(|share| share.density * step)
            .sum();
        let ratio = spectrum.band_power(low, high) / promised;
        let sigma = analyser.scatter(SAMPLES, high - low);
        assert!(
            (ratio - 1.0).abs() < 4.0 * sigma,
            "{name}: {ratio} of the power promised in {low} to {high} Hz, one deviation is {sigma}"
        );
    }
}

/// Steps, silence and the worst alternation leave finite numbers, and rest stays at rest.
pub fn stays_finite(name: &str, model: &dyn Model) {
    for curves in [Curves::Bent, Curves::Straight] {
        for cold in [false, true] {
            for peak in [0.0, 1e6, -1e6, 1e-300] {
                let conditions = Conditions {
                    noise: peak != 0.0,
                    curves,
                    cold,
                    ..quiet(RATE)
                };
                let input: Vec<f64> = (0..3000)
                    .map(|n| match n / 1000 {
                        0 => peak,
                        1 => 0.0,
                        _ if n % 2 == 0 => peak,
                        _ => -peak,
                    })
                    .collect();
                let output = run(model, &conditions, &input);
                let what = format!("{name}, {curves:?}, cold {cold}, {peak}");
                assert!(output.iter().all(|x| x.is_finite()), "{what}");
                let still = peak == 0.0 && !cold;
                assert!(!still || output.iter().all(|x| x.abs() < 1e-9), "{what}");
            }
        }
    }
}

/// One run is the same in blocks of any size.
pub fn blocks_do_not_matter(model: &dyn Model, input: &[f64]) {
    let conditions = Conditions {
        noise: true,
        ..quiet(RATE)
    };
    let whole = run(model, &conditions, input);
    for size in [1, 7] {
        let mut samples = input.to_vec();
        let mut runner = model.runner(&conditions);
        samples.chunks_mut(size).for_each(|b| runner.run(b, &[]));
        assert!(
            whole
                .iter()
                .zip(&samples)
                .all(|(a, b)| a.to_bits() == b.to_bits())
        );
    }
}
