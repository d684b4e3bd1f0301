//! Filters: scipy's analogue designs, ladder networks by hand, kT/C.

use std::f64::consts::TAU;

use num_complex::Complex64;

use super::workbench::*;
use harklight::link::Link;
use harklight::station::{Conditions, Curves};

fn filter(keys: &str) -> Link {
    link(&stage("filter", keys), "", LINE)
}

fn buffered(family: &str, order: &str, shape: &str, corner: &str, width: &str) -> String {
    let width = if width == "0" {
        String::new()
    } else {
        format!("width = {width}\n")
    };
    let ripple = if family == "chebyshev" {
        "ripple = \"0.5 dB\"\n"
    } else {
        ""
    };
    format!(
        "shape = \"{shape}\"\nfamily = \"{family}\"\norder = {order}\ncorner = {corner}\n{width}{ripple}"
    )
}

/// Every family and order, four shapes, against scipy.signal (butter, bessel norm="mag", cheby1; analog). Both work in double precision;
/// orders of 8 with 16 poles lose some digits in either.
#[test]
fn responses_are_scipys() {
    let mut known: Option<(String, Link)> = None;
    let mut rows_seen = 0;
    for row in rows(include_str!("../../golden/filters.csv")) {
        let [family, order, shape, corner, width, f, re, im] = row[..] else {
            panic!("{row:?}")
        };
        let keys = buffered(family, order, shape, corner, width);
        if known.as_ref().is_none_or(|(k, _)| *k != keys) {
            known = Some((keys.clone(), filter(&keys)));
        }
        let model = it(&known.as_ref().unwrap().1);
        let [f, re, im] = [f, re, im].map(|x| x.parse::<f64>().unwrap());
        let expected = Complex64::new(re, im);
        let got = model.transfer(f);
        assert!(
            (got - expected).norm() < 1e-9 * expected.norm() + 1e-12,
            "{row:?}: {got}"
        );
        rows_seen += 1;
    }
    assert_eq!(rows_seen, 3 * 8 * 6 * 6);
}

#[test]
fn both_faces_agree() {
    for family in ["butterworth", "bessel", "chebyshev"] {
        for order in ["1", "2", "5", "8"] {
            for (shape, corner, width) in [
                ("low-pass", "15e3", "0"),
                ("high-pass", "120", "0"),
                ("high-pass", "9e3", "0"),
                ("band-pass", "1e3", "2e3"),
                ("notch", "1e3", "400"),
            ] {
                let keys = buffered(family, order, shape, corner, width);
                assert_faces_agree(&keys, it(&filter(&keys)), 0.1);
            }
        }
    }
    for shape in ["emphasis", "de-emphasis"] {
        let keys = format!(
            "shape = \"{shape}\"\ntime_constant = \"50 µs\"\nsecond_time_constant = \"2 µs\"\n"
        );
        assert_faces_agree(&keys, it(&filter(&keys)), 0.1);
    }
}

/// (1 + sT₁)/(1 + sT₂), and its inverse: together nothing.
#[test]
fn shelves_are_their_closed_form() {
    let keys = |shape| {
        format!(
            "shape = \"{shape}\"\ntime_constant = \"75 µs\"\nsecond_time_constant = \"7.5 µs\"\n"
        )
    };
    let (up, down) = (filter(&keys("emphasis")), filter(&keys("de-emphasis")));
    for f in [10.0, 2122.07, 10e3, 50e3] {
        let s = Complex64::new(0.0, TAU * f);
        let expected = (1.0 + s * 75e-6) / (1.0 + s * 7.5e-6);
        assert!((it(&up).transfer(f) / expected - 1.0).norm() < 1e-12);
        assert!((it(&down).transfer(f) * expected - 1.0).norm() < 1e-12);
    }
}

/// A low-pass and a notch pass the rest of what drives them, a high-pass and a band-pass block it; cold, both end at rest.
#[test]
fn rest_passes_or_is_blocked() {
    let amp = format!(
        "[[transmitter.stage]]\nkind = \"opamp\"\nconnection = \"non-inverting\"\nfeedback = 0\nground = \"inf\"\nsupply = \"9 V\"\nreference = \"3 V\"\nbias_resistance = \"10 kΩ\"\n{IDEAL}"
    );
    let coupling = "[[transmitter.stage]]\nkind = \"coupling\"\ncapacitor = \"1 µF\"\n";
    for (shape, width, rest) in [
        ("low-pass", "0", 3.0),
        ("notch", "100", 3.0),
        ("high-pass", "0", 0.0),
        ("band-pass", "100", 0.0),
    ] {
        let keys = buffered("butterworth", "3", shape, "500", width);
        let link = link(
            &format!("{coupling}{amp}{}", stage("filter", &keys)),
            "",
            LINE,
        );
        let model = it(&link);
        assert!((reading(model, "output") - rest).abs() < 1e-12, "{shape}");
        let cold = Conditions {
            cold: true,
            ..quiet(Curves::Bent)
        };
        // What drives it is still at 0 V, then comes to its rest: first as discharged, at last as at rest.
        let mut input = vec![-3.0; 10];
        input.resize(400_000, 0.0);
        let output = run(model, &cold, &input);
        assert!((output[5] + rest).abs() < 1e-6, "{shape}: {}", output[5]);
        assert!(output[399_999].abs() < 1e-6, "{shape}");
        assert!(
            output[10..100].iter().any(|y| (y + rest).abs() > 1e-3),
            "{shape}"
        );
    }
}

const BIASED: &str = "[[transmitter.stage]]\nname = \"amp\"\nkind = \"opamp\"\nconnection = \"non-inverting\"\nfeedback = 0\nground = \"inf\"\nsupply = [\"-9 V\", \"9 V\"]\nbias_resistance = \"47 kΩ\"\ninput_capacitance = \"20 pF\"\n";
const BEFORE_COUPLING: &str =
    "[[transmitter.stage]]\nname = \"gap\"\nkind = \"coupling\"\ncapacitor = \"100 nF\"\n";

fn rc(shape: &str) -> String {
    stage(
        "filter",
        &format!(
            "shape = \"{shape}\"\nfamily = \"rc\"\nresistor = \"4.7 kΩ\"\ncapacitor = \"1 nF\"\n"
        ),
    )
}

/// Source volts to the amplifier's input, by all stations between.
fn to_amplifier(link: &Link, f: f64) -> Complex64 {
    let stages = link.stations()[1..].iter();
    stages
        .take_while(|s| s.path() != "transmitter.stage.amp")
        .map(|s| s.transfer(f))
        .product()
}

/// 10 kΩ and 4.7 kΩ into 1 nF beside 47 kΩ and 20 pF, by hand.
#[test]
fn rc_low_pass_is_loaded_as_on_the_bench() {
    let link = link(&format!("{}{BIASED}{IDEAL}", rc("low-pass")), "", LINE);
    for f in [10.0, 1e3, 10e3, 100e3, 1e6] {
        let s = Complex64::new(0.0, TAU * f);
        let expected = 1.0 / (1.0 + 14.7e3 * (1.0 / 47e3 + s * 1.02e-9));
        assert!(
            (to_amplifier(&link, f) / expected - 1.0).norm() < 1e-9,
            "{f}"
        );
    }
    let across = 1.0 / (1.0 / 14.7e3 + 1.0 / 47e3);
    assert!((reading(it(&link), "corner") * TAU * across * 1.02e-9 - 1.0).abs() < 1e-12);
    assert_faces_agree("rc low-pass", it(&link), 0.1);
}

/// The same with 100 nF before the amplifier: a ladder of two capacitors, solved exactly.
#[test]
fn rc_low_pass_before_a_coupling_capacitor() {
    let link = link(
        &format!("{}{BEFORE_COUPLING}{BIASED}{IDEAL}", rc("low-pass")).replace("20 pF", "0 pF"),
        "",
        LINE,
    );
    for f in [1.0, 20.0, 50.0, 1e3, 20e3, 200e3] {
        let s = Complex64::new(0.0, TAU * f);
        let behind = 47e3 + 1.0 / (s * 100e-9);
        let node = 1.0 / (1.0 + 14.7e3 * (s * 1e-9 + 1.0 / behind));
        let expected = node * 47e3 / behind;
        assert!(
            (to_amplifier(&link, f) / expected - 1.0).norm() < 1e-9,
            "{f}"
        );
    }
    assert_faces_agree("rc low-pass, coupled", it(&link), 0.1);
}

/// A coupling capacitor before the low-pass: 220 nF, 10 kΩ and 4.7 kΩ into 1 nF beside 47 kΩ. Each capacitor is taken in the other's
/// mid-band, which leaves out what the ratio 1/220 of the two makes: 0.04 dB, 0.26°.
#[test]
fn rc_low_pass_behind_a_coupling_capacitor() {
    let coupling = BEFORE_COUPLING.replace("100 nF", "220 nF");
    let link = link(
        &format!("{coupling}{}{BIASED}{IDEAL}", rc("low-pass")).replace("20 pF", "0 pF"),
        "",
        LINE,
    );
    for f in [5.0, 11.7, 100.0, 1e3, 14e3, 50e3] {
        let s = Complex64::new(0.0, TAU * f);
        let expected = 1.0 / (1.0 + (14.7e3 + 1.0 / (s * 220e-9)) * (1.0 / 47e3 + s * 1e-9));
        let ratio = to_amplifier(&link, f) / expected;
        assert!(
            (20.0 * ratio.norm().log10()).abs() < 0.04 && ratio.arg().to_degrees().abs() < 0.26,
            "{f} {ratio}"
        );
    }
}

/// 10 kΩ and 1 nF into 4.7 kΩ beside 47 kΩ: 1/(2π·C·(R_source + R)) and the division.
#[test]
fn rc_high_pass_is_loaded_as_on_the_bench() {
    let link = link(
        &format!("{}{BIASED}{IDEAL}", rc("high-pass")).replace("20 pF", "0 pF"),
        "",
        LINE,
    );
    let across = 1.0 / (1.0 / 4.7e3 + 1.0 / 47e3);
    for f in [10.0, 1e3, 10e3, 100e3] {
        let s = Complex64::new(0.0, TAU * f);
        let expected = across / (across + 10e3 + 1.0 / (s * 1e-9));
        assert!(
            (to_amplifier(&link, f) / expected - 1.0).norm() < 1e-9,
            "{f}"
        );
    }
    assert!((reading(it(&link), "corner") * TAU * 1e-9 * (10e3 + across) - 1.0).abs() < 1e-12);
    assert_faces_agree("rc high-pass", it(&link), 0.1);
    // Its resistor is the amplifier's DC path.
    let open =
        format!("{}{BIASED}{IDEAL}", rc("high-pass")).replace("bias_resistance = \"47 kΩ\"\n", "");
    assert!(try_link(&open, "", LINE).is_ok());
}

/// All the noise of resistors into a capacitor is kT/C, whatever they are: 2.03518 µV at 300 K and 1 nF (closed form, Nyquist 1928).
#[test]
fn rc_noise_is_kt_over_c() {
    let link = link(&rc("low-pass"), "", LINE);
    let (source, model) = (at(&link, "source"), it(&link));
    let density = |f: f64| {
        let from_source: f64 = source.noise(f).iter().map(|s| s.density).sum();
        let own: f64 = model.noise(f).iter().map(|s| s.density).sum();
        from_source * model.transfer(f).norm_sqr() + own
    };
    // By logarithmic steps over ten decades; the ends hold 1e-5 of the power.
    let steps = 4000;
    let (low, ratio) = (0.1f64, 1e10f64.ln() / f64::from(steps));
    let power: f64 = (0..steps)
        .map(|k| {
            let f = low * (ratio * (f64::from(k) + 0.5)).exp();
            density(f) * f * ratio
        })
        .sum();
    assert!(
        (power.sqrt() / 2.03518e-6 - 1.0).abs() < 1e-4,
        "{}",
        power.sqrt()
    );
    assert_eq!(model.noise(1e3)[0].name, "transmitter.stage.it.resistor");
}

/// Measured noise of both kinds of RC against the promised density, in octave-like bands.
#[test]
fn rc_noise_in_time_is_that_promised() {
    for shape in ["low-pass", "high-pass"] {
        let link = link(&rc(shape), "", LINE);
        let model = it(&link);
        let conditions = Conditions {
            noise: true,
            seed: 7,
            ..quiet(Curves::Bent)
        };
        let record = run(model, &conditions, &vec![0.0; 1 << 20]);
        let analyser = harklight::signal::spectrum::Analyser::new(RATE, 1 << 13, 8.0);
        let spectrum = analyser.average(&record[1 << 12..]);
        for (low, high) in [(500.0, 2e3), (4e3, 8e3), (12e3, 20e3)] {
            let promised: f64 = (0..200)
                .map(|k| low + (high - low) * (f64::from(k) + 0.5) / 200.0)
                .map(|f| model.noise(f)[0].density * (high - low) / 200.0)
                .sum();
            let ratio = spectrum.band_power(low, high) / promised;
            let sigma = analyser.scatter(record.len(), high - low);
            assert!(
                (ratio - 1.0).abs() < 4.0 * sigma,
                "{shape} {low}: {ratio} ± {sigma}"
            );
        }
    }
}

#[test]
fn storms_stay_finite_and_blocks_do_not_matter() {
    for keys in [
        buffered("chebyshev", "8", "band-pass", "1e6", "10"),
        buffered("bessel", "7", "high-pass", "1e12", "0"),
        buffered("butterworth", "8", "low-pass", "1e-6", "0"),
        buffered("butterworth", "1", "band-pass", "1e3", "2e3"),
        buffered("butterworth", "3", "notch", "180e3", "1e12"),
        "shape = \"emphasis\"\ntime_constant = \"1 s\"\nsecond_time_constant = \"1 fs\"\n".into(),
    ] {
        let link = filter(&keys);
        let model = it(&link);
        assert!(model.transfer(1e3).is_finite(), "{keys}");
        let input: Vec<f64> = (0..3000)
            .map(|n| [1e6, -1e6, 0.0][if n < 1000 { n % 2 } else { n / 1500 }])
            .collect();
        let whole = run(model, &quiet(Curves::Bent), &input);
        assert!(whole.iter().all(|y| y.is_finite()), "{keys}");
        let mut single = input.clone();
        let mut runner = model.runner(&quiet(Curves::Straight));
        single.chunks_mut(1).for_each(|b| runner.run(b, &[]));
        assert_eq!(whole, single, "{keys}");
        assert!(
            run(model, &quiet(Curves::Bent), &[0.0; 100])
                .iter()
                .all(|y| *y == 0.0)
        );
    }
}
