//! The electrical stages, the same on both sides of the light.

use super::electronics::{BIPOLAR, OP_AMP};
use super::receiver::{REFERENCE, SUPPLY};
use super::*;
use Dimension::*;

const FAMILIES: &[&str] = &["butterworth", "bessel", "chebyshev", "rc"];
const SHAPES: &[&str] = &[
    "low-pass",
    "high-pass",
    "band-pass",
    "notch",
    "emphasis",
    "de-emphasis",
];
const STAGE_SUPPLY: Key = Key {
    absent: Absent::Nothing,
    ..SUPPLY
};
/// Corners that filters can be reckoned for.
const FILTERED: Range = Range::new(1e-6, true, 1e12, true);
const NAME: &[Key] = &[text("name", "\"preamp\"", "by which paths name this stage")];

const KINDS: &[Kind] = &[
    Kind {
        name: "coupling",
        meaning: "a series capacitor",
        keys: &[number(
            "capacitor",
            Farad,
            POSITIVE,
            "\"100 nF\"",
            "in series",
        )],
        choices: &[],
        class: None,
    },
    Kind {
        name: "trim",
        meaning: "a potentiometer",
        keys: &[
            number(
                "resistance",
                Ohm,
                POSITIVE,
                "\"10 kΩ\"",
                "of the whole track",
            ),
            number(
                "wiper",
                Share,
                SHARE,
                "0.5",
                "where the wiper stands, 0 at the cold end",
            ),
            word(
                "taper",
                &["linear", "audio"],
                "\"linear\"",
                "law of the track",
            )
            .or_word("linear"),
        ],
        choices: &[],
        class: None,
    },
    Kind {
        name: "opamp",
        meaning: "an op-amp with its gain resistors",
        keys: &[
            word(
                "connection",
                &["non-inverting", "inverting"],
                "\"non-inverting\"",
                "which input the signal drives",
            ),
            number(
                "feedback",
                Ohm,
                NON_NEGATIVE,
                "\"100 kΩ\"",
                "from the output to the inverting input",
            ),
            number(
                "ground",
                Ohm,
                POSITIVE_INF,
                "\"10 kΩ\"",
                "gain-setting resistor (the input resistor when inverting)",
            ),
            number(
                "bias_resistance",
                Ohm,
                POSITIVE_INF,
                "\"100 kΩ\"",
                "from the non-inverting input to the reference; infinite when absent",
            )
            .or_infinite(),
            number(
                "stages",
                Count,
                Range::new(1.0, true, 16.0, true),
                "1",
                "identical ones in a row",
            )
            .or(1.0),
            STAGE_SUPPLY,
            REFERENCE,
        ],
        choices: &[],
        class: Some(&OP_AMP),
    },
    Kind {
        name: "transistor",
        meaning: "a common-emitter amplifier",
        keys: &[
            STAGE_SUPPLY,
            number(
                "bias",
                Ampere,
                POSITIVE,
                "\"1 mA\"",
                "collector current at rest",
            ),
            number(
                "collector_resistor",
                Ohm,
                POSITIVE,
                "\"4.7 kΩ\"",
                "in the collector",
            ),
            number(
                "emitter_resistor",
                Ohm,
                NON_NEGATIVE,
                "\"1 kΩ\"",
                "in the emitter",
            ),
            number(
                "bypassed",
                Share,
                SHARE,
                "0.5",
                "share of the emitter resistor that a capacitor bypasses",
            ),
            number(
                "bias_resistance",
                Ohm,
                POSITIVE_INF,
                "\"47 kΩ\"",
                "of the base divider; infinite when absent",
            )
            .or_infinite(),
        ],
        choices: &[],
        class: Some(&BIPOLAR),
    },
    Kind {
        name: "filter",
        meaning: "a filter",
        keys: &[
            word("shape", SHAPES, "\"low-pass\"", "what passes"),
            word("family", FAMILIES, "\"butterworth\"", "its alignment").optional(),
            number(
                "order",
                Count,
                Range::new(1.0, true, 8.0, true),
                "2",
                "order, 1 to 8 (of each edge of a band)",
            )
            .optional(),
            number(
                "corner",
                Hertz,
                FILTERED,
                "\"20 kHz\"",
                "−3 dB corner (chebyshev: end of the ripple), or middle of a band",
            )
            .optional(),
            number(
                "width",
                Hertz,
                FILTERED,
                "\"2 kHz\"",
                "between the band's edges (band-pass, notch)",
            )
            .optional(),
            number(
                "ripple",
                Decibel,
                Range::new(0.0, false, 12.0, true),
                "\"0.5 dB\"",
                "in the pass band (chebyshev)",
            )
            .optional(),
            number("resistor", Ohm, POSITIVE, "\"4.7 kΩ\"", "of a plain RC").optional(),
            number("capacitor", Farad, POSITIVE, "\"1 nF\"", "of a plain RC").optional(),
            number(
                "time_constant",
                Second,
                POSITIVE,
                "\"50 µs\"",
                "where the shelf begins (emphasis, de-emphasis)",
            )
            .optional(),
            number(
                "second_time_constant",
                Second,
                POSITIVE,
                "\"5 µs\"",
                "where the shelf ends",
            )
            .optional(),
        ],
        choices: &[],
        class: None,
    },
    Kind {
        name: "power",
        meaning: "a power amplifier",
        keys: &[
            number("gain", Decibel, ANY, "\"26 dB\"", "voltage gain"),
            STAGE_SUPPLY,
            number(
                "output_current",
                Ampere,
                POSITIVE_INF,
                "\"1 A\"",
                "most it can give",
            ),
            number(
                "dead_zone",
                Volt,
                NON_NEGATIVE,
                "\"0 V\"",
                "half-width of the class-B gap at the output",
            )
            .or(0.0),
            number(
                "gbw",
                Hertz,
                POSITIVE_INF,
                "\"3 MHz\"",
                "gain-bandwidth product",
            ),
            number("slew", SlewRate, POSITIVE_INF, "\"8 V/µs\"", "slew rate"),
            number(
                "noise_voltage",
                VoltNoise,
                NON_NEGATIVE,
                "\"20 nV/√Hz\"",
                "at the input",
            )
            .or(0.0),
        ],
        choices: &[],
        class: None,
    },
];

pub(super) static TRANSMITTER_STAGE: Spec = Spec {
    path: "transmitter.stage",
    meaning: "An electrical stage between source and driver",
    many: true,
    required: false,
    common: NAME,
    kinds: KINDS,
};

pub(super) static RECEIVER_STAGE: Spec = Spec {
    path: "receiver.stage",
    meaning: "An electrical stage after the front end",
    many: true,
    required: false,
    common: NAME,
    kinds: KINDS,
};
