//! Rows of loaded stages against the network solved whole: the transfer by Kirchhoff, and Nyquist's theorem, by which everything passive
//! in front of a node makes 4kT·Re Z there, however it is connected.

use std::f64::consts::TAU;

use num_complex::Complex64;

use super::db;
use crate::bench::{Draft, IDEAL_OPAMP};
use harklight::link::Link;
use harklight::physics::constants::BOLTZMANN;

fn capacitor(farads: f64, f: f64) -> Complex64 {
    1.0 / Complex64::new(0.0, TAU * f * farads)
}

fn parallel(a: Complex64, b: Complex64) -> Complex64 {
    1.0 / (1.0 / a + 1.0 / b)
}

fn coupling(farads: &str) -> String {
    format!("[[transmitter.stage]]\nkind = \"coupling\"\ncapacitor = \"{farads}\"\n")
}

const POT: &str = "[[transmitter.stage]]\nkind = \"trim\"\nresistance = \"100 kΩ\"\nwiper = 0.5\n";

/// A follower without noise of its own but that of its bias resistor.
fn follower(bias: &str) -> String {
    format!(
        "[[transmitter.stage]]\nname = \"amp\"\nkind = \"opamp\"\nconnection = \"non-inverting\"\nfeedback = 0\nground = \"inf\"\n\
         bias_resistance = \"{bias}\"\nsupply = [\"-9 V\", \"9 V\"]\n{IDEAL_OPAMP}"
    )
}

/// 10 kΩ of source, then the row.
fn row(stages: &[String]) -> Link {
    Draft::ideal()
        .set("source.resistance=10 kΩ")
        .transmitter(&stages.concat())
        .link()
}

/// From the source's volts to the follower's output.
fn transfer(link: &Link, f: f64) -> Complex64 {
    let stations = &link.stations()[1..];
    let last = stations
        .iter()
        .position(|s| s.path().ends_with("amp"))
        .unwrap();
    stations[..=last].iter().map(|s| s.transfer(f)).product()
}

/// Density at the follower's output.
fn noise(link: &Link, f: f64) -> f64 {
    let last = link
        .stations()
        .iter()
        .position(|s| s.path().ends_with("amp"))
        .unwrap();
    let mut total = 0.0;
    for station in &link.stations()[..=last] {
        let own: f64 = station.noise(f).iter().map(|s| s.density).sum();
        total = total * station.transfer(f).norm_sqr() + own;
    }
    total
}

/// Source R, the impedances on the way, in the order of [`row`]: (transfer, impedance) at the bias resistor.
struct Row {
    name: &'static str,
    link: Link,
    /// Transfer and impedance at the follower's input, from the frequency.
    exact: fn(f64) -> (Complex64, Complex64),
    /// Departure of the noise, dB: none, but that an amplifier takes a capacitor before a pot as a short circuit for its bias resistor.
    noise_db: f64,
}

const SOURCE: f64 = 10e3;

fn rows() -> Vec<Row> {
    vec![
        Row {
            name: "coupling",
            link: row(&[coupling("22 nF"), follower("47 kΩ")]),
            exact: |f| {
                let before = SOURCE + capacitor(22e-9, f);
                (47e3 / (before + 47e3), parallel(before, 47e3.into()))
            },
            noise_db: 1e-6,
        },
        Row {
            name: "pot",
            link: row(&[POT.into(), follower("47 kΩ")]),
            exact: |_| {
                let lower = parallel(50e3.into(), 47e3.into());
                let z = parallel((SOURCE + 50e3).into(), lower);
                (lower / (lower + SOURCE + 50e3), z)
            },
            noise_db: 1e-6,
        },
        Row {
            name: "pot, coupling",
            link: row(&[POT.into(), coupling("22 nF"), follower("47 kΩ")]),
            exact: |f| {
                let c = capacitor(22e-9, f);
                let load = parallel(50e3.into(), c + 47e3);
                let wiper = load / (load + SOURCE + 50e3);
                let before = parallel((SOURCE + 50e3).into(), 50e3.into()) + c;
                (wiper * 47e3 / (c + 47e3), parallel(before, 47e3.into()))
            },
            noise_db: 1e-6,
        },
        Row {
            name: "coupling, pot",
            link: row(&[coupling("220 nF"), POT.into(), follower("1 MΩ")]),
            exact: |f| {
                let lower = parallel(50e3.into(), 1e6.into());
                let before = SOURCE + capacitor(220e-9, f) + 50e3;
                (lower / (before + lower), parallel(before, lower))
            },
            noise_db: 0.03,
        },
    ]
}

#[test]
fn rows_load_as_the_whole_network_does() {
    let mut wrong = Vec::new();
    for row in rows() {
        for f in [20.0, 100.0, 1e3, 20e3] {
            let ratio = transfer(&row.link, f) / (row.exact)(f).0;
            if db(ratio.norm()).abs() > 1e-6 || ratio.arg().abs() > 1e-6 {
                wrong.push(format!("{} at {f} Hz: {} dB", row.name, db(ratio.norm())));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn passive_rows_obey_nyquist() {
    let mut wrong = Vec::new();
    for row in rows() {
        for f in [20.0, 100.0, 1e3, 20e3] {
            let exact = 4.0 * BOLTZMANN * 293.15 * (row.exact)(f).1.re;
            let off = 10.0 * (noise(&row.link, f) / exact).log10();
            if off.abs() > row.noise_db {
                wrong.push(format!("{} at {f} Hz: {off:.4} dB", row.name));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}
