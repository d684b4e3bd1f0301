//! The loops in time against independent integrations of the same equations (tests/golden: make_servos.py and its CSVs).
//!
//! Every case runs at the file's rate and at four times it, from the same analytic input. What remains is the rule's own error:
//! that of TR-BDF2, (3γ² − 4γ + 2)/(12(2 − γ)) = 0.04 times (ωh)² of each line (Bank et al. 1985), where the heat's start-of-sample lag is smaller.

use super::*;

struct Golden {
    names: Vec<String>,
    rows: Vec<Vec<f64>>,
}

impl Golden {
    fn read(name: &str) -> Self {
        let path = format!("{}/tests/golden/{name}.csv", env!("CARGO_MANIFEST_DIR"));
        let text = std::fs::read_to_string(path).unwrap();
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

    /// A column away from its rest.
    fn column(&self, name: &str) -> Vec<f64> {
        let at = self.names.iter().position(|n| n == name).unwrap();
        self.rows.iter().map(|r| r[at] - self.rows[0][at]).collect()
    }

    fn rest(&self, name: &str) -> f64 {
        self.rows[0][self.names.iter().position(|n| n == name).unwrap()]
    }
}

/// The files' smooth start and tones, (level, Hz).
fn drive(parts: &[(f64, f64)], t: f64) -> f64 {
    let start = 0.5e-3;
    let s = if t < start {
        0.5 - 0.5 * (TAU / 2.0 * t / start).cos()
    } else {
        1.0
    };
    let sum: f64 = parts.iter().map(|(a, f)| a * (TAU * f * t).sin()).sum();
    s * sum
}

/// Largest error over the swing of the column, at `times` the file's rate.
fn error(
    golden: &Golden,
    column: &str,
    model: &dyn Model,
    parts: &[(f64, f64)],
    times: usize,
) -> f64 {
    let expected = golden.column(column);
    let rate = RATE * times as f64;
    let input: Vec<f64> = (0..(expected.len() - 1) * times + 1)
        .map(|n| drive(parts, n as f64 / rate))
        .collect();
    let output = run(model, &quiet(rate), &input);
    let swing = expected.iter().fold(0.0f64, |m, x| m.max(x.abs()));
    let errors = output.iter().step_by(times).zip(&expected);
    errors.map(|(y, x)| (y - x).abs()).fold(0.0, f64::max) / swing
}

#[test]
fn monitor_loop_against_an_independent_integration() {
    for (file, servo, parts) in [
        (
            "monitor_loop",
            "{ bandwidth = \"100 kHz\", gain = 20 }",
            [(0.6, 1000.0), (0.5, 3700.0)],
        ),
        (
            "monitor_loop_slow",
            "{ bandwidth = \"2 kHz\", gain = 30 }",
            [(0.7, 1000.0), (0.4, 3700.0)],
        ),
    ] {
        let golden = Golden::read(file);
        let servo = format!("transmitter.driver.servo={servo}");
        let link = link(&[
            "transmitter.emitter.low_current=1 mA",
            "transmitter.emitter.bandwidth=800 kHz",
            "transmitter.emitter.thermal_resistance=300 K/W",
            &servo,
        ]);
        let head = station(&link, HEAD);
        assert!((reading(head, "flux") / golden.rest("P_W") - 1.0).abs() < 1e-12);
        assert!((reading(head, "junction heating") / golden.rest("dT_K") - 1.0).abs() < 1e-12);
        let rule: f64 = parts
            .iter()
            .map(|(a, f)| 0.04 * a * (TAU * f / RATE).powi(2))
            .sum();
        // A sample's warming by way of the flux's temperature, and what the loop leaves of it.
        let warming = golden
            .column("dT_K")
            .windows(2)
            .fold(0.0f64, |m, w| m.max((w[1] - w[0]).abs()));
        let allowed = rule + warming * 0.005 / 4.0;
        let (coarse, fine) = (
            error(&golden, "P_W", head, &parts, 1),
            error(&golden, "P_W", head, &parts, 4),
        );
        assert!(
            coarse < allowed && fine < coarse / 3.5,
            "{file}: {coarse:e} and {fine:e}, allowed {allowed:e}"
        );
    }
}

#[test]
fn ambient_servo_against_an_independent_integration() {
    let golden = Golden::read("ambient_servo");
    // All capacitance ungraded and half the amplifier's; no diode; the light at rest set as the ambient's.
    let text = DESIGN.replace(
        "[receiver.optics]",
        "[[ambient]]\nkind = \"steady\"\nphotocurrent = \"20 µA\"\n[receiver.optics]",
    );
    let link = link_of(
        &text,
        &[
            "path.distance=1e9",
            "receiver.detector.responsivity=1",
            "receiver.detector.grading=0",
            "receiver.detector.capacitance=40 pF",
            "receiver.detector.dark_current=0",
            "receiver.detector.saturation_current=1e-30",
            "receiver.detector.shunt_resistance=inf",
            "receiver.front_end.input_capacitance=40 pF",
            "receiver.front_end.servo_resistor=47 kΩ",
            "receiver.front_end.ambient_servo=2 kHz",
            "receiver.front_end.gbw=2 MHz",
            "receiver.front_end.slew=1 V/µs",
        ],
    );
    let front = station(&link, FRONT);
    assert!(
        (reading(front, "ambient servo, current") * 47e3 / golden.rest("z_V") - 1.0).abs() < 1e-9
    );
    let parts = [(6e-6, 1000.0), (4e-6, 9000.0)];
    // Against the current's slope the light's midway value from three samples errs by 0.26·(ωh)² (see `tr_bdf2::midway_of_four`);
    // the servo's part of the signal, f_s/f, feels it.
    let line =
        |share: f64, f: f64| share * (TAU * f / RATE).powi(2) * (0.04 + 0.26 * 2e3 / f.hypot(2e3));
    let allowed = line(0.6, 1000.0) + line(0.4, 9000.0);
    let (coarse, fine) = (
        error(&golden, "y_V", front, &parts, 1),
        error(&golden, "y_V", front, &parts, 4),
    );
    assert!(
        coarse < allowed && fine < coarse / 8.0,
        "{coarse:e} and {fine:e}, allowed {allowed:e}"
    );
}
