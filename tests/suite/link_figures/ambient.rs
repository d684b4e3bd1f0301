//! The four things that ambient light does: it shifts the operating point, adds shot noise, adds hum, and eats headroom.

use std::f64::consts::SQRT_2;

use super::{close, db, measured};
use crate::bench::{Draft, reading, station};
use harklight::physics::constants::ELEMENTARY_CHARGE;

const HEAD: &str = "receiver.front_end";

/// 10 µA of signal light and 100 kΩ on rails of 0 and 9 V, reference 1 V: at rest 2 V, 7 V of room above.
fn receiver(lamp: &str) -> Draft {
    Draft::ideal()
        .set("receiver.front_end.supply=9 V")
        .set("receiver.front_end.reference=1 V")
        .with(lamp)
}

fn steady(amperes: f64) -> String {
    format!("[[ambient]]\nkind = \"steady\"\nphotocurrent = {amperes:e}\n")
}

#[test]
fn it_shifts_the_operating_point_by_the_feedback_resistor() {
    let rest = |lamps: &str| reading(station(&receiver(lamps).link(), HEAD), "output");
    let dark = rest("");
    assert!((dark - 2.0).abs() < 1e-12);
    for current in [1e-6, 20e-6] {
        assert!((rest(&steady(current)) - dark - 100e3 * current).abs() < 1e-12);
        // Two lamps add.
        assert!((rest(&steady(current).repeat(2)) - dark - 200e3 * current).abs() < 1e-12);
    }
}

/// By irradiance: 0.1 W/m² on 4 m² (the base design's collecting area) through a filter of 0.5, 1 A/W.
#[test]
fn irradiance_becomes_current_through_the_optics() {
    let lamp = "[[ambient]]\nkind = \"steady\"\nirradiance = \"20 µW/m²\"\n";
    let link = receiver(lamp)
        .set(
            "receiver.optics.filter={ centre = \"940 nm\", width = \"50 nm\", transmission = 0.5 }",
        )
        .link();
    let current = reading(station(&link, HEAD), "ambient photocurrent");
    assert!((current - 20e-6 * 4.0 * 0.5).abs() < 1e-18);
}

#[test]
fn it_adds_shot_noise() {
    let noise = |lamps: &str| {
        let draft = receiver(lamps).set("silence=[\"receiver.front_end.feedback\"]");
        let found = measured(&draft.link(), -20.0);
        (
            found.figures.noise_rms_v.unwrap(),
            found.noise_scatter_db.unwrap(),
        )
    };
    for (lamps, current) in [(String::new(), 10e-6), (steady(40e-6), 50e-6)] {
        let (volts, scatter) = noise(&lamps);
        let expected = 100e3 * (2.0 * ELEMENTARY_CHARGE * current * 19_980.0).sqrt();
        close(Some(db(volts / expected)), 0.0, 4.0 * scatter);
    }
}

/// Modulation depth 8 % of 20 µA: 1.6 µA peak at 100 Hz (120 Hz), 160 mV at the output.
#[test]
fn it_hums() {
    for (mains, ripple) in [(50, 0.08), (60, 0.15)] {
        let lamp = format!(
            "[[ambient]]\nkind = \"incandescent\"\nphotocurrent = \"20 µA\"\nripple = {ripple}\nmains = {mains}\n"
        );
        let link = receiver(&lamp).link();
        let figures = measured(&link, -6.0).figures;
        let hum = 100e3 * 20e-6 * ripple / SQRT_2;
        let signal = 0.1 * 10f64.powf(-0.3) / SQRT_2;
        close(figures.hum_db, db(hum / signal), 1e-4);
        // The idle noise holds the hum: 160 mV against microvolts of shot noise.
        close(figures.noise_rms_v, hum, 1e-3 * hum);
        let silent = receiver(&lamp).set("silence=[\"ambient.1.hum\"]").link();
        let figures = measured(&silent, -6.0).figures;
        assert!(figures.noise_rms_v.unwrap() < 1e-3 * hum);
    }
}

/// 100 mV of signal at full scale in a room of 7 V, of which the lamp takes 100 kΩ times its current.
#[test]
fn it_eats_headroom_until_the_receiver_clips() {
    let figures = |ambient: f64| {
        let link = receiver(&steady(ambient)).link();
        (measured(&link, 0.0), link)
    };
    // 0.8 V of room above: 18.06 dB over 100 mV, less the search's 0.05 dB (the emitter goes dark at 19.9 dB only).
    let (bright, _) = figures(62e-6);
    close(bright.figures.headroom_db, db(8.0), 0.06);
    let (brighter, _) = figures(69.5e-6);
    close(brighter.figures.headroom_db, db(0.5), 0.06);
    assert!(brighter.figures.thd_percent.unwrap() > 1.0);
    let clipped = brighter.events.iter().find(|e| e.path == HEAD).unwrap();
    assert!(clipped.events.clipped > 0);
    assert!(bright.figures.thd_percent.unwrap() < 1e-4);
    // Clipped on one side at half its peak: THD 0.194648 (Clarke and Hess), inside 20 kHz.
    close(brighter.figures.thd_percent, 19.4648, 0.02);
    // Beyond the rail nothing passes, and the design says so.
    let (blind, link) = figures(75e-6);
    assert!(
        link.warnings()
            .iter()
            .any(|w| w.contains("no small signal passes"))
    );
    assert!(blind.figures.gain_db.is_none_or(|g| g < -60.0));
    assert!(link.transfer(1000.0).norm() == 0.0);
}
