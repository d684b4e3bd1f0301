//! The stations under test.

use crate::bench::{Draft, IDEAL_OPAMP, station};
use harklight::link::Link;
use harklight::station::Model;

/// How the static law can be seen in time.
#[derive(Clone, Copy, PartialEq)]
pub enum Hold {
    /// By a held input, once everything has settled.
    Settled,
    /// Not at all: a capacitor blocks DC, or heat moves the law, and the Model's curve is the one before that.
    Never,
}

/// One station with what it is driven by.
pub struct Case {
    pub name: &'static str,
    pub draft: Draft,
    /// Every station at this path is checked.
    pub path: &'static str,
    /// Peak of a small signal, in the input's unit.
    pub small: f64,
    /// Inputs between which the static law is compared.
    pub span: (f64, f64),
    pub hold: Hold,
}

impl Case {
    pub fn link(&self) -> Link {
        self.draft.link()
    }

    pub fn stations<'a>(&self, link: &'a Link) -> Vec<&'a dyn Model> {
        station(link, self.path);
        let all = link.stations().iter().map(AsRef::as_ref);
        all.filter(|s: &&dyn Model| s.path() == self.path).collect()
    }
}

/// A source of 2 V behind 10 kΩ that is not quiet.
fn source() -> Draft {
    Draft::ideal()
        .set("source.full_scale=2 V")
        .set("source.resistance=10 kΩ")
        .set("source.noise=30 nV/√Hz")
}

/// A stage before the driver, behind that source.
fn stage(text: &str) -> Draft {
    source().transmitter(text)
}

fn opamp(keys: &str, part: &str) -> String {
    format!(
        "[[transmitter.stage]]\nname = \"amp\"\nkind = \"opamp\"\nsupply = [\"-9 V\", \"9 V\"]\n{keys}part = \"{part}\"\n"
    )
}

const LED: &str = "part = \"ir-led-narrow\"\n";
const COLD_LED: &str = "part = \"ir-led-narrow\"\nthermal_resistance = 0\n";
const RESISTOR: &str = "kind = \"series-resistor\"\nsupply = \"5 V\"\nresistor = \"150 Ω\"\n";
const SINK: &str = "kind = \"current-sink\"\nsupply = \"5 V\"\nbias = \"30 mA\"\nslope = \"25 mA/V\"\nsense = \"33 Ω\"\nsaturation = \"0.4 V\"\n";
const PIN: &str = "kind = \"photodiode\"\npart = \"pin-7mm2\"\nresponsivity = \"0.6 A/W\"\n";
const BEHIND: &str = "[[receiver.stage]]\nkind = \"coupling\"\ncapacitor = \"22 nF\"\n\
[[receiver.stage]]\nkind = \"trim\"\nresistance = \"1 MΩ\"\nwiper = 0.4\n";

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

/// Every built station, by the ways in which it can stand.
pub fn all() -> Vec<Case> {
    use Hold::{Never, Settled};
    let case = |name, draft, path, small, span, hold| Case {
        name,
        draft,
        path,
        small,
        span,
        hold,
    };
    let amp = "transmitter.stage.amp";
    let first = "transmitter.stage.1";
    let head = "transmitter.emitter";
    let front = "receiver.front_end";
    let gain_of_23 = "connection = \"non-inverting\"\nfeedback = \"22 kΩ\"\nground = \"1 kΩ\"\n";
    let biased = "connection = \"non-inverting\"\nfeedback = \"22 kΩ\"\nground = \"4.7 kΩ\"\nbias_resistance = \"47 kΩ\"\n";
    let coupling = |farads: &str| {
        format!("[[transmitter.stage]]\nkind = \"coupling\"\ncapacitor = \"{farads}\"\n")
    };
    let trim = |ohms: &str, wiper: f64, taper: &str| {
        format!(
            "[[transmitter.stage]]\nkind = \"trim\"\nresistance = \"{ohms}\"\nwiper = {wiper}\ntaper = \"{taper}\"\n"
        )
    };
    let slow = |keys| opamp(keys, "slow-bipolar");
    let large_input = |text: String| format!("{text}input_capacitance = \"200 pF\"\n");
    let filter = |keys: &str| format!("[[transmitter.stage]]\nkind = \"filter\"\n{keys}");
    vec![
        case("source", source(), "source", 0.1, (-1.0, 1.0), Settled),
        case(
            "coupling",
            stage(&(coupling("220 nF") + &slow(biased))),
            first,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "coupling into capacitance",
            stage(&(coupling("22 nF") + &large_input(slow(biased)))),
            first,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "trim, linear",
            stage(&trim("100 kΩ", 0.3, "linear")),
            first,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "trim, audio, loaded",
            stage(&(trim("47 kΩ", 0.7, "audio") + &slow(biased))),
            first,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "op-amp, non-inverting",
            stage(&slow(gain_of_23)),
            amp,
            1e-4,
            (-0.4, 0.4),
            Settled,
        ),
        case(
            "op-amp, inverting",
            stage(&slow(
                "connection = \"inverting\"\nfeedback = \"100 kΩ\"\nground = \"22 kΩ\"\n",
            )),
            amp,
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
            amp,
            1e-3,
            (-2.0, 2.0),
            Settled,
        ),
        case(
            "op-amp, three in a row",
            stage(&slow(
                "connection = \"non-inverting\"\nfeedback = \"10 kΩ\"\nground = \"3.3 kΩ\"\nstages = 3\noffset = 0\n",
            )),
            amp,
            1e-3,
            (-2.0, 2.0),
            Settled,
        ),
        case(
            "op-amp, biased behind a capacitor",
            stage(&(coupling("22 nF") + &slow(biased))),
            amp,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "op-amp behind a trim",
            stage(&(trim("100 kΩ", 0.5, "linear") + &large_input(slow(biased)))),
            amp,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "op-amp without limits",
            stage(&format!(
                "[[transmitter.stage]]\nname = \"amp\"\nkind = \"opamp\"\nsupply = [\"-9 V\", \"9 V\"]\n{gain_of_23}{IDEAL_OPAMP}"
            )),
            amp,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "op-amp of slew alone",
            stage(&format!(
                "[[transmitter.stage]]\nname = \"amp\"\nkind = \"opamp\"\nsupply = [\"-9 V\", \"9 V\"]\n{gain_of_23}{}",
                IDEAL_OPAMP.replacen("slew = \"inf\"", "slew = \"1 V/µs\"", 1)
            )),
            amp,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "LED, series resistor, warming",
            source()
                .set("source.resistance=20 Ω")
                .driver(RESISTOR)
                .emitter(LED),
            head,
            5e-3,
            (-2.0, 2.0),
            Never,
        ),
        case(
            "LED, series resistor",
            source()
                .set("source.resistance=20 Ω")
                .driver(RESISTOR)
                .emitter(COLD_LED),
            head,
            5e-3,
            (-6.0, 6.0),
            Settled,
        ),
        case(
            "LED, current sink, warming",
            source().driver(SINK).emitter(LED),
            head,
            5e-3,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "LED, current sink",
            source().driver(SINK).emitter(COLD_LED),
            head,
            5e-3,
            (-3.0, 8.0),
            Settled,
        ),
        case(
            "two LEDs, loaded source",
            source()
                .driver(&format!("{SINK}input_resistance = \"47 kΩ\"\n"))
                .emitter(&format!("{COLD_LED}count = 2\n")),
            head,
            5e-3,
            (-3.0, 3.0),
            Settled,
        ),
        case(
            "air, Lambertian",
            source()
                .emitter(LED)
                .set("path.distance=3 m")
                .set("path.visibility=2 km"),
            "path",
            1e-3,
            (-1e-2, 1e-2),
            Settled,
        ),
        case(
            "air, beam",
            source()
                .emitter(LED)
                .set("path.distance=30 m")
                .emitter(&LED.replace("part", "divergence = \"1°\"\npart")),
            "path",
            1e-3,
            (-1e-2, 1e-2),
            Settled,
        ),
        case(
            "load at the anode",
            load("load = \"100 kΩ\"\n"),
            front,
            1e-7,
            (-5e-6, 2e-4),
            Settled,
        ),
        case(
            "load at the cathode",
            load("load = \"330 kΩ\"\nload_at = \"cathode\"\ncapacitance = \"10 pF\"\n"),
            front,
            1e-7,
            (-5e-6, 1e-4),
            Settled,
        ),
        case(
            "load with a coupling behind",
            load("load = \"470 kΩ\"\n").receiver(BEHIND),
            front,
            1e-7,
            (-5e-6, 1e-4),
            Never,
        ),
        case(
            "load without capacitance",
            load("load = \"100 kΩ\"\n").set("receiver.detector.capacitance=0"),
            front,
            1e-7,
            (-5e-6, 2e-4),
            Settled,
        ),
        case(
            "transimpedance, peaky",
            transimpedance("470 kΩ", "0.5 pF", "jfet-input"),
            front,
            1e-8,
            (-3e-6, 3e-5),
            Settled,
        ),
        case(
            "transimpedance, damped",
            transimpedance("1 MΩ", "15 pF", "slow-bipolar"),
            front,
            1e-8,
            (-3e-6, 3e-5),
            Settled,
        ),
        case(
            "transimpedance without limits",
            Draft::ideal(),
            front,
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
            "low-pass, buffered",
            stage(&filter(
                "shape = \"low-pass\"\nfamily = \"bessel\"\norder = 5\ncorner = \"3.4 kHz\"\n",
            )),
            first,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "notch, buffered",
            stage(&filter(
                "shape = \"notch\"\nfamily = \"butterworth\"\norder = 2\ncorner = \"150 Hz\"\nwidth = \"90 Hz\"\n",
            )),
            first,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "high-pass, buffered",
            stage(&filter(
                "shape = \"high-pass\"\nfamily = \"chebyshev\"\norder = 4\nripple = \"1 dB\"\ncorner = \"100 Hz\"\n",
            )),
            first,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "band-pass, buffered",
            stage(&filter(
                "shape = \"band-pass\"\nfamily = \"butterworth\"\norder = 3\ncorner = \"1 kHz\"\nwidth = \"2.4 kHz\"\n",
            )),
            first,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "emphasis",
            stage(&filter(
                "shape = \"emphasis\"\ntime_constant = \"50 µs\"\nsecond_time_constant = \"3 µs\"\n",
            )),
            first,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "low-pass, rc",
            stage(
                &(filter(
                    "shape = \"low-pass\"\nfamily = \"rc\"\nresistor = \"4k7\"\ncapacitor = \"1 nF\"\n",
                ) + &slow(biased)),
            ),
            first,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "low-pass, rc, before a coupling",
            stage(
                &(filter(
                    "shape = \"low-pass\"\nfamily = \"rc\"\nresistor = \"4k7\"\ncapacitor = \"1 nF\"\n",
                ) + &coupling("1 µF")
                    + &slow(biased)),
            ),
            first,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "high-pass, rc",
            stage(
                &(filter(
                    "shape = \"high-pass\"\nfamily = \"rc\"\nresistor = \"4k7\"\ncapacitor = \"100 nF\"\n",
                ) + &large_input(slow(biased))),
            ),
            first,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "power amplifier",
            stage(
                "[[transmitter.stage]]\nkind = \"power\"\ngain = \"26 dB\"\nsupply = [\"-12 V\", \"12 V\"]\noutput_current = \"1 A\"\ngbw = \"3 MHz\"\nslew = \"8 V/µs\"\nnoise_voltage = \"20 nV/√Hz\"\n",
            ),
            first,
            1e-3,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "power amplifier, class B",
            stage(
                "[[transmitter.stage]]\nkind = \"power\"\ngain = \"26 dB\"\nsupply = \"12 V\"\noutput_current = \"1 A\"\ngbw = \"3 MHz\"\nslew = \"8 V/µs\"\ndead_zone = \"1 fV\"\nnoise_voltage = \"20 nV/√Hz\"\n",
            ),
            first,
            1e-3,
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
    ]
}
