//! Johnson, shot and amplifier noise (Johnson 1928, Nyquist 1928; Schottky 1918), as densities, integrated, and through a whole link that
//! is measured.

use super::{integral, near, share};
use crate::bench::{Draft, IDEAL_OPAMP, station};
use harklight::render::test_signals::{Bench, Measured, measure};

/// A link under the tone at full scale, 20 Hz to 20 kHz.
fn measured(draft: &Draft, seed: u64) -> Measured {
    let bench = Bench {
        tone: 1000.0,
        level: 0.0,
        band: (20.0, 20e3),
    };
    measure(&draft.link(), &bench, seed)
}

/// 10 lg of the textbook's 20 kHz over the 19.98 kHz that are measured.
const BAND_DB: f64 = 4.345e-3;

/// 4kTR at 300 K: 1 kΩ 4.07035, 10 kΩ 12.8716, 1 MΩ 128.716 nV/√Hz, as the load of the receive head and as its only noise.
#[test]
fn johnson_noise_of_a_load() {
    for (ohms, density) in [
        ("1 kΩ", 4.07035e-9),
        ("10 kΩ", 12.8716e-9),
        ("1 MΩ", 128.716e-9),
    ] {
        let draft = Draft::ideal()
            .front_end(&format!(
                "kind = \"load\"\nsupply = \"1 MV\"\nload = \"{ohms}\"\n"
            ))
            .set("temperature=300 K")
            .set("silence=[\"receiver.detector.shot\"]");
        let link = draft.link();
        near(
            share(station(&link, "receiver.front_end"), ".load", 1e3).sqrt(),
            density,
            2e-6,
        );
        let found = measured(&draft, 3);
        let expected = density * 19_980f64.sqrt();
        let off = 20.0 * (found.figures.noise_rms_v.unwrap() / expected).log10();
        let scatter = found.noise_scatter_db.unwrap();
        assert!(off.abs() < 4.0 * scatter, "{ohms}: {off} dB of {scatter}");
    }
}

/// (m·I)²/2 over 2q(I + I_b)·20 kHz with 0.5 A/W: 1 µW at m = 0.5 in the dark 69.8911 dB; with 10 µA of ambient light 56.6689; 100 nW at
/// m = 0.3 with 100 µA 22.4417. Everything but the shot noise is silent.
#[test]
fn shot_noise_limits_the_link() {
    for (watts, depth, ambient, snr) in [
        (1e-6, 0.5, 0.0, 69.8911),
        (1e-6, 0.5, 10e-6, 56.6689),
        (100e-9, 0.3, 100e-6, 22.4417),
    ] {
        let draft = Draft::ideal()
            .set(format!("transmitter.emitter.flux={watts:e}"))
            .set("receiver.detector.responsivity=0.5 A/W")
            .set(format!("transmitter.driver.slope={} mA/V", 10.0 * depth))
            .set("silence=[\"receiver.front_end.feedback\"]")
            .with(&format!(
                "[[ambient]]\nkind = \"steady\"\nphotocurrent = {ambient:e}\n"
            ));
        // Four records: the scatter of their mean power is half of one record's.
        let all: Vec<Measured> = (1..=4).map(|seed| measured(&draft, seed)).collect();
        let power: f64 = all
            .iter()
            .map(|m| m.figures.noise_rms_v.unwrap().powi(2))
            .sum();
        let signal = all[0].figures.signal_rms_v.unwrap();
        let found = 10.0 * (4.0 * signal * signal / power).log10();
        let scatter = all[0].noise_scatter_db.unwrap() / 2.0;
        let off = found - snr - BAND_DB;
        assert!(off.abs() < 4.0 * scatter, "{watts}: {off} dB of {scatter}");
    }
}

/// Whatever the resistance, what it leaves on a capacitance is kT/C: at 300 K 64.3580 µV on 1 pF, 6.43580 on 100 pF, 2.03518 on 1 nF.
#[test]
fn kt_over_c() {
    for (farads, volts) in [
        ("1 pF", 64.3580e-6),
        ("100 pF", 6.43580e-6),
        ("1 nF", 2.03518e-6),
    ] {
        for ohms in ["10 kΩ", "1 MΩ"] {
            let link = Draft::ideal()
                .front_end(&format!(
                    "kind = \"load\"\nsupply = \"1 MV\"\nload = \"{ohms}\"\ncapacitance = \"{farads}\"\n"
                ))
                .set("temperature=300 K")
                .link();
            let head = station(&link, "receiver.front_end");
            near(integral(|f| share(head, ".load", f)).sqrt(), volts, 1e-5);
        }
    }
}

/// (e_n·G)² + (i_n·R_s·G)² + 4kT(R_s·G² + R_f + R_g(R_f/R_g)²) + (i_n·R_f)² at 300 K: 1.56023 µV/√Hz and 188.542 nV/√Hz; the first one
/// 220.650 µV in 20 kHz.
#[test]
fn non_inverting_amplifier() {
    for (gain, source, voltage, current, density) in [
        (100.0, 10e3, 5e-9, 0.6e-12, 1.56023e-6),
        (10.0, 1e3, 18e-9, 0.01e-12, 188.542e-9),
    ] {
        let stage = "transmitter.stage.1";
        let link = Draft::ideal()
            .transmitter(&format!(
                "[[transmitter.stage]]\nkind = \"opamp\"\nconnection = \"non-inverting\"\nfeedback = {}\n\
                 ground = \"1 kΩ\"\nsupply = [\"-15 V\", \"15 V\"]\n{IDEAL_OPAMP}",
                (gain - 1.0) * 1e3
            ))
            .set("temperature=300 K")
            .set(format!("source.resistance={source}"))
            .set(format!("{stage}.noise_voltage={voltage:e}"))
            .set(format!("{stage}.noise_current={current:e}"))
            .link();
        let amplifier = station(&link, stage);
        let own: f64 = amplifier.noise(1e3).iter().map(|s| s.density).sum();
        let before: f64 = station(&link, "source")
            .noise(1e3)
            .iter()
            .map(|s| s.density)
            .sum();
        let total = own + before * amplifier.transfer(1e3).norm_sqr();
        near(total.sqrt(), density, 4e-6);
    }
    near(1.56023e-6 * 20e3f64.sqrt(), 220.650e-6, 4e-6);
}
