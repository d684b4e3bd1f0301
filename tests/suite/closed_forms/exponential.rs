//! The exponential: Bessel-function harmonics of a junction driven by a sine (Clarke and Hess 1971, formulas from memory), and points of
//! the diode's law.

use super::near;
use crate::bench::{Draft, distortion, quiet, reading, run, station, tone};

/// i = I₀·e^(x·cos ωt) has harmonics I_n(x)/I_1(x). An emitter of straight flux, n = 1, without any resistance, driven by a voltage.
#[test]
fn a_bare_junction_makes_bessel_harmonics() {
    for (x, second, third, thd) in [
        (0.1, 0.0249896, 0.000416406, 0.0249931),
        (0.5, 0.123718, 0.0102566, 0.124144),
        (1.0, 0.240194, 0.0392251, 0.243424),
        (2.0, 0.433127, 0.133745, 0.454470),
        (5.0, 0.719341, 0.424528, 0.866476),
        (10.0, 0.854185, 0.658326, 1.22357),
    ] {
        let draft =
            Draft::ideal().driver("kind = \"series-resistor\"\nsupply = \"0.4 V\"\nresistor = 0\n");
        let link = draft.link();
        let volts = harklight::physics::constants::thermal_voltage(293.15) * x;
        let input = tone(384e3, 1000.0, volts, 192_000);
        let output = run(station(&link, "transmitter.emitter"), &quiet(384e3), &input);
        let found = distortion(&output, 384e3, 1000.0, 100e3);
        near(found.harmonics[0] / found.fundamental, second, 5e-6);
        near(found.harmonics[1] / found.fundamental, third, 5e-6);
        near(found.thd(), thd, 5e-6);
    }
}

/// V(I) = n·V_T·ln(I/I_s + 1) + I·R_s at 300 K.
#[test]
fn forward_voltage() {
    for (n, saturation, resistance, current, volts) in [
        (2.0, "1e-18 A", 2.0, 1e-3, 1.78779),
        (2.0, "1e-18 A", 2.0, 10e-3, 1.92485),
        (2.0, "1e-18 A", 2.0, 20e-3, 1.98068),
        (1.8, "1e-12 A", 1.0, 1e-3, 0.965328),
        (1.8, "1e-12 A", 1.0, 20e-3, 1.12373),
        (1.8, "1e-12 A", 1.0, 100e-3, 1.27862),
    ] {
        let emitter = "transmitter.emitter";
        let link = Draft::ideal()
            .set("temperature=300 K")
            .set(format!("transmitter.driver.bias={current}"))
            .set(format!("{emitter}.ideality={n}"))
            .set(format!("{emitter}.saturation_current={saturation}"))
            .set(format!("{emitter}.series_resistance={resistance}"))
            .link();
        near(
            reading(station(&link, emitter), "forward voltage"),
            volts,
            4e-6,
        );
    }
}
