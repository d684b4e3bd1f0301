//! The top level, the source, the output and the test conditions.

use super::*;
use Dimension::*;

const fn plain(keys: &'static [Key]) -> Kind {
    Kind {
        name: "",
        meaning: "",
        keys,
        choices: &[],
        class: None,
    }
}

pub(super) static TOP: Spec = Spec {
    path: "",
    meaning: "The design as a whole",
    many: false,
    required: true,
    common: &[],
    kinds: &[plain(&[
        number(
            "format",
            Count,
            Range::new(1.0, true, 1.0, true),
            "1",
            "version of the file's format",
        )
        .or(1.0),
        text(
            "title",
            "\"Balcony link\"",
            "what the design is called; the file's name when absent",
        ),
        text("note", "\"second board\"", "anything worth keeping"),
        number("seed", Count, NON_NEGATIVE, "1", "seed of the run's noise").optional(),
        number(
            "temperature",
            Kelvin,
            Range::new(100.0, true, 600.0, true),
            "\"293.15 K\"",
            "of everything",
        )
        .or(293.15),
        text(
            "parts",
            "\"mine.toml\"",
            "the user's own catalogue, beside the design",
        ),
        Key {
            name: "silence",
            what: What::Text,
            absent: Absent::Nothing,
            example: "[\"receiver.detector.shot\"]",
            meaning: "noise contributors left out, by the names of the noise budget",
        },
    ])],
};

pub(super) static SOURCE: Spec = Spec {
    path: "source",
    meaning: "What drives the transmitter",
    many: false,
    required: true,
    common: &[],
    kinds: &[plain(&[
        number(
            "full_scale",
            Volt,
            POSITIVE,
            "\"1 V\"",
            "peak volts of a 0 dBFS sample",
        ),
        number(
            "resistance",
            Ohm,
            NON_NEGATIVE,
            "\"600 Ω\"",
            "source resistance",
        ),
        number(
            "noise",
            VoltNoise,
            NON_NEGATIVE,
            "\"20 nV/√Hz\"",
            "noise voltage density in series",
        )
        .or(0.0),
    ])],
};

const FULL_SCALE: Key = number(
    "full_scale",
    Volt,
    POSITIVE,
    "\"1 V\"",
    "peak volts that become 0 dBFS",
);
const IMPEDANCE: Key = number(
    "impedance",
    Ohm,
    POSITIVE_INF,
    "\"10 kΩ\"",
    "load on the last stage; infinite when absent",
)
.or_infinite();
const NOMINAL_IMPEDANCE: Key = number(
    "impedance",
    Ohm,
    POSITIVE,
    "\"8 Ω\"",
    "nominal, the load on the last stage",
);
const SENSITIVITY: &str = "sound pressure level at 1 W and 1 m (headphone: at 1 mW)";

pub(super) static OUTPUT: Spec = Spec {
    path: "output",
    meaning: "What the receiver feeds, and how volts become samples",
    many: false,
    required: true,
    common: &[FULL_SCALE],
    kinds: &[
        Kind {
            name: "line",
            meaning: "a line input",
            keys: &[IMPEDANCE],
            choices: &[],
            class: None,
        },
        Kind {
            name: "loudspeaker",
            meaning: "a loudspeaker in its box",
            keys: &[
                NOMINAL_IMPEDANCE,
                number(
                    "resonance",
                    Hertz,
                    POSITIVE,
                    "\"80 Hz\"",
                    "resonance of cone and box",
                ),
                number(
                    "quality",
                    Number,
                    POSITIVE,
                    "0.7",
                    "quality factor at resonance",
                ),
                number(
                    "voice_coil",
                    Hertz,
                    POSITIVE_INF,
                    "\"5 kHz\"",
                    "corner of the voice coil's roll-off",
                ),
                number("sensitivity", Decibel, ANY, "\"88 dB\"", SENSITIVITY),
                number("distance", Metre, POSITIVE, "\"1 m\"", "of the listener"),
            ],
            choices: &[],
            class: None,
        },
        Kind {
            name: "headphone",
            meaning: "a headphone on the ear",
            keys: &[
                NOMINAL_IMPEDANCE,
                number(
                    "resonance",
                    Hertz,
                    POSITIVE,
                    "\"60 Hz\"",
                    "resonance of the capsule; none when absent",
                ),
                number(
                    "quality",
                    Number,
                    POSITIVE,
                    "0.7",
                    "quality factor at resonance",
                ),
                number(
                    "voice_coil",
                    Hertz,
                    POSITIVE_INF,
                    "\"15 kHz\"",
                    "corner of the coil's roll-off",
                )
                .or_infinite(),
                number("sensitivity", Decibel, ANY, "\"100 dB\"", SENSITIVITY),
            ],
            choices: &[Choice {
                ways: &[&["resonance", "quality"]],
                needed: false,
            }],
            class: None,
        },
    ],
};

pub(super) static MEASURE: Spec = Spec {
    path: "measure",
    meaning: "Test conditions of the figures",
    many: false,
    required: false,
    common: &[],
    kinds: &[plain(&[
        number("tone", Hertz, POSITIVE, "\"1 kHz\"", "test tone").or(1e3),
        number(
            "level",
            Decibel,
            Range::new(-200.0, true, 60.0, true),
            "\"-6 dB\"",
            "level of the tone re full scale",
        )
        .or(-6.0),
        Key {
            name: "band",
            what: What::Numbers {
                dimension: Hertz,
                range: POSITIVE,
                fewest: 2,
                most: 2,
            },
            absent: Absent::Values(&[20.0, 20e3]),
            example: "[\"20 Hz\", \"20 kHz\"]",
            meaning: "band of the figures",
        },
    ])],
};
