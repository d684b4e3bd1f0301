//! Detector with front end, and the output.

use super::Hold::{Never, Settled};
use super::{Case, case};
use crate::bench::Draft;

const FRONT: &str = "receiver.front_end";
const PIN: &str = "kind = \"photodiode\"\npart = \"pin-7mm2\"\nresponsivity = \"0.6 A/W\"\n";
const BEHIND: &str = "[[receiver.stage]]\nkind = \"coupling\"\ncapacitor = \"22 nF\"\n\
[[receiver.stage]]\nkind = \"trim\"\nresistance = \"1 MΩ\"\nwiper = 0.4\n";
const PHOTOTRANSISTOR: &str = "kind = \"phototransistor\"\narea = \"1 cm²\"\nresponsivity = \"1 A/W\"\ngain = 400\ngain_low_current = \"3 µA\"\n\
gain_high_current = \"30 mA\"\nsaturation_current = \"20 fA\"\nreverse_gain = 3\nearly_voltage = \"60 V\"\ntransit_time = \"1.5 ns\"\n\
emitter_capacitance = \"6 pF\"\ncollector_capacitance = \"4 pF\"\n";
const CELL: &str = "kind = \"photocell\"\narea = \"1 cm²\"\nresponsivity = \"1 A/W\"\nsaturation_current = \"10 pA\"\nideality = 1\n\
series_resistance = \"20 Ω\"\nshunt_resistance = \"20 kΩ\"\ncapacitance = \"30 nF\"\n";

fn transimpedance(feedback: &str, capacitor: &str, part: &str) -> Draft {
    Draft::ideal()
        .set("transmitter.emitter.flux=3 µW")
        .detector(PIN)
        .front_end(&format!(
            "kind = \"transimpedance\"\nsupply = \"9 V\"\nreference = \"2 V\"\nbias = \"1 V\"\n\
             feedback = \"{feedback}\"\nfeedback_capacitor = \"{capacitor}\"\npart = \"{part}\"\n"
        ))
}

fn load(keys: &str) -> Draft {
    Draft::ideal()
        .set("transmitter.emitter.flux=5 µW")
        .detector(PIN)
        .front_end(&format!("kind = \"load\"\nsupply = \"5 V\"\n{keys}"))
}

/// A phototransistor that `flux` meets, on 9 V.
fn phototransistor(flux: &str, load: &str) -> Draft {
    Draft::ideal()
        .set(format!("transmitter.emitter.flux={flux}"))
        .detector(PHOTOTRANSISTOR)
        .front_end(&format!(
            "kind = \"load\"\nsupply = \"9 V\"\nload = \"{load}\"\n"
        ))
}

/// A cell that `flux` meets, into 1 kΩ.
fn cell(flux: &str) -> Draft {
    Draft::ideal()
        .set(format!("transmitter.emitter.flux={flux}"))
        .detector(CELL)
        .front_end("kind = \"load\"\nsupply = \"9 V\"\nload = \"1 kΩ\"\n")
}

pub fn cases() -> Vec<Case> {
    vec![
        case(
            "load at the anode",
            load("load = \"100 kΩ\"\n"),
            FRONT,
            1e-7,
            (-5e-6, 2e-4),
            Settled,
        ),
        case(
            "load at the cathode",
            load("load = \"330 kΩ\"\nload_at = \"cathode\"\ncapacitance = \"10 pF\"\n"),
            FRONT,
            1e-7,
            (-5e-6, 1e-4),
            Settled,
        ),
        case(
            "load with a coupling behind",
            load("load = \"470 kΩ\"\n").receiver(BEHIND),
            FRONT,
            1e-7,
            (-5e-6, 1e-4),
            Never,
        ),
        case(
            "load without capacitance",
            load("load = \"100 kΩ\"\n").set("receiver.detector.capacitance=0"),
            FRONT,
            1e-7,
            (-5e-6, 2e-4),
            Settled,
        ),
        case(
            "transimpedance, peaky",
            transimpedance("470 kΩ", "0.5 pF", "jfet-input"),
            FRONT,
            1e-8,
            (-3e-6, 3e-5),
            Settled,
        ),
        case(
            "transimpedance, damped",
            transimpedance("1 MΩ", "15 pF", "slow-bipolar"),
            FRONT,
            1e-8,
            (-3e-6, 3e-5),
            Settled,
        ),
        case(
            "transimpedance without limits",
            Draft::ideal(),
            FRONT,
            1e-7,
            (-1e-5, 1e-3),
            Settled,
        ),
        case(
            "output behind a trim",
            Draft::ideal()
                .receiver(BEHIND)
                .set("output.impedance=47 kΩ"),
            "output",
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "loudspeaker",
            Draft::ideal()
                .set("output.kind=loudspeaker")
                .set("output.impedance=8 Ω")
                .set("output.resonance=80 Hz")
                .set("output.quality=0.7")
                .set("output.voice_coil=5 kHz")
                .set("output.sensitivity=88 dB")
                .set("output.distance=1 m"),
            "output",
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "headphone",
            Draft::ideal()
                .set("output.kind=headphone")
                .set("output.impedance=64 Ω")
                .set("output.sensitivity=100 dB"),
            "output",
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "headphone with its resonance and coil",
            Draft::ideal()
                .set("output.kind=headphone")
                .set("output.impedance=64 Ω")
                .set("output.resonance=60 Hz")
                .set("output.quality=0.9")
                .set("output.voice_coil=15 kHz")
                .set("output.sensitivity=100 dB"),
            "output",
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "transimpedance with ambient servo",
            transimpedance("470 kΩ", "1 pF", "jfet-input")
                .set("receiver.front_end.ambient_servo=30 Hz"),
            FRONT,
            1e-8,
            (-3e-6, 3e-5),
            Never,
        ),
        case(
            "transimpedance with a fast ambient servo of low resistance",
            transimpedance("1 MΩ", "5 pF", "slow-bipolar")
                .set("receiver.front_end.ambient_servo=2 kHz")
                .set("receiver.front_end.servo_resistor=100 kΩ"),
            FRONT,
            1e-8,
            (-3e-6, 3e-5),
            Never,
        ),
        case(
            "phototransistor, active",
            phototransistor("5 µW", "1 kΩ"),
            FRONT,
            4e-9,
            (-1e-5, 1e-4),
            Settled,
        ),
        case(
            "phototransistor, saturated",
            phototransistor("20 µW", "10 kΩ"),
            FRONT,
            2e-9,
            (-4e-5, 2e-4),
            Settled,
        ),
        case(
            "phototransistor, load at the emitter",
            phototransistor("0.25 µW", "22 kΩ").set("receiver.front_end.load_at=emitter"),
            FRONT,
            2e-10,
            (-1e-6, 1e-5),
            Settled,
        ),
        case(
            "phototransistor with a base resistor",
            phototransistor("8 µW", "1 kΩ").set("receiver.detector.base_resistor=1 MΩ"),
            FRONT,
            4e-9,
            (-2e-5, 1e-4),
            Settled,
        ),
        case(
            "phototransistor, starved, a coupling behind",
            phototransistor("9 nW", "100 kΩ").receiver(BEHIND),
            FRONT,
            1e-11,
            (-2e-8, 1e-7),
            Never,
        ),
        case(
            "photocell in dim light",
            cell("20 µW"),
            FRONT,
            1e-7,
            (-4e-5, 1e-3),
            Settled,
        ),
        case(
            "photocell in an office",
            cell("400 µW"),
            FRONT,
            4e-7,
            (-8e-4, 5e-3),
            Settled,
        ),
        case(
            "photocell in the sun",
            cell("3 mW"),
            FRONT,
            3e-6,
            (-6e-3, 1e-2),
            Settled,
        ),
        case(
            "photocell with a coupling behind",
            cell("400 µW").receiver(BEHIND),
            FRONT,
            4e-7,
            (-8e-4, 5e-3),
            Never,
        ),
    ]
}
