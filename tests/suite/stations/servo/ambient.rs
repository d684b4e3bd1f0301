//! The ambient servo.

use super::*;
use harklight::physics::noise::johnson_current;
use harklight::station::Events;

const LAMP: &str = "ambient";

/// The bench with a lamp of `photocurrent` and further settings.
fn lit(photocurrent: &str, sets: &[&str]) -> Link {
    let mut text = DESIGN.replace(
        "[receiver.optics]",
        &format!("[[{LAMP}]]\nkind = \"incandescent\"\nphotocurrent = \"{photocurrent}\"\nripple = \"20 %\"\n[receiver.optics]"),
    );
    text = text.replace("distance = \"2 m\"", "distance = \"20 m\"");
    link_of(&text, sets)
}

const SERVO: &str = "receiver.front_end.ambient_servo=30 Hz";

fn cases() -> Vec<(&'static str, Link)> {
    vec![
        ("gentle", lit("10 µA", &[SERVO])),
        (
            "large current",
            lit(
                "200 µA",
                &[SERVO, "receiver.front_end.servo_resistor=10 kΩ"],
            ),
        ),
        (
            "fast",
            lit("10 µA", &["receiver.front_end.ambient_servo=2 kHz"]),
        ),
        (
            "as fast as the band",
            lit("1 µA", &["receiver.front_end.ambient_servo=20 kHz"]),
        ),
        ("at its limit", lit("60 µA", &[SERVO])),
        (
            "no capacitance",
            lit(
                "10 µA",
                &[
                    SERVO,
                    "receiver.detector.capacitance=0",
                    "receiver.front_end.input_capacitance=0",
                    "receiver.front_end.feedback_capacitor=0",
                ],
            ),
        ),
    ]
}

#[test]
fn runs_follow_the_transfer() {
    for (name, link) in cases() {
        let front = station(&link, FRONT);
        follows_its_transfer(name, front, &quiet(RATE), 1e-8);
        follows_its_transfer(name, front, &straight(RATE), 1e-3);
        follows_its_transfer(name, front, &quiet(64e3), 1e-8);
    }
}

#[test]
fn noise_is_that_promised() {
    for (name, link) in cases() {
        let bands = [(200.0, 400.0), (1e3, 2e3), (10e3, 13e3), (16e3, 20e3)];
        sounds_as_promised(name, station(&link, FRONT), &bands);
    }
}

#[test]
fn any_setting_stays_finite_and_block_sizes_do_not_matter() {
    let absurd = lit("1 µA", &["receiver.front_end.ambient_servo=3e300 Hz"]);
    for (name, link) in cases().into_iter().chain([("absurd", absurd)]) {
        stays_finite(name, station(&link, FRONT));
        blocks_do_not_matter(station(&link, FRONT), &tone(RATE, 1e3, 1e-4, 4000));
    }
}

/// A high-pass of first order: s/(s + 2πf_s) of what the stage does without the servo, where the amplifier's lag is out of reach.
#[test]
fn it_is_a_high_pass_that_keeps_the_output_at_the_reference() {
    let ideal = [
        "receiver.front_end.gbw=1e15",
        "receiver.front_end.slew=inf",
        "receiver.front_end.feedback_capacitor=0",
    ];
    let open = lit("10 µA", &ideal);
    for photocurrent in ["0 A", "10 µA", "40 µA"] {
        let closed = lit(
            photocurrent,
            &[
                SERVO,
                ideal[0],
                ideal[1],
                ideal[2],
                "receiver.front_end.offset=3 mV",
            ],
        );
        let (front, open) = (station(&closed, FRONT), station(&open, FRONT));
        assert!((reading(front, "output") - 4.003).abs() < 1e-12);
        for f in [0.1, 3.0, 30.0, 1e3, 20e3] {
            let high_pass = 1.0 / (1.0 + Complex64::new(0.0, -30.0 / f));
            let ratio = front.transfer(f) / open.transfer(f) / high_pass;
            assert!((ratio - 1.0).norm() < 1e-6, "{f}: {ratio}");
        }
        // The current it sends is all that leaves the input: light, dark current and shunt (3 mV of offset on the diode apart).
        let drawn = reading(front, "signal photocurrent") + reading(front, "ambient photocurrent");
        let sent = reading(front, "ambient servo, current");
        assert!((sent - drawn - 3e-9).abs() < 0.2e-9, "{sent} {drawn}");
    }
}

/// Its resistor's Johnson noise 4kT/R joins the feedback's, the amplifier's voltage meets the noise gain 1 + R_f/R_s, and the ambient's shot noise stays.
#[test]
fn its_noise_is_its_resistors() {
    let link = lit(
        "20 µA",
        &[
            "receiver.front_end.ambient_servo=1 Hz",
            "receiver.front_end.servo_resistor=25 kΩ",
        ],
    );
    let front = station(&link, FRONT);
    let shares = front.noise(1e3);
    let share = |name: &str| {
        shares
            .iter()
            .find(|s| s.name.ends_with(name))
            .unwrap()
            .density
    };
    let z = 100e3f64.powi(2);
    let near = |a: f64, b: f64| assert!((a / b - 1.0).abs() < 1e-3, "{a} {b}");
    near(
        share(".ambient_servo"),
        johnson_current(1.0 / 25e3, 293.15) * z,
    );
    near(share(".ambient_servo"), 4.0 * share(".feedback"));
    near(share(".voltage_noise"), 64e-18 * 1.1 * 25.0);
    let light = reading(front, "signal photocurrent") + 20e-6 + 2e-9;
    near(share(".shot"), 2.0 * 1.602_176_634e-19 * light * z);
}

/// The lamp's hum at twice the mains is taken down by the high-pass at 100 Hz.
#[test]
fn hum_in_its_band_is_reduced() {
    let hum = |sets: &[&str]| {
        let link = lit("10 µA", sets);
        let front = station(&link, FRONT);
        let ripple = tone(RATE, 100.0, 1e-6, 384_000);
        let mut block = vec![0.0; ripple.len()];
        front.runner(&quiet(RATE)).run(&mut block, &ripple);
        phasor(&block[384_000 - 19_200..], RATE, 100.0).norm()
    };
    let reduced = hum(&["receiver.front_end.ambient_servo=300 Hz"]) / hum(&[]);
    assert!((reduced - 1.0 / 10f64.sqrt()).abs() < 1e-3, "{reduced}");
}

/// Beyond its range it stands at its limit: (rail − reference)/R_s, the rest goes through the feedback, slow signals pass, and it says so.
#[test]
fn beyond_its_range_it_stands_still_and_says_so() {
    let link = lit("60 µA", &[SERVO]);
    let front = station(&link, FRONT);
    let most = reading(front, "ambient servo, current");
    assert!((most - 45e-6).abs() < 1e-12, "{most}");
    let light = reading(front, "signal photocurrent") + 60e-6;
    let output = 4.0 + 100e3 * (light - 45e-6);
    assert!((reading(front, "output") - output).abs() < 1e-3);
    assert!(
        front.warnings()[0].contains("at its limit"),
        "{:?}",
        front.warnings()
    );
    // 60 kΩ where the servo's resistor would have 1 Hz stopped.
    assert!((front.transfer(1.0).norm() / (0.6 * 100e3) - 1.0).abs() < 1e-3);
    // Less light brings it back to work: the output returns to the reference.
    let output = reading(front, "output");
    let dimmed = run(front, &quiet(RATE), &vec![-30e-6 / 0.6; 100_000]);
    assert!(
        (dimmed[99_999] + output - 4.0).abs() < 1e-6,
        "{}",
        dimmed[99_999]
    );
}

/// A flash that drives amplifier and servo to their rails: both come back, in the time that the servo's corner takes from its rail.
#[test]
fn it_recovers_from_saturation() {
    let link = lit("10 µA", &["receiver.front_end.ambient_servo=300 Hz"]);
    let front = station(&link, FRONT);
    let mut block = vec![0.0; 60_000];
    block[1000..20_000].iter_mut().for_each(|x| *x = 300e-6);
    let mut runner = front.runner(&quiet(RATE));
    runner.run(&mut block, &[]);
    let clipped = Events {
        clipped: 18_900,
        ..Events::default()
    };
    assert!(runner.events().clipped > clipped.clipped);
    // From the servo's rail, 3.5 V less what it holds at rest, through the feedback, falling with the servo's own time constant.
    let tail = &block[20_100..];
    let later = 384_000.0 / (TAU * 300.0) * 2.0;
    let ratio = tail[later as usize] / tail[0];
    assert!((ratio / (-2f64).exp() - 1.0).abs() < 0.02, "{ratio}");
    assert!(tail[0] < -2.0 && block[59_999].abs() < 1e-9);
}
