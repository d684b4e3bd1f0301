//! The light's way, and what cuts it.

use super::*;
use Dimension::*;

pub(super) static PATH: Spec = Spec {
    path: "path",
    meaning: "The light's way from emitter to detector",
    many: false,
    required: true,
    common: &[],
    kinds: &[
        Kind {
            name: "air",
            meaning: "line of sight through air",
            keys: &[
                number(
                    "distance",
                    Metre,
                    POSITIVE,
                    "\"6 m\"",
                    "between emitter and detector",
                ),
                number(
                    "off_axis",
                    Angle,
                    ACUTE,
                    "\"5°\"",
                    "of the receiver from the emitter's axis",
                )
                .or(0.0),
                number(
                    "tilt",
                    Angle,
                    ACUTE,
                    "\"10°\"",
                    "of the receiver's axis from the line of sight",
                )
                .or(0.0),
                number(
                    "visibility",
                    Metre,
                    POSITIVE_INF,
                    "\"10 km\"",
                    "meteorological visibility; clear when absent",
                )
                .optional(),
                number(
                    "rain",
                    DecibelPerKilometre,
                    NON_NEGATIVE,
                    "\"6 dB/km\"",
                    "attenuation by rain (a bare number is dB/km)",
                )
                .or(0.0),
                number(
                    "turbulence",
                    Cn2,
                    NON_NEGATIVE,
                    "\"1e-14 m^-2/3\"",
                    "structure parameter C_n²",
                )
                .or(0.0),
                number(
                    "wind",
                    Speed,
                    NON_NEGATIVE,
                    "\"3 m/s\"",
                    "across the path; sets how fast scintillation moves",
                )
                .optional(),
                number(
                    "sway",
                    Angle,
                    ACUTE,
                    "\"0.1°\"",
                    "of the emitter's axis, rms for each axis",
                )
                .or(0.0),
                number("sway_bandwidth", Hertz, POSITIVE, "\"2 Hz\"", "of the sway").optional(),
                Key {
                    name: "windows",
                    what: What::Numbers {
                        dimension: Share,
                        range: POSITIVE_SHARE,
                        fewest: 0,
                        most: 64,
                    },
                    absent: Absent::Values(&[]),
                    example: "[0.92, 0.92]",
                    meaning: "transmittance of each window on the way",
                },
            ],
            choices: &[],
            class: None,
        },
        Kind {
            name: "fibre",
            meaning: "a fibre of large core",
            keys: &[
                number("length", Metre, POSITIVE, "\"20 m\"", "of the fibre"),
                number(
                    "attenuation",
                    DecibelPerMetre,
                    NON_NEGATIVE,
                    "\"0.2 dB/m\"",
                    "of the fibre",
                ),
                number("core", Metre, POSITIVE, "\"1 mm\"", "diameter of the core"),
                number(
                    "aperture",
                    Number,
                    POSITIVE_SHARE,
                    "0.5",
                    "numerical aperture",
                ),
                number("connectors", Count, NON_NEGATIVE, "2", "how many"),
                number(
                    "connector_loss",
                    Decibel,
                    NON_NEGATIVE,
                    "\"1.5 dB\"",
                    "of each connector",
                ),
            ],
            choices: &[],
            class: None,
        },
        Kind {
            name: "diffuse",
            meaning: "light scattered by a room's surfaces",
            keys: &[
                number("surface", SquareMetre, POSITIVE, "\"90 m²\"", "of the room"),
                number(
                    "reflectance",
                    Share,
                    Range::new(0.0, false, 1.0, false),
                    "0.6",
                    "mean of its surfaces",
                ),
                number("volume", CubicMetre, POSITIVE, "\"60 m³\"", "of the room"),
            ],
            choices: &[],
            class: None,
        },
    ],
};

pub(super) static INTERRUPTION: Spec = Spec {
    path: "path.interruption",
    meaning: "A cut of the beam",
    many: true,
    required: false,
    common: &[],
    kinds: &[Kind {
        name: "",
        meaning: "",
        keys: &[
            number("at", Second, NON_NEGATIVE, "\"2 s\"", "when it begins"),
            number(
                "rate",
                Hertz,
                POSITIVE,
                "\"0.1 Hz\"",
                "mean rate of cuts at random",
            ),
            number(
                "lasts",
                Second,
                POSITIVE,
                "\"150 ms\"",
                "how long each lasts",
            ),
            number(
                "edge",
                Second,
                NON_NEGATIVE,
                "\"1 ms\"",
                "how long the light takes to go and to come",
            )
            .or(1e-3),
        ],
        choices: &[Choice {
            ways: &[&["at"], &["rate"]],
            needed: true,
        }],
        class: None,
    }],
};
