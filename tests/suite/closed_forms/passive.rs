//! Corners of resistors and capacitors, loading counted.

use super::near;
use crate::bench::{Draft, station};
use harklight::figures::band::band_edges;

/// 1/(2πRC): the half-power edge of the whole link, found on its transfer.
#[test]
fn coupling_corners() {
    for (ohms, farads, corner) in [
        ("10 kΩ", "1 µF", 15.9155),
        ("47 kΩ", "100 nF", 33.8628),
        ("8 Ω", "220 µF", 90.4289),
    ] {
        let link = Draft::ideal()
            .receiver(&format!(
                "[[receiver.stage]]\nkind = \"coupling\"\ncapacitor = \"{farads}\"\n"
            ))
            .set(format!("output.impedance={ohms}"))
            .link();
        let edges = band_edges(|f| link.transfer(f).norm(), (20.0, 20e3));
        // The largest value inside 20 kHz lies below the plateau by (corner/20 kHz)²/2.
        near(edges.low.unwrap(), corner, 2e-5);
    }
}

/// The source's resistance counts with the load: 10 kΩ and 37 kΩ make the corner of 47 kΩ and divide by 47/37.
#[test]
fn a_source_and_its_load_share_the_corner() {
    let link = Draft::ideal()
        .transmitter("[[transmitter.stage]]\nkind = \"coupling\"\ncapacitor = \"100 nF\"\n")
        .set("source.resistance=10 kΩ")
        .set("transmitter.driver.input_resistance=37 kΩ")
        .link();
    let stage = station(&link, "transmitter.stage.1");
    near(stage.curve(1.0), 37.0 / 47.0, 1e-12);
    let at_corner = stage.transfer(33.8628).norm() / stage.curve(1.0);
    near(at_corner, 0.5f64.sqrt(), 2e-6);
    // Nothing else divides again: the link's gain in mid-band is 0.1 times that.
    near(link.transfer(20e3).norm(), 0.1 * 37.0 / 47.0, 3e-6);
}

/// A pot of 100 kΩ at 0.3 behind 10 kΩ, with 47 kΩ on its wiper, by Kirchhoff: upper 70 k + 10 k, lower 30 k ∥ 47 k.
#[test]
fn a_loaded_pot_divides_as_on_the_bench() {
    let link = Draft::ideal()
        .transmitter(
            "[[transmitter.stage]]\nkind = \"trim\"\nresistance = \"100 kΩ\"\nwiper = 0.3\n",
        )
        .set("source.resistance=10 kΩ")
        .set("transmitter.driver.input_resistance=47 kΩ")
        .link();
    let lower = 1.0 / (1.0 / 30e3 + 1.0 / 47e3);
    near(
        link.transfer(1000.0).norm(),
        0.1 * lower / (lower + 80e3),
        1e-12,
    );
}

/// The receive head's node: 1 MΩ and 10 pF, 15 915.5 Hz.
#[test]
fn a_load_and_its_capacitance() {
    let link = Draft::ideal()
        .front_end("kind = \"load\"\nsupply = \"1 kV\"\nload = \"1 MΩ\"\ncapacitance = \"10 pF\"\n")
        .link();
    let head = station(&link, "receiver.front_end");
    near(head.transfer(15_915.5).norm(), 1e6 * 0.5f64.sqrt(), 2e-6);
    let edges = band_edges(|f| link.transfer(f).norm(), (20.0, 20e3));
    // The largest value is the one at 20 Hz, 8e-7 below the plateau.
    near(edges.high.unwrap(), 15_915.5, 5e-6);
}
