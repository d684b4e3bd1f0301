//! The detector: responsivity, capacitance (Sze; Saleh and Teich).

use super::near;
use crate::bench::{Draft, reading, station};

/// η·q·λ/(h·c) = η·λ/1239.84 nm, seen through the whole receive head: volts per watt over the feedback resistor.
#[test]
fn responsivity_follows_the_wavelength() {
    for (nm, responsivity) in [
        (470, 0.379081),
        (520, 0.419408),
        (590, 0.475867),
        (625, 0.504096),
        (650, 0.524260),
        (850, 0.685571),
        (880, 0.709768),
        (940, 0.758161),
        (950, 0.766227),
    ] {
        for efficiency in [1.0, 0.8] {
            let link = Draft::ideal()
                .detector(&format!(
                    "kind = \"photodiode\"\narea = \"1 cm²\"\nquantum_efficiency = {efficiency}\ndark_current = 0\n\
                     capacitance = 0\nbuilt_in = \"0.6 V\"\ngrading = 0.5\nsaturation_current = 1e-30\nideality = 1\n"
                ))
                .set(format!("transmitter.emitter.wavelength={nm} nm"))
                .link();
            let head = station(&link, "receiver.front_end");
            let volts = head.transfer(1000.0).norm() / 100e3;
            near(volts, efficiency * responsivity, 3e-6);
        }
    }
}

/// C₀/(1 + V/φ)^½ of 100 pF and 0.6 V.
#[test]
fn junction_capacitance_falls_with_the_bias() {
    for (bias, picofarads) in [(5, 32.7327), (10, 23.7915)] {
        let link = Draft::ideal()
            .set("receiver.detector.capacitance=100 pF")
            .set(format!("receiver.front_end.bias={bias} V"))
            .link();
        let head = station(&link, "receiver.front_end");
        near(
            reading(head, "junction capacitance") * 1e12,
            picofarads,
            3e-6,
        );
    }
}

/// Line of sight (Kahn and Barry 1997): half angle, collecting area, distance, both angles, H0; the emitter's flux is 10 µW.
#[test]
fn line_of_sight() {
    for (half, area, distance, angle, gain) in [
        (60, "1 cm²", 1, 0, 3.18310e-5),
        (60, "1 cm²", 2, 30, 5.96831e-6),
        (30, "1 cm²", 3, 0, 1.02900e-5),
        (15, "7 mm²", 5, 0, 9.35552e-7),
        (10, "7 mm²", 10, 5, 4.32179e-7),
    ] {
        let link = Draft::ideal()
            .set(format!("transmitter.emitter.half_angle={half}°"))
            .set(format!("receiver.optics.area={area}"))
            .set(format!("path.distance={distance} m"))
            .set(format!("path.off_axis={angle}°"))
            .set(format!("path.tilt={angle}°"))
            .link();
        let path = station(&link, "path");
        near(path.transfer(1000.0).re, gain, 5e-6);
        near(reading(path, "on the detector"), gain * 10e-6, 5e-6);
    }
}
