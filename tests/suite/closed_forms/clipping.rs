//! Hard clipping of a sine: Fourier series in closed form (Clarke and Hess 1971; formulas from memory, values computed and checked by FFT).

use super::near;
use crate::bench::{Draft, IDEAL_OPAMP, distortion, quiet, run, station, tone};
use harklight::figures::distortion::Distortion;

const TONE: f64 = 997.0;

/// A sine through `path` at 384 kHz, harmonics up to 150 kHz: those above carry less than 1e-6, and 997 Hz is no divisor of the rate, so
/// that what folds back lies between the harmonics.
fn measured(draft: &Draft, path: &str, peak: f64) -> Distortion {
    let link = draft.link();
    let output = run(
        station(&link, path),
        &quiet(384e3),
        &tone(384e3, TONE, peak, 192_000),
    );
    distortion(&output, 384e3, TONE, 150e3)
}

/// A follower without any limit but its rails.
fn rails(low: f64, high: f64) -> Draft {
    Draft::ideal().transmitter(&format!(
        "[[transmitter.stage]]\nkind = \"opamp\"\nconnection = \"non-inverting\"\nfeedback = 0\nground = \"inf\"\n\
         supply = [{low}, {high}]\nreference = 0\n{IDEAL_OPAMP}"
    ))
}

#[test]
fn both_rails() {
    for (c, b1, thd, third, fifth) in [
        (0.95, 0.986680, 0.0192401, 0.0124407, 0.0104999),
        (0.9, 0.962614, 0.0421993, 0.0328632, 0.0228728),
        (0.8, 0.895912, 0.0897858, 0.0818592, 0.0347083),
        (0.5, 0.608998, 0.232938, 0.226326, 0.0452653),
        (0.1, 0.127111, 0.430397, 0.328895, 0.192075),
    ] {
        let found = measured(&rails(-c, c), "transmitter.stage.1", 1.0);
        near(found.fundamental * 2f64.sqrt(), b1, 1e-5);
        near(found.thd(), thd, 3e-4);
        near(found.harmonics[1] / found.fundamental, third, 1e-4);
        near(found.harmonics[3] / found.fundamental, fifth, 1e-4);
        assert!(found.harmonics[0] < 1e-6 * found.fundamental);
    }
}

/// (c, b1, THD, H2/H1) of a sine clipped at −c alone; c = 0 is the half wave.
const ONE_SIDED: [(f64, f64, f64, f64); 3] = [
    (0.9, 0.981307, 0.0321045, 0.0179095),
    (0.8, 0.947956, 0.0705518, 0.0483531),
    (0.5, 0.804499, 0.194648, 0.171327),
];

#[test]
fn one_rail() {
    for (c, b1, thd, second) in ONE_SIDED {
        let found = measured(&rails(-c, 10.0), "transmitter.stage.1", 1.0);
        near(found.fundamental * 2f64.sqrt(), b1, 1e-5);
        near(found.thd(), thd, 1e-4);
        near(found.harmonics[0] / found.fundamental, second, 1e-4);
    }
}

/// A current sink that runs out of bias: over-modulated by 1/c. Its soft turn-off is V_T wide at the input, so a drive of a kilovolt
/// makes it hard.
#[test]
fn emitter_at_cut_off() {
    for (c, b1, thd, second) in ONE_SIDED {
        let draft = Draft::ideal()
            .set("transmitter.driver.slope=10 µA/V")
            .set(format!("transmitter.driver.bias={}", c * 10e-3));
        let found = measured(&draft, "transmitter.emitter", 1000.0);
        // 10 mA make 10 µW.
        near(found.fundamental * 2f64.sqrt(), b1 * 10e-6, 1e-5);
        near(found.thd(), thd, 1e-4);
        near(found.harmonics[0] / found.fundamental, second, 1e-4);
    }
}
