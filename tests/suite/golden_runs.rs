//! Stations in time against independent integrations of the same equations (tests/golden: make_golden.py and its CSVs).
//!
//! Every case runs at the file's rate and at four times it, from the same analytic input. What remains is the rule's own error: the
//! tolerance at 384 kHz follows from the rule's order and error constant, as a share of the column's swing, and the finer run must be
//! better by what the order promises.

use std::f64::consts::{PI, TAU};

use crate::bench::{Draft, IDEAL_OPAMP, distortion, quiet, reading, run, station, tone};
use harklight::physics::constants::{ELEMENTARY_CHARGE, LIGHT_SPEED, PLANCK, thermal_voltage};
use harklight::physics::diode::forward_voltage;

const RATE: f64 = 384_000.0;
const TEMPERATURE: f64 = 293.15;

/// The rows of a golden file: columns by name.
struct Golden {
    names: Vec<String>,
    rows: Vec<Vec<f64>>,
}

impl Golden {
    fn read(name: &str) -> Self {
        let path = format!("{}/tests/golden/{name}.csv", env!("CARGO_MANIFEST_DIR"));
        let text = std::fs::read_to_string(&path).unwrap();
        let mut lines = text.lines().filter(|l| !l.starts_with('#'));
        let names = lines
            .next()
            .unwrap()
            .split(',')
            .map(str::to_owned)
            .collect();
        let rows = lines
            .map(|l| l.split(',').map(|x| x.parse().unwrap()).collect())
            .collect();
        Self { names, rows }
    }

    fn column(&self, name: &str) -> Vec<f64> {
        let at = self.names.iter().position(|n| n == name).unwrap();
        self.rows.iter().map(|r| r[at]).collect()
    }

    fn rest(&self, name: &str) -> f64 {
        self.column(name)[0]
    }
}

/// The drive of every file: sines (level, Hz) under the smooth start of half a millisecond.
fn drive(parts: &[(f64, f64)], t: f64) -> f64 {
    let start = 0.5e-3;
    let s = if t < start {
        0.5 - 0.5 * (PI * t / start).cos()
    } else {
        1.0
    };
    s * parts
        .iter()
        .map(|(a, f)| a * (TAU * f * t).sin())
        .sum::<f64>()
}

/// Largest error of the stations at `paths` in a row, over the swing of the golden column, at `times` the file's rate.
fn error(
    golden: &Golden,
    column: &str,
    draft: &Draft,
    paths: &[&str],
    parts: &[(f64, f64)],
    times: usize,
) -> f64 {
    let link = draft.link();
    let rate = RATE * times as f64;
    let expected = golden.column(column);
    let mut block: Vec<f64> = (0..(expected.len() - 1) * times + 1)
        .map(|n| drive(parts, n as f64 / rate))
        .collect();
    for path in paths {
        station(&link, path)
            .runner(&quiet(rate))
            .run(&mut block, &[]);
    }
    let rest = expected[0];
    let swing = expected.iter().fold(0.0f64, |m, x| m.max((x - rest).abs()));
    let worst = block
        .iter()
        .step_by(times)
        .zip(&expected)
        .map(|(y, x)| (y - (x - rest)).abs())
        .fold(0.0, f64::max);
    worst / swing
}

fn compare(
    file: &str,
    column: &str,
    draft: &Draft,
    paths: &[&str],
    parts: &[(f64, f64)],
    (tolerance, gain): (f64, f64),
) {
    let golden = Golden::read(file);
    let coarse = error(&golden, column, draft, paths, parts, 1);
    let fine = error(&golden, column, draft, paths, parts, 4);
    let figures = format!("{file} {column}: {coarse:.3e}, at four times the rate {fine:.3e}");
    assert!(coarse < tolerance, "{figures}, allowed {tolerance:.3e}");
    assert!(fine < coarse / gain, "{figures}, allowed a {gain}th");
}

/// Error that TR-BDF2 leaves on sines of these shares of the swing and frequencies: (3γ² − 4γ + 2)/(12(2 − γ)) = 0.04 times (ωh)²
/// each (Bank et al. 1985), and what four times the rate must gain: 16 in the limit, 8 asked for.
fn second_order(parts: &[(f64, f64)]) -> (f64, f64) {
    let sum = |p: &(f64, f64)| 0.04 * p.0 * (TAU * p.1 / RATE).powi(2);
    (parts.iter().map(sum).sum(), 8.0)
}

/// Error that the third-order Adams–Moulton rule leaves: 1/24·(nωh)³ of each harmonic n. `odd` harmonics of 1/n² (the triangle that
/// slewing makes of a sine) are reckoned with. Four times the rate gains 64 in the limit; half of that is asked for.
fn third_order(frequency: f64, odd: u32) -> (f64, f64) {
    let harmonics: f64 = (0..odd).map(|k| f64::from(2 * k + 1)).sum();
    ((TAU * frequency / RATE).powi(3) / 24.0 * harmonics, 32.0)
}

fn near(a: f64, b: f64, relative: f64) {
    assert!((a / b - 1.0).abs() < relative, "{a} against {b}");
}

/// The design states the drift of the forward voltage through the band gap of its wavelength, the file as −1.6 mV/K: the wavelength
/// is chosen so that both say the same.
fn led(golden: &Golden) -> Draft {
    let vt = thermal_voltage(TEMPERATURE);
    let junction = forward_voltage(golden.rest("i_A"), 1.8 * vt, 1e-12, 0.0);
    let gap = junction - 3.0 * vt + 1.6e-3 * TEMPERATURE;
    let wavelength = PLANCK * LIGHT_SPEED / (ELEMENTARY_CHARGE * gap);
    Draft::ideal()
        .set("source.resistance=20 Ω")
        .driver("kind = \"series-resistor\"\nsupply = \"5 V\"\nresistor = \"180 Ω\"\n")
        .emitter(&format!(
            r#"wavelength = {wavelength:e}
linewidth = 0
flux = "12 mW"
at_current = "50 mA"
low_current = "1 mA"
droop_current = "0.4 A"
saturation_current = "1e-12 A"
ideality = 1.8
series_resistance = "1 Ω"
half_angle = "60°"
bandwidth = "200 kHz"
thermal_resistance = "350 K/W"
thermal_time = "2 ms"
flux_temperature = "-0.5 %/K"
max_current = "inf"
"#
        ))
}

/// The Runner takes the junction's heat at the start of a sample: an error of one sample's warming, by way of the flux's and the forward
/// voltage's temperature. Of order one, so four times the rate gains 4; and beside it the carriers' pole of order three.
fn heat_lag(golden: &Golden) -> (f64, f64) {
    let swing = |name: &str| {
        let rest = golden.rest(name);
        let all = golden.column(name);
        all.iter().fold(0.0f64, |m, x| m.max((x - rest).abs()))
    };
    let heat = golden.column("dT_K");
    let warming = heat
        .windows(2)
        .fold(0.0f64, |m, w| m.max((w[1] - w[0]).abs()));
    let by_flux = 0.005 * (golden.rest("P_W") + swing("P_W")) / swing("P_W");
    let by_voltage = 1.6e-3 / swing("v_V");
    let (pole, _) = third_order(3700.0, 1);
    (warming * (by_flux + by_voltage) + pole, 3.5)
}

#[test]
fn led_with_a_series_resistor() {
    for (file, parts) in [
        ("led_resistor", [(1.0, 1000.0), (1.2, 3700.0)]),
        ("led_resistor_cutoff", [(2.06, 1000.0), (2.44, 3700.0)]),
    ] {
        let golden = Golden::read(file);
        let draft = led(&golden);
        let link = draft.link();
        let head = station(&link, "transmitter.emitter");
        near(reading(head, "bias current"), golden.rest("i_A"), 1e-12);
        near(
            reading(head, "junction heating"),
            golden.rest("dT_K"),
            1e-12,
        );
        near(reading(head, "flux"), golden.rest("P_W"), 1e-12);
        let allowed = heat_lag(&golden);
        compare(
            file,
            "P_W",
            &draft,
            &["transmitter.emitter"],
            &parts,
            allowed,
        );
    }
}

#[test]
fn photodiode_into_a_load_with_a_coupling_behind() {
    for (file, rest, swing) in [
        ("photodiode_load_gentle", 2e-6, 0.5e-6),
        ("photodiode_load", 4.2e-6, 3.8e-6),
    ] {
        let golden = Golden::read(file);
        let draft = Draft::ideal()
            .set(format!("transmitter.emitter.flux={rest}"))
            .detector(
                r#"kind = "photodiode"
area = "1 cm²"
responsivity = "1 A/W"
dark_current = "2 nA"
capacitance = "70 pF"
built_in = "0.6 V"
grading = 0.45
saturation_current = "0.1 nA"
ideality = 1.2
shunt_resistance = "1 GΩ"
"#,
            )
            .front_end(
                "kind = \"load\"\nsupply = \"5 V\"\nload = \"1 MΩ\"\ncapacitance = \"5 pF\"\n",
            )
            .receiver("[[receiver.stage]]\nkind = \"coupling\"\ncapacitor = \"10 nF\"\n")
            .set("output.impedance=470 kΩ");
        let link = draft.link();
        let front = station(&link, "receiver.front_end");
        near(reading(front, "output"), golden.rest("v_V"), 1e-9);
        let parts = [(0.7 * swing, 1000.0), (0.3 * swing, 5200.0)];
        let allowed = second_order(&[(0.7, 1000.0), (0.3, 5200.0)]);
        let node = ["receiver.front_end"];
        compare(file, "v_V", &draft, &node, &parts, allowed);
        let behind = ["receiver.front_end", "receiver.stage.1"];
        compare(file, "v_n_V", &draft, &behind, &parts, allowed);
    }
}

/// Half of the input's capacitance is the detector's (ungraded), half the amplifier's.
fn transimpedance(ohms: f64, total: f64, across: f64, gbw: f64, slew: f64) -> Draft {
    let half = total / 2.0;
    Draft::ideal()
        .set("receiver.detector.grading=0")
        .set(format!("receiver.detector.capacitance={half:e}"))
        .set(format!("receiver.front_end.input_capacitance={half:e}"))
        .set(format!("receiver.front_end.feedback={ohms}"))
        .set(format!("receiver.front_end.feedback_capacitor={across:e}"))
        .set(format!("receiver.front_end.gbw={gbw}"))
        .set(format!("receiver.front_end.slew={slew}"))
}

#[test]
fn transimpedance_amplifier() {
    let draft = transimpedance(100e3, 100e-12, 2e-12, 5e6, 8e6);
    let parts = [(3.6e-6, 1000.0), (2.4e-6, 17_000.0)];
    let front = ["receiver.front_end"];
    let golden = Golden::read("transimpedance");
    let link = draft.link();
    let rest = reading(station(&link, front[0]), "output");
    near(rest, golden.rest("y_V"), 1e-9);
    let allowed = second_order(&[(0.6, 1000.0), (0.4, 17_000.0)]);
    compare("transimpedance", "y_V", &draft, &front, &parts, allowed);
}

/// Here the input pair flips from one end of its slope to the other within a tenth of a sample. The rule knows that moment to half a
/// sample, during which the rate is wrong by twice the slew rate: an error of order one, of what the slew rate moves in a sample.
#[test]
fn transimpedance_amplifier_that_slews_all_the_time() {
    let draft = transimpedance(220e3, 120e-12, 3e-12, 1e6, 0.05e6);
    let golden = Golden::read("transimpedance_slew");
    let (rest, column) = (golden.rest("y_V"), golden.column("y_V"));
    let swing = column.iter().fold(0.0f64, |m, y| m.max((y - rest).abs()));
    let allowed = (0.05e6 / RATE / swing, 3.5);
    let front = ["receiver.front_end"];
    compare(
        "transimpedance_slew",
        "y_V",
        &draft,
        &front,
        &[(9e-6, 9000.0)],
        allowed,
    );
}

/// What that error does to the figures: the harmonics of the settled tone at 384 kHz against those at sixteen times the rate, where the
/// error is a sixteenth. Waves that turn within a sample lose a few per cent of their high harmonics, the THD under one per cent.
#[test]
fn slewing_reads_the_same_distortion_at_a_finer_rate() {
    let link = transimpedance(220e3, 120e-12, 3e-12, 1e6, 0.05e6).link();
    let found = [1.0, 16.0].map(|times| {
        let rate = times * RATE;
        let samples = (0.01 * rate) as usize;
        let input = tone(rate, 9000.0, 9e-6, 2 * samples);
        let output = run(station(&link, "receiver.front_end"), &quiet(rate), &input);
        distortion(&output[samples..], rate, 9000.0, 100e3)
    });
    near(found[0].fundamental, found[1].fundamental, 1e-3);
    near(found[0].thd(), found[1].thd(), 1e-2);
}

#[test]
fn opamp_stage() {
    let draft = Draft::ideal()
        .transmitter(&format!(
            "[[transmitter.stage]]\nkind = \"opamp\"\nconnection = \"non-inverting\"\nfeedback = \"100 kΩ\"\n\
             ground = \"10 kΩ\"\nsupply = [\"-100 V\", \"100 V\"]\n{IDEAL_OPAMP}"
        ))
        .set("transmitter.stage.1.gbw=1 MHz")
        .set("transmitter.stage.1.slew=0.5 V/µs");
    let path = ["transmitter.stage.1"];
    let run = |file, level, harmonics| {
        let allowed = third_order(15_000.0, harmonics);
        compare(file, "v_V", &draft, &path, &[(level, 15_000.0)], allowed);
    };
    run("opamp_stage", 0.35, 2);
    run("opamp_stage_slew", 0.6, 4);
}
