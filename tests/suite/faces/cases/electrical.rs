//! The source and the electrical stages.

use super::Hold::{Never, Settled};
use super::{AMP, BIASED, BIPOLAR, Case, FIRST, case, coupling, large_input, slow, source, stage};
use crate::bench::{Draft, IDEAL_OPAMP};

const GAIN_OF_23: &str =
    "connection = \"non-inverting\"\nfeedback = \"22 kΩ\"\nground = \"1 kΩ\"\n";

fn trim(ohms: &str, wiper: f64, taper: &str) -> String {
    format!(
        "[[transmitter.stage]]\nkind = \"trim\"\nresistance = \"{ohms}\"\nwiper = {wiper}\ntaper = \"{taper}\"\n"
    )
}

/// A transistor stage on 9 V: 4.7 kΩ at the collector, 1 kΩ at the emitter of which `bypassed` is bypassed, a divider of 47 kΩ.
fn transistor(bias: &str, bypassed: f64) -> String {
    format!(
        "[[transmitter.stage]]\nname = \"amp\"\nkind = \"transistor\"\nsupply = \"9 V\"\nbias = \"{bias}\"\n\
         collector_resistor = \"4.7 kΩ\"\nemitter_resistor = \"1 kΩ\"\nbypassed = {bypassed}\nbias_resistance = \"47 kΩ\"\n{BIPOLAR}"
    )
}

/// A stage behind `ohms`, before a driver that shows 10 kΩ.
fn loaded(text: &str, ohms: &str) -> Draft {
    stage(text)
        .set(format!("source.resistance={ohms}"))
        .set("transmitter.driver.input_resistance=10 kΩ")
}

pub fn cases() -> Vec<Case> {
    vec![
        case("source", source(), "source", 0.1, (-1.0, 1.0), Settled),
        case(
            "coupling",
            stage(&(coupling("220 nF") + &slow(BIASED))),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "coupling into capacitance",
            stage(&(coupling("22 nF") + &large_input(slow(BIASED)))),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "trim, linear",
            stage(&trim("100 kΩ", 0.3, "linear")),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "trim, audio, loaded",
            stage(&(trim("47 kΩ", 0.7, "audio") + &slow(BIASED))),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "op-amp, non-inverting",
            stage(&slow(GAIN_OF_23)),
            AMP,
            1e-4,
            (-0.4, 0.4),
            Settled,
        ),
        case(
            "op-amp, inverting",
            stage(&slow(
                "connection = \"inverting\"\nfeedback = \"100 kΩ\"\nground = \"22 kΩ\"\n",
            )),
            AMP,
            1e-3,
            (-2.0, 2.0),
            Settled,
        ),
        case(
            "op-amp, inverting behind a capacitor",
            stage(
                &(coupling("100 nF")
                    + &slow(
                        "connection = \"inverting\"\nfeedback = \"100 kΩ\"\nground = \"22 kΩ\"\n",
                    )),
            ),
            AMP,
            1e-3,
            (-2.0, 2.0),
            Settled,
        ),
        case(
            "op-amp, three in a row",
            stage(&slow(
                "connection = \"non-inverting\"\nfeedback = \"10 kΩ\"\nground = \"3.3 kΩ\"\nstages = 3\noffset = 0\n",
            )),
            AMP,
            1e-3,
            (-2.0, 2.0),
            Settled,
        ),
        case(
            "op-amp, biased behind a capacitor",
            stage(&(coupling("22 nF") + &slow(BIASED))),
            AMP,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "op-amp behind a trim",
            stage(&(trim("100 kΩ", 0.5, "linear") + &large_input(slow(BIASED)))),
            AMP,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "op-amp without limits",
            stage(&format!(
                "[[transmitter.stage]]\nname = \"amp\"\nkind = \"opamp\"\nsupply = [\"-9 V\", \"9 V\"]\n{GAIN_OF_23}{IDEAL_OPAMP}"
            )),
            AMP,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "op-amp of slew alone",
            stage(&format!(
                "[[transmitter.stage]]\nname = \"amp\"\nkind = \"opamp\"\nsupply = [\"-9 V\", \"9 V\"]\n{GAIN_OF_23}{}",
                IDEAL_OPAMP.replacen("slew = \"inf\"", "slew = \"1 V/µs\"", 1)
            )),
            AMP,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "power amplifier",
            stage(
                "[[transmitter.stage]]\nkind = \"power\"\ngain = \"26 dB\"\nsupply = [\"-12 V\", \"12 V\"]\noutput_current = \"1 A\"\ngbw = \"3 MHz\"\nslew = \"8 V/µs\"\nnoise_voltage = \"20 nV/√Hz\"\n",
            ),
            FIRST,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "power amplifier, class B",
            stage(
                "[[transmitter.stage]]\nkind = \"power\"\ngain = \"26 dB\"\nsupply = \"12 V\"\noutput_current = \"1 A\"\ngbw = \"3 MHz\"\nslew = \"8 V/µs\"\ndead_zone = \"1 fV\"\nnoise_voltage = \"20 nV/√Hz\"\n",
            ),
            FIRST,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "transistor, driven by a voltage",
            loaded(&transistor("1 mA", 1.0), "1 Ω"),
            AMP,
            1e-5,
            (-0.3, 0.3),
            Settled,
        ),
        case(
            "transistor, driven by a current",
            loaded(&transistor("1 mA", 1.0), "100 kΩ"),
            AMP,
            1e-4,
            (-3.0, 3.0),
            Settled,
        ),
        case(
            "transistor, degenerate",
            loaded(&transistor("1 mA", 0.0), "600 Ω"),
            AMP,
            1e-3,
            (-5.0, 5.0),
            Settled,
        ),
        case(
            "transistor, partly degenerate",
            loaded(&transistor("1 mA", 0.8), "600 Ω"),
            AMP,
            1e-4,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "transistor, slow, behind much resistance",
            loaded(
                &transistor("1 mA", 1.0)
                    .replace("50 MHz", "20 MHz")
                    .replace("\"4 pF\"", "\"9 pF\""),
                "5 kΩ",
            ),
            AMP,
            1e-5,
            (-0.5, 0.5),
            Settled,
        ),
        case(
            "transistor, saturated at rest",
            loaded(&transistor("3 mA", 0.8), "600 Ω"),
            AMP,
            1e-4,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "transistor between capacitors",
            loaded(
                &(coupling("220 nF") + &transistor("1 mA", 0.8) + &coupling("470 nF")),
                "2.2 kΩ",
            ),
            AMP,
            1e-4,
            (-1.0, 1.0),
            Never,
        ),
    ]
}
