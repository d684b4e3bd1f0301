//! The monitor loop.

use super::*;
use harklight::station::Limit;

fn servo(bandwidth: &str, gain: f64) -> String {
    format!("transmitter.driver.servo={{ bandwidth = \"{bandwidth}\", gain = {gain} }}")
}

/// Emitter and driver as they are built, with everything inside the loop.
const REAL: [&str; 6] = [
    "transmitter.emitter.low_current=1 mA",
    "transmitter.emitter.bandwidth=800 kHz",
    "transmitter.emitter.thermal_resistance=300 K/W",
    "transmitter.emitter.intensity_noise=-130 dB/Hz",
    "transmitter.driver.sense=33 Ω",
    "transmitter.driver.slope=15 mA/V",
];
const RESISTOR: &str = "[transmitter.driver]\nkind = \"series-resistor\"\nsupply = \"5 V\"\nresistor = \"120 Ω\"\nservo = { bandwidth = \"50 kHz\", gain = 15 }\n";

fn cases() -> Vec<(String, Link)> {
    let mut all = Vec::new();
    for (bandwidth, gain) in [
        ("1 Hz", 3.0),
        ("300 Hz", 50.0),
        ("100 kHz", 20.0),
        ("10 kHz", 1e3),
        ("1 MHz", 1e4),
        ("1 GHz", 1e9),
    ] {
        let servo = servo(bandwidth, gain);
        let mut sets = REAL.to_vec();
        sets.push(&servo);
        all.push((servo.clone(), link(&sets)));
        all.push((format!("{servo}, at once and cold"), link(&[&servo])));
    }
    let driver =
        DESIGN.find("[transmitter.driver]").unwrap()..DESIGN.find("[transmitter.emitter]").unwrap();
    let text = DESIGN.replace(&DESIGN[driver], RESISTOR);
    all.push(("series resistor".into(), link_of(&text, &REAL[..4])));
    all
}

#[test]
fn runs_follow_the_transfer() {
    for (name, link) in cases() {
        let head = station(&link, HEAD);
        for rate in [RATE, 64e3] {
            follows_its_transfer(&name, head, &quiet(rate), 1e-4);
            follows_its_transfer(&name, head, &straight(rate), 1.0);
        }
    }
}

#[test]
fn noise_is_that_promised() {
    for (name, link) in cases() {
        sounds_as_promised(
            &name,
            station(&link, HEAD),
            &[(200.0, 400.0), (1e3, 2e3), (10e3, 13e3), (16e3, 20e3)],
        );
    }
}

#[test]
fn any_setting_stays_finite_and_block_sizes_do_not_matter() {
    for (name, link) in cases() {
        let head = station(&link, HEAD);
        stays_finite(&name, head);
        blocks_do_not_matter(head, &tone(RATE, 1e3, 3.0, 4000));
    }
}

/// A held input ends where the curve says, from darkness to the supply's limit, and its slope at rest is the tangent without the loop.
#[test]
fn held_inputs_end_on_the_curve() {
    for gain in [1.0, 30.0, 1e6] {
        let (servo, free) = (servo("100 kHz", gain), link(&[]));
        let link = link(&[&servo]);
        let (head, free) = (station(&link, HEAD), station(&free, HEAD));
        let slope = (head.curve(1e-5) - head.curve(-1e-5)) / (free.curve(1e-5) - free.curve(-1e-5));
        assert!((slope - 1.0).abs() < 1e-6, "{slope}");
        for k in -20..=20 {
            let x = f64::from(k) * 0.5;
            let output = run(head, &quiet(RATE), &vec![x; 20_000]);
            let (end, curve) = (output[19_999], head.curve(x));
            assert!(
                (end - curve).abs() < 1e-8 * 12e-3,
                "{gain} {x}: {end} {curve}"
            );
        }
        let Limit::Level { at: dark, .. } = head.limits()[0] else {
            panic!()
        };
        assert!((head.curve(-20.0) / dark - 1.0).abs() < 1e-5);
    }
}

/// The droop's second harmonic has a closed form: P = ηI/(1 + I/I_d) bends by P''/P' = −2/(I_d + I), so that a small tone of peak current A
/// has HD2 = A/(2(I_d + I)). The loop leaves 1/|1 + gain/(1 + 2jf/bandwidth)| of it.
#[test]
fn distortion_is_divided_by_one_and_the_loop_gain() {
    let (peak, f) = (0.02, 3e3);
    let closed = 20e-3 * peak / (2.0 * (0.2 + 30e-3));
    let hd2 = |sets: &[&str]| {
        let link = link(sets);
        let h = harmonics(station(&link, HEAD), &quiet(RATE), f, peak, 0.05, 2);
        h[1] / h[0]
    };
    let free = hd2(&[]);
    assert!((free / closed - 1.0).abs() < 1e-4, "{free} {closed}");
    for (bandwidth, gain) in [(100e3, 20.0), (2e3, 20.0), (5e3, 400.0), (1e6, 1e5)] {
        let left = 1.0 / (1.0 + gain / Complex64::new(1.0, 2.0 * f / bandwidth)).norm();
        let got = hd2(&[&servo(&format!("{bandwidth} Hz"), gain)]) / closed;
        assert!(
            (got / left - 1.0).abs() < 5e-3,
            "{bandwidth} {gain}: {got}, not {left}"
        );
    }
}

/// What noise and heat leave: intensity noise by 1/(1 + gain), and the light's fall after a step likewise.
#[test]
fn noise_and_heat_are_divided_too() {
    let sets = [
        "transmitter.emitter.intensity_noise=-120 dB/Hz",
        "transmitter.emitter.thermal_resistance=400 K/W",
        "transmitter.emitter.thermal_time=2 ms",
    ];
    let gain = 30.0;
    let servo = servo("1 MHz", gain);
    let mut with = sets.to_vec();
    with.push(&servo);
    let (free, closed) = (link(&sets), link(&with));
    let (free, closed) = (station(&free, HEAD), station(&closed, HEAD));
    let intensity = |m: &dyn Model| {
        let all = m.noise(1e3);
        let name = "transmitter.emitter.intensity";
        all.iter().find(|s| s.name == name).unwrap().density
    };
    // At 1 kHz some heat is still felt: the loop gain is that times it.
    let felt = free.transfer(1e3) / free.transfer(1e6);
    let left = (1.0 / (1.0 + gain * felt)).norm_sqr();
    assert!((intensity(closed) / intensity(free) / left - 1.0).abs() < 1e-4);

    let fall = |m: &dyn Model| {
        let output = run(m, &quiet(RATE), &vec![0.01; 40_000]);
        1.0 - output[39_999] / output[2]
    };
    let (open, left) = (fall(free), fall(closed));
    assert!(open > 0.05, "{open}");
    // 1 − T becomes (1 − T)/(1 + G·T).
    let expected = open / (1.0 + gain * (1.0 - open));
    assert!((left / expected - 1.0).abs() < 0.02, "{left} {expected}");
}

/// After a burst far into darkness and far beyond the supply, the light is back on its way within a few samples: nothing has wound up.
#[test]
fn nothing_winds_up() {
    for (bandwidth, gain) in [("1 kHz", 20.0), ("20 kHz", 1e6)] {
        let servo = servo(bandwidth, gain);
        // The supply allows 74 mA, dark is 30 mA below rest.
        let link = link(&[&servo, "transmitter.driver.sense=100 Ω"]);
        let head = station(&link, HEAD);
        let calm = tone(RATE, 1e3, 0.2, 8000);
        let expected = run(head, &quiet(RATE), &calm);
        for burst in [-30.0, 30.0] {
            let mut input = calm.clone();
            input[1000..5000].iter_mut().for_each(|x| *x = burst);
            let output = run(head, &quiet(RATE), &input);
            let swing = 0.2 * 20e-3 * 0.18;
            // The slower loop wound up to its supply's 9 V would take 9 V/(2π·1 kHz·20·1.5 V) = 48 µs to leave it: 18 samples of
            // darkness or full light. Not wound up it starts within two volts and falls with its own 7.6 µs, 2.9 samples.
            for n in 5012..8000 {
                let off = (output[n] - expected[n]).abs();
                let left = 2.0 / 0.2 * (-f64::from(n as u32 - 5001) / 2.9).exp();
                assert!(
                    off < left.max(1e-3) * swing,
                    "{bandwidth} {gain} {burst}: {off} at {n}"
                );
            }
        }
    }
}

#[test]
fn what_an_engineer_ought_to_know_is_said() {
    let warnings = |sets: &[&str]| station(&link(sets), HEAD).warnings().join("; ");
    assert_eq!(warnings(&[&servo("100 kHz", 20.0)]), "");
    let rings = warnings(&[
        &servo("100 kHz", 1e3),
        "transmitter.emitter.bandwidth=1 MHz",
    ]);
    assert!(rings.contains("rings") && rings.contains("9.1"), "{rings}");
    let dark = warnings(&[&servo("100 kHz", 20.0), "transmitter.driver.supply=1.3 V"]);
    assert!(dark.contains("no slope of light"), "{dark}");
}
