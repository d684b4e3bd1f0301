//! The driver and the emitter.

use super::electronics::BIPOLAR;
use super::parts::EMITTER_PART;
use super::*;
use Dimension::*;

const SERVO: &[Key] = &[
    number(
        "bandwidth",
        Hertz,
        POSITIVE,
        "\"100 kHz\"",
        "where the loop gain has fallen to 1/√2",
    ),
    number("gain", Number, POSITIVE, "20", "loop gain at low frequency"),
];

pub(super) static DRIVER: Spec = Spec {
    path: "transmitter.driver",
    meaning: "Turns volts into the emitter's current",
    many: false,
    required: true,
    common: &[
        number("supply", Volt, POSITIVE, "\"9 V\"", "supply"),
        number(
            "input_resistance",
            Ohm,
            POSITIVE_INF,
            "\"100 kΩ\"",
            "load on what drives it; infinite when absent",
        )
        .or_infinite(),
        table(
            "servo",
            SERVO,
            "{ bandwidth = \"100 kHz\", gain = 20 }",
            "feedback from a monitor photodiode",
        ),
    ],
    kinds: &[
        Kind {
            name: "series-resistor",
            meaning: "the audio in series with supply, resistor and emitter",
            keys: &[number(
                "resistor",
                Ohm,
                NON_NEGATIVE,
                "\"330 Ω\"",
                "in series with the emitter",
            )],
            choices: &[],
            class: None,
        },
        Kind {
            name: "current-sink",
            meaning: "a bias current that the audio voltage moves",
            keys: &[
                number("bias", Ampere, POSITIVE, "\"20 mA\"", "current at rest"),
                number(
                    "slope",
                    Transconductance,
                    POSITIVE,
                    "\"16 mA/V\"",
                    "current for each volt",
                ),
                number("sense", Ohm, NON_NEGATIVE, "\"10 Ω\"", "sense resistor"),
                number(
                    "saturation",
                    Volt,
                    NON_NEGATIVE,
                    "\"0.3 V\"",
                    "least voltage across the sink",
                ),
            ],
            choices: &[],
            class: None,
        },
        Kind {
            name: "transistor",
            meaning: "a common-emitter modulator",
            keys: &[
                number(
                    "bias",
                    Ampere,
                    POSITIVE,
                    "\"20 mA\"",
                    "collector current at rest",
                ),
                number(
                    "emitter_resistor",
                    Ohm,
                    NON_NEGATIVE,
                    "\"33 Ω\"",
                    "in the emitter",
                ),
                number(
                    "bias_resistance",
                    Ohm,
                    POSITIVE_INF,
                    "\"10 kΩ\"",
                    "of the base divider; infinite when absent",
                )
                .or_infinite(),
            ],
            choices: &[],
            class: Some(&BIPOLAR),
        },
    ],
};

pub(super) static EMITTER: Spec = Spec {
    path: "transmitter.emitter",
    meaning: "The LED",
    many: false,
    required: true,
    common: &[number(
        "count",
        Count,
        PIECES,
        "1",
        "identical LEDs in series whose light adds",
    )
    .or(1.0)],
    kinds: &[Kind {
        name: "",
        meaning: "",
        keys: &[Key {
            name: "curve",
            what: What::Pairs([(Ampere, NON_NEGATIVE), (Watt, NON_NEGATIVE)]),
            absent: Absent::Nothing,
            example: "[[\"0 mA\", \"0 mW\"], [\"50 mA\", \"8 mW\"]]",
            meaning: "measured light for each current, in place of the flux law",
        }],
        choices: &[
            Choice {
                ways: &[&["half_angle"], &["divergence"]],
                needed: true,
            },
            Choice {
                ways: &[
                    &["flux", "at_current", "low_current", "droop_current"],
                    &["curve"],
                ],
                needed: true,
            },
        ],
        class: Some(&EMITTER_PART),
    }],
};
