//! The transimpedance amplifier with a one-pole op-amp (Graeme 1996; formulas from memory, values computed): quality, half-power
//! frequency, noise bandwidth NEB = ω_n·Q/4 and the noise that each cause leaves in all, at 300 K.

use std::f64::consts::FRAC_1_SQRT_2;

use super::{integral, near, share};
use crate::bench::{Draft, quiet, reading, station};
use harklight::signal::spectrum::Analyser;
use harklight::station::Conditions;

const PATH: &str = "receiver.front_end";

/// R_f Ω, C_in F, GBW Hz, e_n V/√Hz, I_dc A, C_f F.
struct Row {
    values: [f64; 6],
    quality: f64,
    corner: f64,
    bandwidth: f64,
    /// Of e_n, R_f and the shot noise, V rms.
    noise: [f64; 3],
}

const ROWS: [Row; 4] = [
    Row {
        values: [1e6, 100e-12, 10e6, 10e-9, 1e-6, 1.26157e-12],
        quality: 0.993751,
        corner: 159_021.0,
        bandwidth: 195_698.0,
        noise: [3.52890e-4, 5.69410e-5, 2.50416e-4],
    },
    Row {
        values: [1e6, 100e-12, 10e6, 10e-9, 1e-6, 1.78405e-12],
        quality: FRAC_1_SQRT_2,
        corner: 125_046.0,
        bandwidth: 138_891.0,
        noise: [2.98058e-4, 4.79700e-5, 2.10964e-4],
    },
    Row {
        values: [1e6, 100e-12, 10e6, 10e-9, 1e-6, 2.53905e-12],
        quality: 0.5,
        corner: 80_182.1,
        bandwidth: 97_848.8,
        noise: [2.51100e-4, 4.02634e-5, 1.77071e-4],
    },
    Row {
        values: [100e3, 70e-12, 3e6, 18e-9, 10e-6, 8.60179e-12],
        quality: FRAC_1_SQRT_2,
        corner: 246_465.0,
        bandwidth: 273_753.0,
        noise: [1.15022e-4, 2.12967e-5, 9.36591e-5],
    },
];

fn draft(row: &Row) -> Draft {
    let [feedback, input, gbw, voltage, current, across] = row.values;
    Draft::ideal()
        .set("temperature=300 K")
        .set(format!("transmitter.emitter.flux={current:e}"))
        .set(format!("{PATH}.feedback={feedback}"))
        .set(format!("{PATH}.input_capacitance={input:e}"))
        .set(format!("{PATH}.gbw={gbw}"))
        .set(format!("{PATH}.noise_voltage={voltage:e}"))
        .set(format!("{PATH}.feedback_capacitor={across:e}"))
}

#[test]
fn quality_corner_and_noise_bandwidth() {
    for row in &ROWS {
        let link = draft(row).link();
        let head = station(&link, PATH);
        let level = |f: f64| head.transfer(f).norm() / row.values[0];
        near(reading(head, "loop quality"), row.quality, 5e-6);
        near(level(row.corner), 0.5f64.sqrt(), 1e-5);
        near(integral(|f| level(f).powi(2)), row.bandwidth, 1e-5);
        let causes = [".voltage_noise", ".feedback", ".shot"];
        for (cause, volts) in causes.iter().zip(row.noise) {
            near(integral(|f| share(head, cause, f)).sqrt(), volts, 1e-5);
        }
    }
}

/// The noise gain at the top end, (C_in + C_f)/C_f = 57.0521 for the second row, before the op-amp's own pole takes it down.
#[test]
fn noise_gain_rises_to_the_ratio_of_capacitances() {
    let link = draft(&ROWS[1]).set(format!("{PATH}.gbw=1e18")).link();
    let head = station(&link, PATH);
    let gain = share(head, ".voltage_noise", 1e9).sqrt() / 10e-9;
    near(gain, 57.0521, 1e-5);
}

/// The same in time, at 20 MHz, up to a twentieth of that: power against the integral of the densities, within four deviations of what
/// the record leaves.
#[test]
fn noise_in_time() {
    let (rate, samples) = (20e6, 1 << 20);
    let analyser = Analyser::new(rate, 1 << 14, 8.0);
    for row in &ROWS[..3] {
        let link = draft(row).link();
        let head = station(&link, PATH);
        let conditions = Conditions {
            noise: true,
            seed: 7,
            ..quiet(rate)
        };
        let mut record = vec![0.0; samples + 4096];
        head.runner(&conditions).run(&mut record, &[]);
        let spectrum = analyser.average(&record[4096..]);
        for (low, high) in [(10e3, 50e3), (50e3, 150e3), (150e3, 400e3), (400e3, 1e6)] {
            let step = (high - low) / 400.0;
            let expected: f64 = (0..400)
                .map(|k| low + (f64::from(k) + 0.5) * step)
                .flat_map(|f| head.noise(f))
                .map(|s| s.density * step)
                .sum();
            let ratio = spectrum.band_power(low, high) / expected;
            let sigma = analyser.scatter(samples, high - low);
            assert!(
                (ratio - 1.0).abs() < 4.0 * sigma,
                "{low} to {high} Hz: {ratio}, {sigma}"
            );
        }
    }
}
