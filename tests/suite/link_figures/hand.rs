//! Gain, distortion, noise and band edges by hand.

use std::f64::consts::SQRT_2;

use super::{close, db, measured};
use crate::bench::{Draft, IDEAL_OPAMP};
use harklight::physics::constants::thermal_voltage;

/// 600 Ω into a pot of 10 kΩ at half, 4 mA/V, 0.5 mW/mA, 30° half angle over 2 m onto 1 cm², 0.6 A/W, 470 kΩ, then ×3.2 inverting.
#[test]
fn gain_is_the_product_of_the_way() {
    let draft = Draft::ideal()
        .transmitter("[[transmitter.stage]]\nkind = \"trim\"\nresistance = \"10 kΩ\"\nwiper = 0.5\n")
        .set("source.resistance=600 Ω")
        .set("transmitter.driver.slope=4 mA/V")
        .set("transmitter.emitter.flux=5 mW")
        .set("transmitter.emitter.half_angle=30°")
        .set("path.distance=2 m")
        .set("receiver.optics.area=1 cm²")
        .set("receiver.detector.responsivity=0.6 A/W")
        .set("receiver.front_end.feedback=470 kΩ")
        .receiver(&format!(
            "[[receiver.stage]]\nkind = \"opamp\"\nconnection = \"inverting\"\nfeedback = \"32 kΩ\"\nground = \"10 kΩ\"\n{IDEAL_OPAMP}"
        ));
    // Order for 30° half angle: 4.81884 (Kahn and Barry's formula).
    let capture = 5.81884 * 1e-4 / (2.0 * std::f64::consts::PI * 4.0);
    let gain = 5e3 / 10.6e3 * 4e-3 * 0.5 * capture * 0.6 * 470e3 * 3.2;
    let link = draft.link();
    let figures = measured(&link, -6.0).figures;
    close(figures.gain_db, db(gain), 2e-5);
    let tone = 10f64.powf(-6.0 / 20.0) / SQRT_2;
    close(figures.signal_rms_v, tone * gain, 1e-5 * tone * gain);
}

/// A bare junction under x = 1: THD 0.243424 over the fundamental (Clarke and Hess), which over the total is THD/√(1 + THD²).
#[test]
fn distortion_by_its_definitions() {
    let link = Draft::ideal()
        .driver("kind = \"series-resistor\"\nsupply = \"0.45 V\"\nresistor = 0\n")
        .set(format!("source.full_scale={} V", thermal_voltage(293.15)))
        .set("silence=[\"receiver.detector.shot\", \"receiver.front_end.feedback\"]")
        .link();
    let figures = measured(&link, 0.0).figures;
    let thd = 0.243424;
    close(figures.thd_percent, 100.0 * thd, 1e-4);
    close(figures.thd_db, db(thd), 1e-4);
    let over_total = thd / f64::hypot(1.0, thd);
    close(figures.thd_n_percent, 100.0 * over_total, 1e-4);
    close(figures.sinad_db, -db(over_total), 1e-4);
}

/// With every station ideal nothing is left above the method's floor, and the figure says so.
#[test]
fn an_ideal_link_reads_below_the_floor() {
    let link = Draft::ideal()
        .set("silence=[\"receiver.detector.shot\", \"receiver.front_end.feedback\"]")
        .link();
    let figures = measured(&link, -6.0).figures;
    close(figures.gain_db, -20.0, 1e-7);
    for key in ["thd_percent", "thd_db"] {
        assert!(
            figures.below_floor.iter().any(|k| k == key),
            "{:?}",
            figures.thd_db
        );
    }
}

/// 3 µV/√Hz before a gain of 0.1: 3 µV·√19980 Hz/10 at the output, and 2.04827 dB less under the A weighting (integral of the
/// weighting of IEC 61672-1 over 20 Hz to 20 kHz).
#[test]
fn noise_of_a_known_density() {
    let link = Draft::ideal()
        .set("source.noise=3 µV/√Hz")
        .set("silence=[\"receiver.detector.shot\", \"receiver.front_end.feedback\"]")
        .link();
    let found = measured(&link, -6.0);
    let noise = 0.1 * 3e-6 * 19_980f64.sqrt();
    let scatter = 4.0 * found.noise_scatter_db.unwrap();
    close(
        Some(db(found.figures.noise_rms_v.unwrap() / noise)),
        0.0,
        scatter,
    );
    let snr = db(found.figures.signal_rms_v.unwrap() / noise);
    close(found.figures.snr_db, snr, scatter);
    // Half the band carries the weighted noise: its scatter is larger by about √2.
    close(found.figures.snr_a_db, snr + 2.04827, 1.5 * scatter);
}

/// One coupling capacitor and one amplifier: 33.8628 Hz (47 kΩ, 100 nF) and 3 MHz/101 = 29 703.0 Hz.
#[test]
fn band_edges_are_the_corners() {
    let link = Draft::ideal()
        .receiver(&format!(
            "[[receiver.stage]]\nname = \"amp\"\nkind = \"opamp\"\nconnection = \"non-inverting\"\nfeedback = \"100 kΩ\"\nground = \"1 kΩ\"\n{IDEAL_OPAMP}\
             [[receiver.stage]]\nkind = \"coupling\"\ncapacitor = \"100 nF\"\n"
        ))
        .set("receiver.stage.amp.gbw=3 MHz")
        .set("output.impedance=47 kΩ")
        .link();
    let figures = measured(&link, -60.0).figures;
    // Each corner lowers the peak that the other is measured from: (1 + l²/f²)(1 + f²/h²) = 2(1 + l/h)², a quadratic in f².
    let (low, high) = (33.8628f64, 29_703.0f64);
    let half = (1.0 + low / high).powi(2) * high * high - (low * low + high * high) / 2.0;
    let root = (half * half - (low * high).powi(2)).sqrt();
    close(figures.band_low_hz, (half - root).sqrt(), 1e-4);
    close(figures.band_high_hz, (half + root).sqrt(), 0.1);
}
